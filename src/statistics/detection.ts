/** One monitored run, or the average over many, followed step by step; see monitored.ts for the model. */
export interface Detection {
  /** F_n for n = 1, 2, … */
  step(): number;
  /** Weight of the bright part that is still undetected, Σ_{m>n} F_m: all of it will be detected some time. */
  remaining(): number;
  /** Gives back what it holds; nothing may be called after it. Leaving it out costs time, not memory. */
  close(): void;
}

export interface DetectionOptions {
  /** efficiency η of the detector, 0 < η ≤ 1 */
  readonly efficiency: number;
  /** number of steps that will be taken; levels too weak to matter within them may be left out */
  readonly budget: number;
}
