import { describe, expect, it } from 'vitest';
import { fittedShare, fragmentationOf, type SizeShare } from '../../../src/analysis/fragmentation.js';

const range = (from: number, to: number): number[] => Array.from({ length: to - from + 1 }, (_, k) => from + k);

function binomial(n: number, k: number): number {
  let value = 1;
  for (let i = 1; i <= k; i += 1) value = (value * (n - k + i)) / i;
  return value;
}

const shares = (sizes: readonly number[], share: (size: number) => number): SizeShare[] =>
  sizes.map((size) => ({ size, share: share(size) }));

describe('fragmentationOf', () => {
  it('finds the exponent, power and alternation it was made with', () => {
    const made = shares(range(3, 14), (L) => 0.8 * Math.exp(-0.3 * L) * L ** 1.5 * (L % 2 === 1 ? 0.9 : 1));
    const { fragmentation, fit } = fragmentationOf(made);
    expect(fragmentation).toBe('strong');
    // The design matrix has a condition number of a few hundred: twelve digits.
    expect(fit?.exponent).toBeCloseTo(0.3, 11);
    expect(fit?.power).toBeCloseTo(1.5, 10);
    expect(fit?.alternation).toBeCloseTo(Math.log(0.9), 11);
    for (const { size, share } of made) expect(fittedShare(fit!, size)).toBeCloseTo(share, 11);
  });

  it('three-site dipole chain: largest sector C(L−1, ⌊(L−1)/2⌋) of 3^L, exponent ln(3/2)', () => {
    // Statistical localization: from strong fragmentation to strong edge modes, Phys. Rev. B 101, 125126 (2020), 10.1103/PhysRevB.101.125126
    const { fragmentation, fit } = fragmentationOf(shares(range(3, 16), (L) => binomial(L - 1, Math.floor((L - 1) / 2)) / 3 ** L));
    expect(fragmentation).toBe('strong');
    // Next orders in 1/L: a few per cent at these sizes.
    expect(fit!.exponent).toBeGreaterThan(0.97 * Math.log(1.5));
    expect(fit!.exponent).toBeLessThan(1.03 * Math.log(1.5));
    expect(fit!.exponent_error).toBeLessThan(0.03);
  });

  it('within conserved charge and dipole: strong for three sites, weak for three and four', () => {
    // Ergodicity breaking arising from Hilbert space fragmentation in dipole-conserving Hamiltonians, Phys. Rev. X 10, 011047 (2020),
    // 10.1103/PhysRevX.10.011047 (the two cases; numbers by enumeration)
    const three = [2, 3, 6, 10, 20, 35, 70, 126, 252, 462, 924];
    const spaces = [2, 3, 7, 13, 31, 70, 171, 418, 1056, 2676, 6923];
    expect(fragmentationOf(shares(range(3, 13), (L) => three[L - 3] / spaces[L - 3])).fragmentation).toBe('strong');
    const four = [3, 7, 15, 33, 75, 174, 439, 1100, 2819];
    const wide = [3, 7, 15, 33, 77, 176, 445, 1110, 2837];
    expect(fragmentationOf(shares(range(4, 12), (L) => four[L - 4] / wide[L - 4])).fragmentation).toBe('weak');
  });

  it('does not take a conserved number for fragmentation', () => {
    // The largest of L + 1 sectors of fixed magnetisation falls as a power: C(L, L/2)/2^L ~ √(2/(πL)).
    const { fragmentation, fit, reason } = fragmentationOf(shares(range(4, 16), (L) => binomial(L, Math.floor(L / 2)) / 2 ** L));
    expect(fragmentation).toBe('undecided');
    expect(Math.abs(fit!.exponent)).toBeLessThan(0.02);
    expect(reason).toMatch(/no faster than a power/);
    expect(fragmentationOf(shares(range(2, 12), () => 0.5)).fragmentation).toBe('undecided');
  });

  it('is undecided with too few sizes, and not fragmented with one sector', () => {
    const few = fragmentationOf(shares([4, 6, 8], (L) => 2 ** -L));
    expect(few).toMatchObject({ fragmentation: 'undecided', fit: null, reason: expect.stringMatching(/^too few sizes: 3/) });
    const four = fragmentationOf(shares([4, 6, 8, 10], (L) => 2 ** -L));
    expect(four.fragmentation).toBe('undecided');
    expect(four.fit?.exponent).toBeCloseTo(Math.log(2), 12);
    expect(four.fit?.power).toBeNull();
    expect(fragmentationOf([]).fragmentation).toBe('undecided');
    expect(fragmentationOf(shares([2, 3], () => 1))).toEqual({ fragmentation: 'none', reason: 'every size is a single sector', fit: null });
  });
});
