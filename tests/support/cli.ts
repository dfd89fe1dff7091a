/** The built command line as a child process. */
import { spawn } from 'node:child_process';

const MAIN = new URL('../../dist/src/cli/main.js', import.meta.url).pathname;

export interface CliProcess {
  readonly pid: number;
  /** resolves with the exit status, or with the name of the signal that ended the process */
  readonly end: Promise<number | string>;
  ended(): boolean;
  kill(signal: NodeJS.Signals): void;
  stdout(): string;
  stderr(): string;
}

/** @param through a command that runs it, e.g. in another network */
export function startCli(args: readonly string[], env: Readonly<Record<string, string>> = {}, through: readonly string[] = []): CliProcess {
  const { DATABASE_URL: _database, REDIS_URL: _redis, ...inherited } = process.env;
  const [command, ...rest] = [...through, process.execPath, MAIN, ...args];
  const child = spawn(command, rest, { env: { ...inherited, ...env }, stdio: ['ignore', 'pipe', 'pipe'] });
  let out = '';
  let err = '';
  let over = false;
  child.stdout.setEncoding('utf8').on('data', (text: string) => (out += text));
  child.stderr.setEncoding('utf8').on('data', (text: string) => (err += text));
  const end = new Promise<number | string>((resolve, reject) => {
    child.on('error', reject);
    child.on('close', (status, signal) => {
      over = true;
      resolve(status ?? signal ?? 'unknown');
    });
  });
  return { pid: child.pid!, end, ended: () => over, kill: (signal) => void child.kill(signal), stdout: () => out, stderr: () => err };
}
