/**
 * Identities of monitored evolution for random complex Hermitian matrices, states and schedules of every family.
 *
 * References: brute force in the original basis (propagator by Taylor's series), direct summation of the series, and drawn schedules.
 * - Recurrence for discrete time unitary evolutions, Commun. Math. Phys. 320, 543 (2013), 10.1007/s00220-012-1645-2: mean = number of phases.
 * - Large fluctuations of the first detected quantum return time, Phys. Rev. Research 1, 033086 (2019), 10.1103/PhysRevResearch.1.033086:
 *   variance by the zeros of the generating function.
 * - Quantum renewal equation for the first detection time of a quantum walk, J. Phys. A 50, 04LT01 (2017), 10.1088/1751-8121/aa5191.
 * - Dark states of quantum search cause imperfect detection, Phys. Rev. Research 2, 043107 (2020), 10.1103/PhysRevResearch.2.043107.
 */
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { randomStream } from '../../src/core/random.js';
import { buildSchedule } from '../../src/schedules/registry.js';
import type { ScheduleSpec } from '../../src/schedules/types.js';
import type { SpectralMeasure } from '../../src/spectral/types.js';
import { brightPart } from '../../src/statistics/levels.js';
import { detectionMoments, detectionProbability } from '../../src/statistics/moments.js';
import { detectionSeries, monitoredDetection } from '../../src/statistics/monitored.js';
import { drawAmplitudes } from '../../src/statistics/sampled.js';
import { transitionSeries } from '../../src/statistics/transition.js';
import { apply, conjugate, inner, plus, polynomialRoots, propagator, randomProblem, scaled, times } from '../support/complex-matrix.js';
import { decompose, type Complex, type DenseProblem } from '../support/reference-measure.js';

const time = fc.double({ min: 0.2, max: 2, noNaN: true });
const anySchedule: fc.Arbitrary<ScheduleSpec> = fc.oneof(
  time.map((interval) => ({ family: 'fixed', interval })),
  time.map((mean) => ({ family: 'exponential', mean })),
  fc.tuple(time, time).map(([mean, shape]) => ({ family: 'gamma', mean, shape: 2 * shape })),
  fc.tuple(time, time).map(([low, width]) => ({ family: 'uniform', low, high: low + width })),
  fc.tuple(time, time).map(([first, second]) => ({ family: 'two-point', first, second: second + 0.01, weight: 0.3 })),
  fc.tuple(time, time).map(([location, scale]) => ({ family: 'truncated-normal', location: location - 1, scale })),
  fc.tuple(time, time).map(([mean, shape]) => ({ family: 'inverse-gaussian', mean, shape })),
  fc.tuple(time, time, time).map((intervals) => ({ family: 'empirical', intervals })),
  fc.tuple(time, time).map(([mean, delay]) => ({ family: 'exponential', mean, 'dead-time': delay })),
);
const seed = fc.integer({ min: 1, max: 1e9 });
const size = fc.integer({ min: 1, max: 5 });
const efficiency = fc.constantFrom(1, 0.9, 0.4);
const options = { numRuns: 40, seed: 20 };

/** Survival amplitudes step by step in the original basis: f_n = <φ|U(τ_n) K … K U(τ_1)|ψ>, averaged over a list of intervals. */
function bruteForce(problem: DenseProblem, intervals: readonly (readonly [number, number])[], eta: number, count: number): number[] {
  const moves = intervals.map(([tau, weight]) => ({ matrix: propagator(problem, tau), weight }));
  const kappa = 1 - Math.sqrt(1 - eta);
  const n = problem.re.length;
  const F: number[] = [0];
  let rho = problem.prepared.map((a) => problem.prepared.map((b) => times(a, conjugate(b))));
  for (let k = 1; k <= count; k++) {
    let next: Complex[][] = rho.map((row) => row.map((): Complex => [0, 0]));
    for (const { matrix, weight } of moves) {
      // U ρ U†, column by column.
      const half = Array.from({ length: n }, (_, j) =>
        apply(
          matrix,
          rho.map((row) => row[j]),
        ),
      );
      for (let i = 0; i < n; i++) {
        const row = apply(
          matrix,
          Array.from({ length: n }, (_, j) => conjugate(half[j][i])),
        );
        for (let j = 0; j < n; j++) next[i][j] = plus(next[i][j], scaled(conjugate(row[j]), weight));
      }
    }
    const image = apply(next, problem.detected);
    F.push(eta * inner(problem.detected, image)[0]);
    const overlap = inner(problem.detected, image)[0];
    next = next.map((row, i) =>
      row.map((value, j) => {
        const cross = plus(times(problem.detected[i], conjugate(image[j])), times(image[i], conjugate(problem.detected[j])));
        const own = times(problem.detected[i], conjugate(problem.detected[j]));
        return plus(plus(value, scaled(cross, -kappa)), scaled(own, kappa * kappa * overlap));
      }),
    );
    rho = next;
  }
  return F;
}

