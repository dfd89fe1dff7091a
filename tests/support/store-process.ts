/** Other processes that use an embedded store, to be shared with, killed, or run as another user. */
import { fork } from 'node:child_process';
import { chmodSync, copyFileSync, cpSync, mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { canRead, type ServerUser } from '../../src/store/embedded/server-user.js';

export interface StoreProcess {
  readonly pid: number;
  /** @throws what the method throws there, as { code, message, where, found } */
  call(method: 'open' | 'sweeps' | 'register' | 'close', argument?: unknown): Promise<unknown>;
  /** kill -9; resolves when the process is gone */
  kill(): Promise<void>;
}

export interface StoreProcessOptions {
  /** null: the user of this process */
  readonly user?: ServerUser;
  readonly env?: NodeJS.ProcessEnv;
}

export function startStoreProcess({ user = null, env = {} }: StoreProcessOptions = {}): StoreProcess {
  const { program, node } = runnableBy(user);
  const child = fork(join(program, 'tests/support/store-process.mjs'), [join(program, 'dist')], {
    execPath: node,
    execArgv: [],
    cwd: '/',
    env: { PATH: process.env.PATH, ...env },
    ...(user ?? {}),
  });
  const gone = new Promise<void>((resolve) => child.once('exit', () => resolve()));
  return {
    pid: child.pid!,
    call(method, argument) {
      return new Promise((resolve, reject) => {
        const lost = (): void => reject(new Error('the process ended'));
        child.once('exit', lost);
        child.once('message', (answer: { value?: unknown; error?: object }) => {
          child.off('exit', lost);
          if (answer.error === undefined) resolve(answer.value);
          // A plain object, compared by its code.
          else reject(Object.assign(new Error(), answer.error));
        });
        child.send([method, argument]);
      });
    },
    async kill() {
      child.kill('SIGKILL');
      await gone;
    },
  };
}

const ROOT = fileURLToPath(new URL('../..', import.meta.url));
const runnable = new Map<number, { program: string; node: string }>();

/** This project and this Node, copied where the user cannot read them: a clone below a 0700 home, a Node of a version manager. */
function runnableBy(user: ServerUser): { program: string; node: string } {
  const known = runnable.get(user?.uid ?? -1);
  if (known !== undefined) return known;
  let program = ROOT;
  let node = process.execPath;
  if (user !== null && (!canRead(ROOT, user) || !canRead(node, user))) {
    const copy = mkdtempSync(join(tmpdir(), 'windrow-program-'));
    process.once('exit', () => rmSync(copy, { recursive: true, force: true }));
    chmodSync(copy, 0o755);
    if (!canRead(ROOT, user)) {
      for (const part of ['package.json', 'dist', 'migrations', 'node_modules', 'tests/support'])
        cpSync(join(ROOT, part), join(copy, part), { recursive: true, verbatimSymlinks: true });
      program = copy;
    }
    if (!canRead(node, user)) {
      node = join(copy, 'node');
      copyFileSync(process.execPath, node);
    }
  }
  runnable.set(user?.uid ?? -1, { program, node });
  return { program, node };
}
