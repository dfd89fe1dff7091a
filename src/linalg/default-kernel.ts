/** The kernel that is used where none is asked for: WebAssembly where it runs, else TypeScript. One process always takes the same. */
import type { SpectralKernel } from './kernel.js';
import { referenceKernel } from './reference/reference-kernel.js';
import { wasmKernel } from './wasm/wasm-kernel.js';
import { kernelsRun } from './wasm/workspace.js';

/** Its name is part of the method version: builds differ in the last digits. */
export const defaultKernel: SpectralKernel = kernelsRun() ? wasmKernel : referenceKernel;
