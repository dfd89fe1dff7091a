/** Progress of a sweep on stderr: a bar on a terminal, a line now and then elsewhere. */
import { SingleBar } from 'cli-progress';
import type { SweepStatus } from '../coordinator/types.js';
import { formatCount, formatSeconds } from '../report/format.js';
import type { Context } from './context.js';

export interface ProgressView {
  show(status: SweepStatus): void;
  close(): void;
}

const LINE_MS = 5_000;

/** Cells computed a second since this run began. */
function rateOf({ storedCells, reusedCells, seconds }: SweepStatus): number {
  return seconds > 0 ? Math.max(0, storedCells - reusedCells) / seconds : 0;
}

function remaining(status: SweepStatus): string {
  const rate = rateOf(status);
  return rate > 0 ? formatSeconds((status.cells - status.storedCells) / rate) : '?';
}

function notes({ phase, failedPoints }: SweepStatus): string {
  const words = { feeding: '', following: ', another process hands out the work', draining: ', finishing what runs' }[phase];
  return `${failedPoints > 0 ? `, ${formatCount(failedPoints)} failed points` : ''}${words}`;
}

function bar(): ProgressView {
  const view = new SingleBar({
    format: '{bar} {percentage} % | {cells} cells | {rate} cells/s | {left} left{notes}',
    barCompleteChar: '█',
    barIncompleteChar: '░',
    barsize: 28,
    hideCursor: true,
    clearOnComplete: true,
    stopOnComplete: false,
    stream: process.stderr,
    fps: 8,
  });
  let started = false;
  return {
    show(status) {
      const payload = {
        cells: `${formatCount(status.storedCells)}/${formatCount(status.cells)}`,
        rate: formatCount(rateOf(status)),
        left: remaining(status),
        notes: notes(status),
      };
      if (!started) view.start(status.cells, status.storedCells, payload);
      else {
        // A refinement adds to what is to be done.
        view.setTotal(status.cells);
        view.update(status.storedCells, payload);
      }
      started = true;
    },
    close() {
      if (started) view.stop();
      started = false;
    },
  };
}

function lines({ err }: Pick<Context, 'err'>): ProgressView {
  let last = -Infinity;
  return {
    show(status) {
      const now = performance.now();
      if (now - last < LINE_MS) return;
      last = now;
      const { storedCells, cells } = status;
      const share = cells > 0 ? Math.floor((100 * storedCells) / cells) : 100;
      const rate = Math.round(rateOf(status));
      err.write(`windrow: ${storedCells} of ${cells} cells (${share} %), ${rate} cells/s${notes(status)}\n`);
    },
    close: () => undefined,
  };
}

export function progressView(context: Pick<Context, 'err'>): ProgressView {
  return context.err.isTTY === true ? bar() : lines(context);
}
