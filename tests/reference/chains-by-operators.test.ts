/** Every chain against the sum of its operators as the literature writes it, element by element, by Kronecker products of ml-matrix. */
import { Matrix } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { bonds, nextNeighbours, windows } from '../../src/models/lattice.js';
import type { Geometry } from '../../src/models/lattice.js';
import type { Asked } from '../support/model-requests.js';
import { deviation, fermions, onSite, plusTranspose, product, spin, sum, times } from '../support/operators.js';

/** A few products of numbers of order one: some ulp. */
const ROUNDING = 1e-13;
const GEOMETRIES: readonly Geometry[] = ['ring', 'line'];
const FIELD = [0.3, -0.7, 1.1, 0.2, -0.45, 0.9];

const range = (count: number): number[] => Array.from({ length: count }, (_, x) => x);
const flip = new Matrix([
  [0, 1],
  [1, 0],
]);
const number = Matrix.diag([0, 1]);
const empty = Matrix.diag([1, 0]);
const sigmaZ = Matrix.diag([-1, 1]);
const raise = new Matrix([
  [0, 0],
  [1, 0],
]);

const fields = (operator: Matrix, sites: number): Matrix => sum(range(sites).map((x) => times(FIELD[x], onSite(operator, x, sites))));

/** The state has to be one without a name of its own. */
const expectSame = (model: string, asked: Asked, whole: Matrix): void => expect(deviation(model, asked, whole)).toBeLessThan(ROUNDING);

