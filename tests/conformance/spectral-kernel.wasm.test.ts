import { expect, it } from 'vitest';
import { wasmKernel } from '../../src/linalg/wasm/wasm-kernel.js';
import { kernelsRun } from '../../src/linalg/wasm/workspace.js';
import { spectralMeasure } from '../../src/spectral/measure.js';
import { randomSparse, randomState, systemFrom } from '../support/matrices.js';
import { spectralKernelSuite } from './spectral-kernel.suite.js';

it('runs on every Node that windrow runs on', () => expect(kernelsRun()).toBe(true));

spectralKernelSuite(wasmKernel.name, wasmKernel);

it('gives the same measure by Lanczos to the end and by Householder, where it takes the first alone', () => {
  const n = 1210;
  const system = systemFrom(randomSparse(n, 4), randomState(n, false, 5));
  const [a, b] = [wasmKernel, { ...wasmKernel, lanczosLimit: () => 10 }].map((kernel) => spectralMeasure(system, kernel));
  expect([a.fields.method, b.fields.method]).toEqual(['lanczos-ql', 'householder-ql']);
  expect(a.measure.energies.length).toBe(n);
  // Gaps of this matrix are a thousandth of its norm on average, so that weights are known to about 1e-12.
  a.measure.energies.forEach((energy, k) => {
    expect(Math.abs(energy - b.measure.energies[k])).toBeLessThan(1e-12);
    expect(Math.abs(a.measure.weights[k] - b.measure.weights[k])).toBeLessThan(1e-12);
  });
});
