/** `windrow trace`: a place of a stored sweep, a file, or a point beside the grid; numbers from closed forms of two levels. */
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { makeWorkplace, runCli, type Workplace } from './small-store.js';

const SWEEP = `
name: flips
model: two-level
coupling: { from: 0.1, to: 1.5, count: 15 }
prepare: up
schedules:
  - { family: fixed, interval: 0.3 }
  - { family: exponential, mean: 1 }
budget: 20
`;

interface TraceDocument {
  readonly coordinates: { readonly coupling: number };
  readonly question: { readonly schedule: { readonly family: string }; readonly budget: number };
  readonly recurrent_weight: number;
  readonly series: { readonly [name in 'time' | 'detection' | 'survival' | 'transition']: readonly number[] };
  readonly phase: { readonly of: string; readonly winding: number; readonly phase: readonly number[] };
  readonly correlations: { readonly re: readonly (readonly number[])[]; readonly im: readonly (readonly number[])[] };
}

let place: Workplace;
beforeAll(async () => {
  place = makeWorkplace();
  const { status, err } = await place.run('sweep', place.write('flips.yaml', SWEEP));
  if (status !== 0) throw new Error(err);
});
afterAll(() => place.remove());

describe('trace', () => {
  it('of a stored point: S_n = sin²gτ cos^{2(n−1)}gτ, <|u|²> = cos²ngτ, winding 2; drawn as a figure', async () => {
    // Two levels ±g of weights 1/2; elementary. The grid value next to 0.3 is meant by 0.3.
    const figures = join(place.folder, 'figures');
    const { status, out, err } = await place.run('trace', 'flips', '--set', 'coupling=0.3', '--figures', figures, '--format', 'json');
    expect(status).toBe(0);
    expect(err).toContain('nothing was diagonalised');
    const [fixed, random] = JSON.parse(out) as [TraceDocument, TraceDocument];
    const angle = 0.3 * 0.3;
    fixed.series.survival.forEach((value, n) =>
      expect(value).toBeCloseTo(n === 0 ? 1 : Math.sin(angle) ** 2 * Math.cos(angle) ** (2 * (n - 1)), 12),
    );
    fixed.series.transition.forEach((value, n) => expect(value).toBeCloseTo(Math.cos(n * angle) ** 2, 12));
    expect(fixed.series.time).toHaveLength(21);
    expect(fixed.phase).toMatchObject({ of: 'exact', winding: 2 });
    expect(fixed.correlations.re).toHaveLength(12);
    // Exponential intervals of mean 1: <u(t_1)> = Re 1/(1 + ig) = 1/(1 + g²).
    expect(random.correlations.re[1][0]).toBeCloseTo(1 / 1.09, 12);
    expect(random.phase.of).toBe('draw');
    for (const name of ['trace-1', 'trace-2']) {
      expect(
        readFileSync(join(figures, `${name}.png`))
          .subarray(1, 4)
          .toString(),
      ).toBe('PNG');
      const svg = readFileSync(join(figures, `${name}.svg`), 'utf8');
      expect(svg).toContain('winding phase');
      expect(svg).not.toContain('NaN');
    }
  });

  it('of a point beside the grid computes it, and takes another schedule and budget', async () => {
    const args = ['--set', 'coupling=0.33', '--schedule', '{ family: fixed, interval: 1 }', '--budget', '5', '--format', 'csv'];
    const { out, err } = await place.run('trace', 'flips', ...args);
    expect(err).toContain('not in the store');
    const [header, ...lines] = out.trimEnd().split('\n');
    expect(header).toBe('question,n,time,detection,survival,transition,recurrent_weight');
    expect(lines).toHaveLength(6);
    expect(Number(lines[1].split(',')[3])).toBeCloseTo(Math.cos(0.33) ** 2, 12);
  });

  it('of a file needs no store, and is refused while an axis is open', async () => {
    const file = place.write('flips.yaml', SWEEP);
    const away = { WINDROW_STORE: '/nonexistent' };
    const { status, out } = await runCli(['trace', file, '--set', 'coupling=0.3', '--question', '0', '--part', 'phase'], away);
    expect(status).toBe(0);
    expect(out).toMatch(/winding of the phase +2 \(of all measurements, exact\)/);
    const open = await runCli(['trace', file], away);
    expect(open).toMatchObject({ status: 2, out: '' });
    expect(open.err).toContain('coupling (15 values)');
  });
});
