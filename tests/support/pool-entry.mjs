/**
 * A compute entry for tests of the pool: what a task does is told by its coupling. 1: fills the heap until the thread dies;
 * 2: ends the thread; 3: throws; 4: dies the first time only (a flag in shared memory cannot reach here, so a file stands for it);
 * 5: answers with a measure; anything else: an empty outcome.
 */
import { existsSync, writeFileSync } from 'node:fs';
import { move, transferableSymbol, valueSymbol } from 'piscina';

const exhaust = () => {
  const hoard = [];
  for (;;) hoard.push({ hoard: new Array(1000).fill(hoard.length) });
};

const measured = () => {
  const weights = new Float64Array([0.25, 0.75]);
  return { measure: { energies: new Float64Array([-1, 1]), weights, overlapRe: weights, overlapIm: null }, fields: {}, overlap: [1, 0] };
};

const evaluate = ({ id, spec }) => {
  if (spec.coupling === 1) exhaust();
  if (spec.coupling === 2) process.exit(7);
  if (spec.coupling === 3) throw new TypeError('a fault of the program');
  if (spec.coupling === 4 && !existsSync(spec.parameters.flag)) {
    writeFileSync(spec.parameters.flag, '');
    exhaust();
  }
  const point = spec.coupling === 5 ? { id, spec, measured: measured() } : null;
  return { point, cells: [], failure: null, seconds: { kernel: spec.coupling, statistics: 0 } };
};

export function evaluateTasks({ tasks }) {
  const outcomes = tasks.map(evaluate);
  const buffers = outcomes.flatMap(({ point }) => (point ? [point.measured.measure.energies.buffer] : []));
  return move({ [transferableSymbol]: buffers, [valueSymbol]: outcomes });
}
