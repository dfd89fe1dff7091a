/** Which buffers of an outcome may change threads without a copy. */
import type { PointOutcome } from '../sweep/types.js';

/**
 * The buffers of the measures in `outcomes`, each once. A view that does not span its buffer is left out (and so copied): moving it
 * would take along what else lives in the buffer, such as the memory of a WebAssembly instance, which cannot move at all.
 */
export function transferables(outcomes: readonly PointOutcome[]): ArrayBuffer[] {
  const buffers = new Set<ArrayBuffer>();
  for (const { point } of outcomes) {
    if (point === null) continue;
    const { energies, weights, overlapRe, overlapIm } = point.measured.measure;
    for (const view of [energies, weights, overlapRe, overlapIm]) {
      if (view === null || view.byteLength === 0 || view.byteLength !== view.buffer.byteLength) continue;
      if (view.buffer instanceof ArrayBuffer) buffers.add(view.buffer);
    }
  }
  return [...buffers];
}
