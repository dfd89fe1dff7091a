/** A number of slots shared by all lanes: whoever takes one waits for its turn, first come, first served. */

export interface Slots {
  /** Resolves with the function that gives the slot back; null when the signal ends the waiting. */
  take(): Promise<(() => void) | null>;
}

export function createSlots(count: number, signal: AbortSignal): Slots {
  const waiting: (() => void)[] = [];
  let free = count;
  signal.addEventListener('abort', () => {
    for (const wake of waiting.splice(0)) wake();
  });
  const giveBack = (): void => {
    free++;
    waiting.shift()?.();
  };
  return {
    async take() {
      while (free === 0 && !signal.aborted) await new Promise<void>((resolve) => waiting.push(resolve));
      if (signal.aborted) return null;
      free--;
      return giveBack;
    },
  };
}