describe('series', () => {
  it('F_n of drawn and averaged evolution agree with density matrices in the original basis', () => {
    fc.assert(
      fc.property(
        seed,
        size,
        fc.constantFrom('return' as const, 'transition' as const),
        time,
        time,
        efficiency,
        (s, n, kind, a, b, eta) => {
          const problem = randomProblem(s, n, kind);
          const measure = decompose(problem);
          const spec: ScheduleSpec = { family: 'empirical', intervals: [a, b, b] };
          const expected = bruteForce(
            problem,
            [
              [a, 1 / 3],
              [b, 2 / 3],
            ],
            eta,
            6,
          );
          const { detection, survival } = detectionSeries(measure, buildSchedule(spec), 6, eta);
          const fixed = detectionSeries(measure, buildSchedule({ family: 'fixed', interval: a }), 6, eta).detection;
          const fixedExpected = bruteForce(problem, [[a, 1]], eta, 6);
          let left = 1;
          for (let k = 1; k <= 6; k++) {
            left -= expected[k];
            // The decomposition and the propagator each carry some 1e-14.
            expect(Math.abs(detection[k] - expected[k])).toBeLessThan(1e-12);
            expect(Math.abs(survival[k] - left)).toBeLessThan(1e-12);
            expect(Math.abs(fixed[k] - fixedExpected[k])).toBeLessThan(1e-12);
          }
        },
      ),
      options,
    );
  });

  it('amplitudes of a fixed interval obey the renewal equation', () => {
    fc.assert(
      fc.property(seed, size, fc.constantFrom('return' as const, 'transition' as const), time, (s, n, kind, tau) => {
        const measure = decompose(randomProblem(s, n, kind));
        const sum = (re: Float64Array, im: Float64Array | null, k: number): Complex =>
          re.reduce<Complex>(
            (total, value, j) => {
              const phase = -measure.energies[j] * tau * k;
              return plus(total, times([value, im?.[j] ?? 0], [Math.cos(phase), Math.sin(phase)]));
            },
            [0, 0],
          );
        const f: Complex[] = [[0, 0]];
        for (let k = 1; k <= 12; k++) {
          let value = sum(measure.overlapRe, measure.overlapIm, k);
          for (let m = 1; m < k; m++) value = plus(value, scaled(times(f[m], sum(measure.weights, null, k - m)), -1));
          f.push(value);
        }
        const drawn = drawAmplitudes(measure, buildSchedule({ family: 'fixed', interval: tau }), 12, randomStream(1));
        f.forEach(([re, im], k) => expect(Math.hypot(drawn.re[k] - re, drawn.im[k] - im)).toBeLessThan(1e-11));
      }),
      options,
    );
  });

  it('averages over drawn schedules agree with the averaged map', () => {
    fc.assert(
      fc.property(seed, anySchedule, efficiency, (s, spec, eta) => {
        const measure = decompose(randomProblem(s, 3, 'transition'));
        const distribution = buildSchedule(spec);
        const draws = 3000;
        const expected = detectionSeries(measure, distribution, 3, eta).detection;
        const sums = new Float64Array(4);
        const squares = new Float64Array(4);
        const stream = randomStream(s, 'draws');
        for (let d = 0; d < draws; d++) {
          const { re, im } = drawAmplitudes(measure, distribution, 3, stream, eta);
          for (let k = 1; k <= 3; k++) {
            const value = eta * (re[k] ** 2 + im[k] ** 2);
            sums[k] += value;
            squares[k] += value * value;
          }
        }
        for (let k = 1; k <= 3; k++) {
          const mean = sums[k] / draws;
          const error = Math.sqrt(Math.max(0, squares[k] / draws - mean * mean) / draws);
          // Six standard errors: 60 comparisons would need 1e7 repetitions to miss by chance.
          expect(Math.abs(mean - expected[k])).toBeLessThan(6 * error + 1e-12);
        }
      }),
      { numRuns: 20, seed: 20 },
    );
  });

  it('averaged transition probability: direct double sum', () => {
    fc.assert(
      fc.property(seed, size, anySchedule, (s, n, spec) => {
        const measure = decompose(randomProblem(s, n, 'transition'));
        const distribution = buildSchedule(spec);
        const series = transitionSeries(measure, distribution, 20);
        const out = new Float64Array(2);
        for (const k of [0, 1, 2, 7, 20]) {
          let sum = 0;
          for (let i = 0; i < measure.energies.length; i++) {
            for (let j = 0; j < measure.energies.length; j++) {
              distribution.complement(measure.energies[i] - measure.energies[j], out);
              let power: Complex = [1, 0];
              for (let m = 0; m < k; m++) power = times(power, [1 - out[0], -out[1]]);
              const pair = times(
                [measure.overlapRe[i], measure.overlapIm?.[i] ?? 0],
                [measure.overlapRe[j], -(measure.overlapIm?.[j] ?? 0)],
              );
              sum += times(pair, power)[0];
            }
          }
          expect(Math.abs(series[k] - sum)).toBeLessThan(1e-12);
        }
      }),
      options,
    );
  });
});