describe.each(GEOMETRIES)('on a %s', (geometry) => {
  const sites = 6;
  const near = bonds(sites, geometry);
  const next = nextNeighbours(sites, geometry);
  const four = windows(sites, 4, geometry);
  const three = windows(sites, 3, geometry);
  const at = (operator: Matrix) => (x: number) => onSite(operator, x, sites);
  const [n, hop] = [at(number), at(raise)];
  const hopping = ([x, y]: readonly number[]): Matrix => plusTranspose(product(hop(x), hop(y).transpose()));

  it('XXZ with next neighbours and a field', () => {
    const { z, plus } = spin(0.5);
    const exchange =
      (delta: number) =>
      ([x, y]: readonly number[]) =>
        Matrix.add(times(0.5, plusTranspose(product(at(plus)(x), at(plus)(y).transpose()))), times(delta, product(at(z)(x), at(z)(y))));
    const whole = sum([
      ...near.map(exchange(0.6)).map((m) => times(1.3, m)),
      ...next.map(exchange(0.6)).map((m) => times(-0.4, m)),
      fields(z, sites),
    ]);
    const parameters = { J: 1.3, 'next-J': -0.4, field: FIELD, geometry };
    expectSame('xxz-chain', { size: sites, coupling: 0.6, parameters, prepared: { product: 'uuddud' } }, whole);
  });

  it('mixed-field Ising', () => {
    const z = at(sigmaZ);
    const whole = times(
      -1,
      sum([
        ...near.map(([x, y]) => times(0.8, product(z(x), z(y)))),
        ...range(sites).map((x) => times(1.2, at(flip)(x))),
        fields(sigmaZ, sites),
      ]),
    );
    expectSame(
      'ising-chain',
      { size: sites, coupling: 1.2, parameters: { J: 0.8, field: FIELD, geometry }, prepared: { product: 'uuddud' } },
      whole,
    );
  });

  it('spinless fermions with next neighbours, the signs of the ring included', () => {
    const c = fermions(sites);
    const move = ([x, y]: readonly number[]): Matrix => plusTranspose(product(c[x].transpose(), c[y]));
    for (const occupation of [
      [1, 1, 0, 0, 1, 0],
      [1, 0, 0, 1, 0, 0],
    ]) {
      const whole = sum([
        ...near.map((pair) => times(-1.1, move(pair))),
        ...next.map((pair) => times(-0.3, move(pair))),
        ...near.map(([x, y]) => times(0.7, product(n(x), n(y)))),
        ...next.map(([x, y]) => times(0.2, product(n(x), n(y)))),
        fields(number, sites),
      ]);
      const particles = occupation.filter((value) => value === 1).length;
      const parameters = { J: 1.1, 'next-J': 0.3, 'next-V': 0.2, onsite: FIELD, particles, geometry };
      expectSame('fermion-chain', { size: sites, coupling: 0.7, parameters, prepared: { occupation } }, whole);
    }
  });

  it('pair hopping with interaction', () => {
    const pair = ([a, b, c, d]: readonly number[]): Matrix =>
      plusTranspose(product(hop(a), hop(b).transpose(), hop(c).transpose(), hop(d)));
    const whole = sum([
      ...four.map((sitesOf) => times(0.9, pair(sitesOf))),
      ...near.map(([x, y]) => times(0.4, product(n(x), n(y)))),
      fields(number, sites),
    ]);
    expectSame(
      'pair-hopping-chain',
      { size: sites, coupling: 0.9, parameters: { V: 0.4, onsite: FIELD, geometry }, prepared: { product: '011010' } },
      whole,
    );
  });

  it('folded XXZ: hops where the outer neighbours are equal', () => {
    const z = at(sigmaZ);
    const equal = (a: number, d: number): Matrix => times(0.5, Matrix.add(Matrix.eye(2 ** sites), product(z(a), z(d))));
    const whole = sum([...four.map(([a, b, c, d]) => times(0.9, product(equal(a, d), hopping([b, c])))), fields(number, sites)]);
    expectSame(
      'folded-xxz-chain',
      { size: sites, coupling: 0.9, parameters: { onsite: FIELD, geometry }, prepared: { product: '010001' } },
      whole,
    );
  });

  it('particle-conserving East', () => {
    const whole = sum([...three.map(([a, b, c]) => times(0.9, product(n(a), hopping([b, c])))), fields(number, sites)]);
    expectSame(
      'east-hopping-chain',
      { size: sites, coupling: 0.9, parameters: { onsite: FIELD, geometry }, prepared: { product: '110010' } },
      whole,
    );
  });

  it('quantum East', () => {
    const bare = Matrix.eye(2 ** sites);
    const pairs = windows(sites, 2, geometry);
    const whole = sum([
      ...pairs.map(([x, y]) => times(-0.5, product(n(x), Matrix.sub(times(Math.exp(-0.4), at(flip)(y)), bare)))),
      fields(number, sites),
    ]);
    expectSame(
      'quantum-east-chain',
      { size: sites, coupling: 0.4, parameters: { onsite: FIELD, geometry }, prepared: { product: '101000' } },
      whole,
    );
  });

  it('blockade-constrained flips with detuning, in the blockade space and in the full one', () => {
    const down = at(empty);
    const neighbours = (x: number): number[] =>
      geometry === 'ring' ? [(x + sites - 1) % sites, (x + 1) % sites] : [x - 1, x + 1].filter((y) => y >= 0 && y < sites);
    const whole = sum([
      ...range(sites).map((x) => times(1.4, product(...neighbours(x).map(down), at(flip)(x)))),
      ...range(sites).map((x) => times(-0.6, n(x))),
      fields(number, sites),
    ]);
    const parameters = { omega: 1.4, onsite: FIELD, geometry };
    expectSame('pxp-chain', { size: sites, coupling: 0.6, parameters, prepared: { product: '010010' } }, whole);
    expectSame(
      'pxp-chain',
      { size: sites, coupling: 0.6, parameters: { ...parameters, space: 'full' }, prepared: { product: '011000' } },
      whole,
    );
  });

  it('t–Jz: fermions of two kinds without double occupancy', () => {
    const length = 3;
    // Modes 2x (up) and 2x + 1 (down) of site x; the projection forbids both.
    const c = fermions(2 * length);
    const count = c.map((m) => product(m.transpose(), m));
    const z = range(length).map((x) => times(0.5, Matrix.sub(count[2 * x], count[2 * x + 1])));
    const pairs = bonds(length, geometry);
    const whole = sum([
      ...pairs.flatMap(([x, y]) => [0, 1].map((s) => times(-1.2, plusTranspose(product(c[2 * x + s].transpose(), c[2 * y + s]))))),
      ...pairs.map(([x, y]) => times(0.8, product(z[x], z[y]))),
      ...range(length).map((x) => times(FIELD[x], Matrix.add(count[2 * x], count[2 * x + 1]))),
      ...z.map((m) => times(0.35, m)),
    ]);
    // Digits 0 empty, 1 up, 2 down → bits of the modes; configurations in the order of the family.
    const modes = [
      [0, 0],
      [1, 0],
      [0, 1],
    ];
    const kept = range(3 ** length).map((code) =>
      range(length)
        .flatMap((x) => modes[Math.floor(code / 3 ** (length - 1 - x)) % 3])
        .reduce((index, bit) => 2 * index + bit, 0),
    );
    const projected = whole.selection(kept, kept);
    for (const state of ['du0', 'd0u', '0d0'])
      expectSame(
        't-jz-chain',
        {
          size: length,
          coupling: 0.8,
          parameters: { t: 1.2, onsite: FIELD.slice(0, length), field: 0.35, geometry },
          prepared: { product: state },
        },
        projected,
      );
  });

  it('spin one with single-ion anisotropy', () => {
    const length = 4;
    const { z, plus } = spin(1);
    const put = (operator: Matrix) => (x: number) => onSite(operator, x, length);
    const whole = sum([
      ...bonds(length, geometry).map(([x, y]) =>
        times(
          1.1,
          Matrix.add(times(0.5, plusTranspose(product(put(plus)(x), put(plus)(y).transpose()))), times(0.7, product(put(z)(x), put(z)(y)))),
        ),
      ),
      ...range(length).map((x) => times(0.4, product(put(z)(x), put(z)(x)))),
      fields(z, length),
    ]);
    const parameters = { J: 1.1, anisotropy: 0.7, field: FIELD.slice(0, length), geometry };
    expectSame('spin-one-chain', { size: length, coupling: 0.4, parameters, prepared: { product: '+0-0' } }, whole);
  });

  it('dipole-conserving spin one: S⁺(S⁻)²S⁺ and S⁺S⁻S⁻S⁺', () => {
    const length = 4;
    const { z, plus } = spin(1);
    const up = (x: number): Matrix => onSite(plus, x, length);
    const down = (x: number): Matrix => up(x).transpose();
    const whole = sum([
      ...windows(length, 3, geometry).map(([a, b, c]) => times(-1.1, plusTranspose(product(up(a), down(b), down(b), up(c))))),
      ...windows(length, 4, geometry).map(([a, b, c, d]) => times(-0.3, plusTranspose(product(up(a), down(b), down(c), up(d))))),
      fields(z, length),
    ]);
    const parameters = { J3: 1.1, field: FIELD.slice(0, length), geometry };
    for (const state of ['0+-0', '-+0+'])
      expectSame('dipole-spin-one-chain', { size: length, coupling: 0.3, parameters, prepared: { product: state } }, whole);
  });

  it('pair flips of three colours', () => {
    const length = 4;
    const unit = (a: number, b: number): Matrix => {
      const m = Matrix.zeros(3, 3);
      m.set(a, b, 1);
      return m;
    };
    const flips = windows(length, 2, geometry).flatMap(([x, y]) =>
      range(3).flatMap((a) =>
        range(3)
          .filter((b) => b !== a)
          .map((b) => product(onSite(unit(a, b), x, length), onSite(unit(a, b), y, length))),
      ),
    );
    const whole = sum([...flips.map((m) => times(0.9, m)), fields(Matrix.diag([0, 1, 2]), length)]);
    expectSame(
      'pair-flip-chain',
      { size: length, coupling: 0.9, parameters: { onsite: FIELD.slice(0, length), geometry }, prepared: { product: 'aacb' } },
      whole,
    );
  });

  it('extended Bose–Hubbard, with and without a limit of bosons a site', () => {
    const length = 3;
    const truncated = (most: number): Matrix => {
      const b = Matrix.zeros(most + 1, most + 1);
      for (let k = 1; k <= most; k += 1) b.set(k - 1, k, Math.sqrt(k));
      const put = (operator: Matrix) => (x: number) => onSite(operator, x, length);
      const count = range(length).map(put(product(b.transpose(), b)));
      const pairs = bonds(length, geometry);
      return sum([
        ...pairs.map(([x, y]) => times(-1.2, plusTranspose(product(put(b)(x).transpose(), put(b)(y))))),
        ...count.map((m) => times(0.45, Matrix.sub(product(m, m), m))),
        ...pairs.map(([x, y]) => times(0.7, product(count[x], count[y]))),
        ...count.map((m, x) => times(FIELD[x], m)),
      ]);
    };
    const parameters = { J: 1.2, U: 0.9, particles: 3, onsite: FIELD.slice(0, length), geometry };
    const prepared = { occupation: [2, 0, 1] };
    expectSame('extended-bose-hubbard-chain', { size: length, coupling: 0.7, parameters, prepared }, truncated(3));
    expectSame(
      'extended-bose-hubbard-chain',
      { size: length, coupling: 0.7, parameters: { ...parameters, most: 2 }, prepared },
      truncated(2),
    );
  });
});
