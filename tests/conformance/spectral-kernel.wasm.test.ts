import { expect, it } from 'vitest';
import { wasmKernel } from '../../src/linalg/wasm/wasm-kernel.js';
import { kernelsRun } from '../../src/linalg/wasm/workspace.js';
import { spectralKernelSuite } from './spectral-kernel.suite.js';

it('runs on every Node that windrow runs on', () => expect(kernelsRun()).toBe(true));

spectralKernelSuite(wasmKernel.name, wasmKernel);
