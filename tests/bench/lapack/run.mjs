/**
 * windrow's kernels against LAPACK and numpy, one thread each, in alternating rounds of one run: ratios of CPU time, medians over the
 * rounds, beside the ratio that is aimed at. On a shared machine only the ratios mean anything.
 *
 * Usage: npm run bench:lapack [-- WORD …]   only the works whose name holds one of the words; needs python3 with scipy
 * Exit status: 0, or 1 where python3 or scipy is missing or the two sides disagree.
 */
import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { fileURLToPath } from 'node:url';
import { works } from './works.mjs';

const folder = mkdtempSync(join(tmpdir(), 'windrow-bench-'));
const env = { ...process.env, OPENBLAS_NUM_THREADS: '1', OMP_NUM_THREADS: '1' };
// Settings that choose a kernel for another processor would slow the other side down.
delete env.OPENBLAS_CORETYPE;
delete env.OPENBLAS_L2_SIZE;
const python = spawn('python3', [fileURLToPath(new URL('reference.py', import.meta.url))], { env, stdio: ['pipe', 'pipe', 'pipe'] });
const missing = () => {
  console.error('windrow: this comparison needs python3 with scipy: apt-get install python3-scipy, or pip install scipy');
  process.exit(1);
};
python.on('error', missing);
let complaint = '';
python.stderr.on('data', (text) => (complaint += text));
python.on('exit', (status) => {
  if (/No module named/.test(complaint)) missing();
  if (status !== 0 && status !== null) {
    console.error(complaint);
    process.exit(1);
  }
});
const lines = createInterface({ input: python.stdout })[Symbol.asyncIterator]();
const answer = async () => JSON.parse((await lines.next()).value);

const median = (values) => [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)];
const close = (a, b) => Math.abs(a - b) <= 1e-6 * Math.max(1, Math.abs(a), Math.abs(b));

try {
  const { numpy, blas } = await answer();
  console.log(`Node ${process.versions.node} against numpy ${numpy}, OpenBLAS ${blas}, one thread; medians of CPU time`);
  const wanted = process.argv.slice(2);
  for (const work of works) {
    if (wanted.length > 0 && !wanted.some((word) => work.name.includes(word))) continue;
    const { request, data, run } = work.prepare();
    const file = join(folder, `${work.name.replace(/\W+/g, '-')}.bin`);
    writeFileSync(file, data);
    const [ours, theirs, ratios] = [[], [], []];
    for (let round = 0; round < work.rounds + 1; round += 1) {
      python.stdin.write(`${JSON.stringify({ ...request, file })}\n`);
      const { seconds, values } = await answer();
      const start = process.cpuUsage();
      const found = run();
      const used = process.cpuUsage(start);
      if (!found.every((value, k) => close(value, values[k]))) throw new Error(`${work.name}: found ${found}, the other side ${values}`);
      // The first round warms both sides.
      if (round === 0 && work.rounds > 1) continue;
      ours.push((used.user + used.system) / 1e6);
      theirs.push(seconds);
      ratios.push(ours.at(-1) / seconds);
    }
    const ms = (values) => (1000 * median(values)).toPrecision(3).padStart(8);
    const best = (Math.min(...ours) / Math.min(...theirs)).toFixed(2);
    console.log(
      `${work.name.padEnd(34)} ${ms(ours)} ms ${ms(theirs)} ms  ratio ${median(ratios).toFixed(2)} (of the best ${best}; aim ${work.aim})`,
    );
  }
} catch (error) {
  console.error(`windrow: ${error.message}`);
  process.exitCode = 1;
} finally {
  python.stdin.end();
  rmSync(folder, { recursive: true, force: true });
}
