/** A small sweep in an embedded store, computed by the built command line; what the tests of commands work on. */
import { mkdirSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { startCli } from '../../support/cli.js';
import { makeStoreFolder } from '../../support/store-folder.js';

export interface Run {
  readonly status: number | string;
  readonly out: string;
  readonly err: string;
}

export interface Workplace {
  readonly folder: string;
  readonly store: string;
  /** Runs a command to its end; the store of this place is used. */
  run(...args: string[]): Promise<Run>;
  write(name: string, content: string): string;
  remove(): void;
}

/** Quiet logs, so that stderr holds what the command itself says. */
export const ENVIRONMENT = { WINDROW_LOG_LEVEL: 'silent', WINDROW_THREADS: '1', NO_COLOR: '1' };

export async function runCli(args: readonly string[], environment: Readonly<Record<string, string>> = {}): Promise<Run> {
  const child = startCli(args, { ...ENVIRONMENT, ...environment });
  const status = await child.end;
  return { status, out: child.stdout(), err: child.stderr() };
}

export function makeWorkplace(): Workplace {
  const folder = makeStoreFolder();
  const store = join(folder, 'store');
  mkdirSync(join(folder, 'files'));
  return {
    folder,
    store,
    run: (...args) => runCli(args, { WINDROW_STORE: store }),
    write(name, content) {
      const path = join(folder, 'files', name);
      writeFileSync(path, content);
      return path;
    },
    remove: () => rmSync(folder, { recursive: true, force: true }),
  };
}

/** The two-level system has closed forms for everything: see tests/support/two-level-rows.ts. */
export const TWO_LEVEL_SWEEP = `
name: two-level-line
model: two-level
coupling: { from: 0.1, to: 1.5, count: 15 }
parameters: { bias: 1 }
prepare: up
schedules:
  - { family: fixed, interval: 0.3 }
  - { family: exponential, mean: 1 }
budget: 20
`;

export const JUNCTION_SWEEP = `
name: junction
model: bose-hubbard-dimer
size: [2, 4, 6]
coupling: { from: 0.5, to: 4, count: 8, as: interaction-ratio }
prepare: all-left
schedules:
  - { family: exponential, mean: 0.5 }
budget: 50
`;
