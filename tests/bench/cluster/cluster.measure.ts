/**
 * What a cluster costs and what it gains, as ratios of runs on the same machine in the same minutes. The aims are printed beside what was
 * reached and are no assertions: a machine that does something else misses them for no fault of the program.
 */
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { cheapSweep, costlySweep } from './measured-sweeps.js';
import { account, allCpu, median, openMeasure, type Measure, type MeasuredRun } from './measured-run.js';

/** Pairs of runs that a median is taken of. */
const ROUNDS = Number(process.env.ROUNDS ?? 3);
/** The larger of the two grids that are compared in memory. */
const LARGE = Number(process.env.LARGE ?? 1e6);
const SMALL = 1e5;

let measure: Measure;
beforeAll(async () => {
  measure = await openMeasure();
});
afterAll(() => measure.close());

const tell = (text: string): void => console.log(text);

async function told(what: string, running: Promise<MeasuredRun>): Promise<MeasuredRun> {
  const run = await running;
  tell(account(what, run));
  return run;
}

describe('cluster', () => {
  it('two workers against one, compute-bound', async () => {
    const ratios: number[] = [];
    for (let round = 0; round < ROUNDS; round++) {
      const file = costlySweep(`costly-${round}`);
      const one = await told('one worker', measure.cluster(file, 1));
      const two = await told('two workers', measure.cluster(file, 2));
      expect(two.cells).toBe(one.cells);
      ratios.push(one.seconds / two.seconds);
    }
    tell(`SPEED of two workers against one: ${median(ratios).toFixed(2)} (aim 1.9 or more; ${ratios.map((r) => r.toFixed(2)).join(', ')})`);
  });

  it('cluster against one process, cheap cells', async () => {
    const ratios: number[] = [];
    const work: number[] = [];
    for (let round = 0; round < ROUNDS; round++) {
      const alone = await told('one process, one thread', measure.alone(cheapSweep(SMALL), 1));
      const cluster = await told('cluster, one worker', measure.cluster(cheapSweep(SMALL), 1));
      expect(cluster.cells).toBe(alone.cells);
      ratios.push(cluster.seconds / alone.seconds);
      work.push(allCpu(cluster) / allCpu(alone));
    }
    tell(
      `TIME of the cluster against one process: ${median(ratios).toFixed(2)} (aim 1.3 or less; ${ratios.map((r) => r.toFixed(2)).join(', ')})`,
    );
    tell(`CPU seconds of all processes, cluster against one process: ${median(work).toFixed(2)}`);
  });

  it('memory of a small grid and a large one', async () => {
    const small = await told('small grid', measure.cluster(cheapSweep(SMALL), 1));
    const large = await told('large grid', measure.cluster(cheapSweep(LARGE), 1));
    expect(large.cells).toBe(LARGE);
    const ratio = (of: (run: MeasuredRun) => number): string => (of(large) / of(small)).toFixed(2);
    tell(
      `MEMORY of ${LARGE} cells against ${SMALL}: coordinator ${ratio(({ coordinator }) => coordinator.memory)}, Redis ${ratio(({ redis }) => redis!.memory)}, worker ${ratio(({ workers }) => workers[0].memory)} (aim 1.2 or less)`,
    );
  });
});
