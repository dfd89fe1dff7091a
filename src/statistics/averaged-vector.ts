/** The averaged monitored step in WebAssembly: lays out what src/linalg/wasm/assembly/averaged.ts works on. */
import { complexPlace as place, padded, triangleLength } from '../linalg/wasm/layout.js';
import { addresses, takeWorkspace } from '../linalg/wasm/workspace.js';
import { preparedInUnits, type OpenIteration } from './averaged-iteration.js';

/** Levels go in the order of the measure; only the lower triangle and the squares on the diagonal are kept. */
export const vectorIteration: OpenIteration = (measure, distribution, kappa) => {
  const { energies, weights } = measure;
  const n = weights.length;
  const { take, bytes } = addresses();
  const elements = 2 * triangleLength(n);
  const x = take(elements);
  const r = take(elements);
  const v = take(padded(n));
  const c = take(2 * padded(n));
  const u = take(2 * padded(n));
  const out = take(2);
  const workspace = takeWorkspace(bytes());
  workspace.view(x, (out - x) / 8).fill(0);

  const xs = workspace.view(x, elements);
  const rs = workspace.view(r, elements);
  const a = preparedInUnits(measure);
  const complement = new Float64Array(2);
  const set = (i: number, j: number, re: number, im: number): void => {
    const at = place(i, j);
    xs[at] = re;
    xs[at + 2] = im;
    rs[at] = a.re[i] * a.re[j] + a.im[i] * a.im[j];
    rs[at + 2] = a.im[i] * a.re[j] - a.re[i] * a.im[j];
  };
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < i; j++) {
      distribution.complement(energies[i] - energies[j], complement);
      set(i, j, 1 - complement[0], -complement[1]);
      if (i >> 2 === j >> 2) set(j, i, 1 - complement[0], complement[1]);
    }
    set(i, i, 1, 0);
  }
  workspace.view(v, n).set(weights);
  const results = workspace.view(out, 2);
  results[1] = weights.reduce((sum, weight, i) => sum + weight * rs[place(i, i)], 0);
  const { averagedStep } = workspace.kernels;
  return {
    step() {
      averagedStep(n, x, r, v, c, u, kappa, out);
      return results[0];
    },
    remaining: () => results[1],
    close: () => workspace.release(),
  };
};
