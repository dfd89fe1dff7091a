/**
 * The WebAssembly kernels with memory to work on.
 *
 * The module is compiled once a thread, when it is first asked for. Workspaces are kept and lent out again, so a thread allocates once:
 * fresh pages cost more than the arithmetic of a small point. A workspace that had to grow large is dropped when it is returned, so that
 * one large point does not hold its memory for the rest of the thread's life.
 */
import { SIMD_BINARY } from './binary.js';

/** What ./assembly/index.ts exports; addresses are in bytes. */
export interface KernelFunctions {
  readonly householderReal: (
    a: number,
    n: number,
    u: number,
    w: number,
    v: number,
    p: number,
    d: number,
    e: number,
    carried: number,
    planes: number,
    breakdown: number,
  ) => number;
  readonly householderComplex: (
    a: number,
    n: number,
    u: number,
    w: number,
    v: number,
    p: number,
    d: number,
    e: number,
    carried: number,
    breakdown: number,
  ) => number;
  readonly tridiagonalQl: (
    n: number,
    d: number,
    e: number,
    rows: number,
    pairs: number,
    rotations: number,
    floor: number,
    most: number,
  ) => number;
  readonly lanczosSteps: (
    n: number,
    rows: number,
    columns: number,
    values: number,
    basis: number,
    w: number,
    alpha: number,
    beta: number,
    even: number,
    odd: number,
    state: number,
    from: number,
    to: number,
    threshold: number,
    breakdown: number,
  ) => number;
  readonly overlaps: (basis: number, count: number, n: number, x: number, out: number) => void;
  readonly cholesky: (a: number, n: number) => void;
  readonly averagedStep: (n: number, x: number, r: number, v: number, c: number, u: number, kappa: number, out: number) => void;
}

export interface Workspace {
  readonly kernels: KernelFunctions;
  /** A view of doubles at an address, until the workspace is returned or grows. */
  view(address: number, length: number): Float64Array;
  integers(address: number, length: number): Int32Array;
  /** Grows to at least that many bytes from `FIRST_ADDRESS` on. */
  reserve(bytes: number): void;
  /** Returns the memory; nothing of this workspace may be used after it. Twice is once. */
  release(): void;
}

interface Memory {
  readonly buffer: ArrayBuffer;
  grow(pages: number): number;
}

/** The part of the standard that is used here; no library of types that this project uses declares it without a browser's. */
declare const WebAssembly: {
  validate(binary: Uint8Array): boolean;
  Module: new (binary: Uint8Array) => object;
  Instance: new (module: object) => { readonly exports: { readonly memory: Memory } & KernelFunctions };
};

const PAGE = 65536;
/** Memory up to here is kept for the next call. */
const KEPT = 256 * 2 ** 20;
/** What 32-bit addresses reach. */
const LARGEST = 2 ** 32 - PAGE;

type Instance = InstanceType<typeof WebAssembly.Instance>;

let compiled: object | null | undefined;
const idle: Instance[] = [];

/** Does this platform run the kernels? They need the 128-bit vectors of WebAssembly. */
export function kernelsRun(): boolean {
  return compile() !== null;
}

/** Are that many bytes within the reach of the kernels' addresses? */
export function fits(bytes: number): boolean {
  return bytes + PAGE <= LARGEST;
}

/**
 * Lends a workspace of at least that many bytes, zero or not, from `FIRST_ADDRESS` on.
 * @throws RangeError where the memory cannot be had
 */
export function takeWorkspace(bytes: number): Workspace {
  const module = compile();
  if (module === null) throw new RangeError('WebAssembly kernels do not run here: allocation of their memory refused');
  const instance = idle.pop() ?? new WebAssembly.Instance(module);
  const { memory } = instance.exports;
  const reserve = (needed: number): void => {
    const missing = Math.ceil((FIRST_ADDRESS + needed - memory.buffer.byteLength) / PAGE);
    if (missing <= 0) return;
    try {
      memory.grow(missing);
    } catch (cause) {
      // Said the way every other allocation that fails is said, so that it counts as a matter of size.
      throw new RangeError(`allocation of ${needed} bytes for the kernels failed`, { cause });
    }
  };
  reserve(bytes);
  let lent = true;
  return {
    kernels: instance.exports,
    view: (address, length) => new Float64Array(memory.buffer, address, length),
    integers: (address, length) => new Int32Array(memory.buffer, address, length),
    reserve,
    release() {
      if (lent && memory.buffer.byteLength <= KEPT) idle.push(instance);
      lent = false;
    },
  };
}

/** Below it the compiler keeps its constants. */
export const FIRST_ADDRESS = 1024;

/** Hands out addresses in turn, each a multiple of 64 bytes, from `FIRST_ADDRESS` on. */
export function addresses(): { readonly take: (doubles: number) => number; readonly bytes: () => number } {
  let next = FIRST_ADDRESS;
  return {
    take(doubles) {
      const address = next;
      next += Math.ceil(doubles / 8) * 64;
      return address;
    },
    bytes: () => next - FIRST_ADDRESS,
  };
}

function compile(): object | null {
  if (compiled === undefined) {
    const text = atob(SIMD_BINARY);
    const binary = Uint8Array.from(text, (letter) => letter.charCodeAt(0));
    const runs = typeof WebAssembly === 'object' && WebAssembly.validate(binary);
    compiled = runs ? new WebAssembly.Module(binary) : null;
  }
  return compiled;
}
