/** What is compared with LAPACK and numpy: each work makes its data, the request for the other side, and the run of this side. */
import { randomStream } from '../../../dist/src/core/random.js';
import { densify } from '../../../dist/src/linalg/elements.js';
import { SparseBuilder } from '../../../dist/src/linalg/sparse-builder.js';
import { buildSchedule } from '../../../dist/src/schedules/registry.js';
import { spectralMeasure } from '../../../dist/src/spectral/measure.js';
import { detectionMoments } from '../../../dist/src/statistics/moments.js';
import { monitoredDetection } from '../../../dist/src/statistics/monitored.js';

const bytes = (...arrays) => Buffer.concat(arrays.map((array) => Buffer.from(array.buffer, array.byteOffset, array.byteLength)));

function randomDense(n, complex) {
  const stream = randomStream(n, 'matrix', String(complex));
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : null;
  for (let i = 0; i < n; i += 1) {
    for (let j = 0; j <= i; j += 1) {
      re[i * n + j] = re[j * n + i] = stream.normal();
      if (complex && j < i) im[j * n + i] = -(im[i * n + j] = stream.normal());
    }
  }
  return { kind: 'dense', dimension: n, re, im };
}

/** Strings of `length` letters, each at most `most`, that add up to `total`. */
function compositions(length, total, most) {
  if (length === 1) return total <= most ? [[total]] : [];
  const all = [];
  for (let first = 0; first <= Math.min(total, most); first += 1) {
    for (const rest of compositions(length - 1, total - first, most)) all.push([first, ...rest]);
  }
  return all;
}

/** Open chain of sites with hops between neighbours; `onsite` and `bond` give the diagonal. */
function chain(length, total, most, hop, diagonal) {
  const states = compositions(length, total, most);
  const place = new Map(states.map((state, index) => [state.join(), index]));
  const builder = new SparseBuilder(states.length);
  states.forEach((state, from) => {
    builder.add(from, from, diagonal(state));
    for (let x = 0; x + 1 < length; x += 1) {
      const to = [...state];
      to[x] -= 1;
      to[x + 1] += 1;
      const index = place.get(to.join());
      if (index !== undefined) builder.couple(index, from, hop(state[x], state[x + 1]));
    }
  });
  return builder.build();
}

const bosonChain = (sites, bosons) =>
  chain(
    sites,
    bosons,
    bosons,
    (a, b) => -Math.sqrt(a * (b + 1)),
    (n) => n.reduce((sum, k, x) => sum + 0.75 * k * (k - 1) + 0.1 * x * x * k, 0),
  );

/** XXZ chain with a field that breaks its mirror symmetry. */
const spinChain = (sites, up) =>
  chain(
    sites,
    up,
    1,
    () => 0.5,
    (s) => s.reduce((sum, k, x) => sum + 0.15 * x * k + (x > 0 ? 0.7 * (k - 0.5) * (s[x - 1] - 0.5) : 0), 0),
  );

function basisState(n, index) {
  const re = new Float64Array(n);
  re[index] = 1;
  return { re, im: null };
}

function randomState(n) {
  const stream = randomStream(n, 'state');
  const re = Float64Array.from({ length: n }, () => stream.normal());
  const norm = Math.hypot(...re);
  return { re: re.map((x) => x / norm), im: null };
}

function measured(matrix, state) {
  const system = { hilbertDimension: matrix.dimension, sectorDimension: matrix.dimension, matrix, detected: state, prepared: state };
  const { measure } = spectralMeasure(system);
  return [measure.weights.reduce((sum, v) => sum + v, 0), measure.weights.reduce((sum, v, k) => sum + v * measure.energies[k] ** 2, 0)];
}

const spectral = (name, rounds, aim, make) => ({
  name,
  rounds,
  aim,
  prepare() {
    const { matrix, state } = make();
    const { dimension: n, re, im } = densify(matrix);
    const data = bytes(re, state.re, new Float64Array(n), im ?? new Float64Array(0));
    return { request: { work: 'dense', n, complex: im !== null }, data, run: () => measured(matrix, state) };
  },
});

const dense = (n, complex, rounds, aim) =>
  spectral(`dense ${complex ? 'complex' : 'real'} ${n}`, rounds, aim, () => ({ matrix: randomDense(n, complex), state: randomState(n) }));

const sparse = (name, rounds, make) =>
  spectral(`sparse ${name}`, rounds, 0.42, () => {
    const matrix = make();
    return { matrix, state: basisState(matrix.dimension, Math.floor(matrix.dimension / 2)) };
  });

function tridiagonal(n) {
  return {
    name: `tridiagonal ${n}`,
    rounds: 3,
    aim: 0.1,
    prepare() {
      const stream = randomStream(n, 'tridiagonal');
      const diagonal = Float64Array.from({ length: n }, () => stream.normal());
      const offDiagonal = Float64Array.from({ length: n - 1 }, () => 0.5 + stream.uniform());
      const matrix = { kind: 'tridiagonal', dimension: n, diagonal, offDiagonal };
      return { request: { work: 'tridiagonal', n }, data: bytes(diagonal, offDiagonal), run: () => measured(matrix, basisState(n, 0)) };
    },
  };
}

const MEAN = 0.5;
const schedule = () => buildSchedule({ family: 'gamma', mean: MEAN, shape: 2.5 });

function levels(n) {
  const stream = randomStream(n, 'levels');
  const energies = Float64Array.from({ length: n }, (_, k) => k + 0.8 * stream.uniform());
  const raw = Float64Array.from({ length: n }, () => 0.2 + stream.uniform());
  const total = raw.reduce((sum, x) => sum + x, 0);
  const weights = raw.map((x) => x / total);
  return { energies, weights, overlapRe: weights, overlapIm: null };
}

const statistic = (work, n, rounds, aim, extra, run) => ({
  name: `${work} ${n}`,
  rounds,
  aim,
  prepare() {
    const measure = levels(n);
    const data = bytes(measure.energies, measure.weights.map(Math.sqrt));
    return { request: { work, n, mean: MEAN, ...extra }, data, run: () => run(measure) };
  },
});

const averaged = (n, steps) =>
  statistic('averaged', n, 7, 0.12, { steps }, (measure) => {
    // A budget of one keeps every level.
    const detection = monitoredDetection(measure, schedule(), { efficiency: 1, budget: 1 });
    let detected = 0;
    for (let k = 0; k < steps; k += 1) detected += detection.step();
    detection.close();
    return [detected];
  });

const moments = (n) =>
  statistic('moments', n, 9, 0.9, {}, (measure) => {
    const { mean, variance } = detectionMoments(measure, schedule());
    return [mean, variance];
  });

export const works = [
  dense(500, false, 15, 0.7),
  dense(1000, false, 9, 0.8),
  dense(2000, false, 3, 0.85),
  sparse('boson chain 1001', 9, () => bosonChain(5, 10)),
  sparse('spin chain 1001', 9, () => spinChain(14, 4)),
  sparse('spin chain 2002', 3, () => spinChain(14, 5)),
  dense(500, true, 9, 0.85),
  dense(1000, true, 3, 0.85),
  tridiagonal(10000),
  averaged(50, 20000),
  averaged(200, 2000),
  averaged(1000, 400),
  moments(200),
  moments(1000),
];
