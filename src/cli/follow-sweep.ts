/** `windrow status NAME --follow`: the progress of a sweep that other processes run, until it ends. */
import { pause } from '../core/retry.js';
import type { ResultStore } from '../store/types.js';
import type { Context } from './context.js';
import { progressView } from './progress.js';
import { findStoredSweep } from './stored-sweep.js';

const LOOK_MS = 1_000;

/** Resolves when the sweep is done or stopped. */
export async function followSweep(context: Context, store: ResultStore, name: string): Promise<void> {
  const { points, questions } = await findStoredSweep(store, name);
  const cells = points * questions.length;
  const view = progressView(context);
  const begun = performance.now();
  let atFirst: number | null = null;
  try {
    for (;;) {
      const { state } = await findStoredSweep(store, name);
      // Asked after the state, so that the last look shows the end.
      const progress = await store.progress(name);
      atFirst ??= progress.storedCells;
      view.show({ sweep: name, phase: 'feeding', ...progress, cells, reusedCells: atFirst, seconds: (performance.now() - begun) / 1000 });
      if (state !== 'open') return;
      await pause(LOOK_MS, context.signal);
    }
  } finally {
    view.close();
  }
}