/** Σ F, Σ nF, Σ n²F by following the series until nothing is left; null where that takes too long. */
function summed(measure: SpectralMeasure, spec: ScheduleSpec, eta: number): readonly [number, number, number] | null {
  const steps = monitoredDetection(brightPart(measure), buildSchedule(spec), { efficiency: eta, budget: 1e6 });
  const sums: [number, number, number] = [0, 0, 0];
  for (let n = 1; n <= 20000; n++) {
    const value = steps.step();
    sums[0] += value;
    sums[1] += n * value;
    sums[2] += n * n * value;
    if (steps.remaining() * n * n < 1e-14) return sums;
  }
  return null;
}

describe('moments', () => {
  it('exact moments and P equal the summed series', () => {
    let compared = 0;
    fc.assert(
      fc.property(
        seed,
        size,
        fc.constantFrom('return' as const, 'transition' as const),
        anySchedule,
        efficiency,
        (s, n, kind, spec, eta) => {
          const measure = brightPart(decompose(randomProblem(s, n, kind)));
          const sums = summed(measure, spec, eta);
          if (sums === null) return;
          compared++;
          const probability = detectionProbability(measure);
          const { mean, variance } = detectionMoments(measure, buildSchedule(spec), eta)!;
          expect(Math.abs(sums[0] - probability)).toBeLessThan(1e-11);
          expect(Math.abs(sums[1] / probability - mean) / mean).toBeLessThan(1e-9);
          const square = sums[2] / probability;
          expect(Math.abs(square - mean * mean - variance) / square).toBeLessThan(1e-9);
        },
      ),
      { numRuns: 150, seed: 20 },
    );
    expect(compared).toBeGreaterThan(75);
  });

  it('return: P = 1 and mean = (number of levels)/η for every schedule', () => {
    fc.assert(
      fc.property(seed, size, anySchedule, efficiency, (s, n, spec, eta) => {
        const measure = brightPart(decompose(randomProblem(s, n, 'return')));
        expect(detectionProbability(measure)).toBe(1);
        // The general route, for a prepared state that happens to be the detected one up to a sign.
        const negative = measure.weights.map((weight) => -weight);
        const general = detectionMoments({ ...measure, overlapRe: negative }, buildSchedule(spec), eta)!;
        expect(Math.abs(general.mean - n / eta) / n).toBeLessThan(1e-9);
        const short = detectionMoments(measure, buildSchedule(spec), eta)!;
        expect(short.mean).toBe(measure.energies.length / eta);
        expect(Math.abs(general.variance - short.variance)).toBeLessThan(1e-8 * (1 + short.variance));
      }),
      { numRuns: 100, seed: 20 },
    );
  });

  it('fixed interval: variance and F_1 by the zeros of the generating function', () => {
    fc.assert(
      fc.property(seed, fc.integer({ min: 2, max: 5 }), time, (s, n, tau) => {
        const measure = brightPart(decompose(randomProblem(s, n, 'return')));
        const phases = Array.from(measure.energies, (energy): Complex => [Math.cos(energy * tau), -Math.sin(energy * tau)]);
        // Σ_j v_j Π_{k≠j} (λ_k − z) = 0.
        let polynomial: Complex[] = phases.slice(1).map(() => [0, 0]);
        polynomial.push([0, 0]);
        polynomial = polynomial.slice(0, n);
        phases.forEach((_, j) => {
          let product: Complex[] = [[measure.weights[j], 0]];
          phases.forEach((lambda, k) => {
            if (k === j) return;
            const next: Complex[] = Array.from({ length: product.length + 1 }, () => [0, 0]);
            product.forEach((value, m) => {
              next[m] = plus(next[m], times(value, lambda));
              next[m + 1] = plus(next[m + 1], scaled(value, -1));
            });
            product = next;
          });
          polynomial = polynomial.map((value, m) => plus(value, product[m]));
        });
        const zeros = polynomialRoots(polynomial);
        let variance = 0;
        for (const a of zeros) {
          for (const b of zeros) {
            const product = times(a, conjugate(b));
            const rest: Complex = [1 - product[0], -product[1]];
            variance += (2 * times(product, conjugate(rest))[0]) / (rest[0] ** 2 + rest[1] ** 2);
          }
        }
        const found = detectionMoments(measure, buildSchedule({ family: 'fixed', interval: tau }))!.variance;
        // Zeros close to the circle lose digits as 1/(1 − |z|).
        const distance = Math.min(...zeros.map((z) => 1 - Math.hypot(...z)));
        expect(Math.abs(found - variance)).toBeLessThan((1e-11 / distance) * (1 + variance));
        const first = detectionSeries(measure, buildSchedule({ family: 'fixed', interval: tau }), 1).detection[1];
        expect(Math.abs(first - zeros.reduce((product, z) => product * (z[0] ** 2 + z[1] ** 2), 1))).toBeLessThan(1e-9);
      }),
      options,
    );
  });

  it('the dark part of the prepared state changes P, nothing else', () => {
    fc.assert(
      fc.property(seed, anySchedule, fc.double({ min: 0.1, max: 0.9, noNaN: true }), (s, spec, share) => {
        const measure = brightPart(decompose(randomProblem(s, 3, 'transition')));
        const factor = Math.sqrt(share);
        const dimmed = {
          ...measure,
          overlapRe: measure.overlapRe.map((q) => q * factor),
          overlapIm: measure.overlapIm!.map((q) => q * factor),
        };
        expect(Math.abs(detectionProbability(dimmed) / detectionProbability(measure) - share)).toBeLessThan(1e-13);
        const whole = detectionMoments(measure, buildSchedule(spec))!;
        const part = detectionMoments(dimmed, buildSchedule(spec))!;
        expect(Math.abs(part.mean / whole.mean - 1)).toBeLessThan(1e-10);
      }),
      options,
    );
  });

  it('elapsed time at detection is <τ><n> (Wald; Ann. Math. Stat. 15, 283 (1944), 10.1214/aoms/1177731235)', () => {
    // Drawn runs in the original amplitudes: the elapsed time weighted by each step's click probability.
    const measure = decompose(randomProblem(7, 3, 'transition'));
    for (const spec of [
      { family: 'exponential', mean: 0.8 },
      { family: 'two-point', first: 0.4, second: 1.5, weight: 0.6 },
    ] as ScheduleSpec[]) {
      const distribution = buildSchedule(spec);
      const { mean } = detectionMoments(brightPart(measure), distribution)!;
      const probability = detectionProbability(brightPart(measure));
      const values: number[] = [];
      for (let d = 0; d < 4000; d++) {
        const stream = randomStream(d, 'wald');
        let elapsed = 0;
        let weighted = 0;
        const taken: number[] = [];
        const sample = (from: typeof stream): number => {
          const tau = distribution.sample(from);
          taken.push(tau);
          return tau;
        };
        const { re, im } = drawAmplitudes(measure, { ...distribution, sample }, 400, stream);
        taken.forEach((tau, k) => {
          elapsed += tau;
          weighted += elapsed * (re[k + 1] ** 2 + im[k + 1] ** 2);
        });
        values.push(weighted / probability);
      }
      const average = values.reduce((a, b) => a + b, 0) / values.length;
      const error = Math.sqrt(values.reduce((a, b) => a + (b - average) ** 2, 0) / values.length / (values.length - 1));
      expect(Math.abs(average - mean * distribution.mean)).toBeLessThan(5 * error);
    }
  });
});
