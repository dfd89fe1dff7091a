/** Reads what deploy/ holds, and engines' programs where they are at hand. */
import { spawnSync } from 'node:child_process';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseAllDocuments } from 'yaml';

/** A parsed document, whose form is what the tests find out. */
// eslint-disable-next-line @typescript-eslint/no-explicit-any
export type Tree = Record<string, any>;

export const REPOSITORY = fileURLToPath(new URL('../../..', import.meta.url));
export const at = (...path: string[]): string => join(REPOSITORY, ...path);
export const read = (...path: string[]): string => readFileSync(at(...path), 'utf8');

/** The documents of a YAML file; merge keys are resolved, as compose does. */
export function readYaml(...path: string[]): unknown[] {
  return parseAllDocuments(read(...path), { merge: true }).map((document) => {
    if ('errors' in document && document.errors.length > 0) throw document.errors[0];
    return document.toJS() as unknown;
  });
}

export interface Instruction {
  readonly name: string;
  readonly value: string;
}

/** Instructions of a Dockerfile by stage, the last stage last; a continued line is one instruction. */
export function readDockerfile(...path: string[]): Instruction[][] {
  const stages: Instruction[][] = [];
  const lines = read(...path)
    .replace(/\\\n/g, ' ')
    .split('\n')
    .filter((line) => !/^\s*(#|$)/.test(line));
  for (const line of lines) {
    const [, name, value] = /^(\S+)\s+(.*)$/.exec(line) ?? [];
    if (name === undefined || value === undefined) throw new Error(`not an instruction: ${line}`);
    if (name === 'FROM') stages.push([]);
    stages.at(-1)?.push({ name, value });
  }
  return stages;
}

/** Whether a program can be started at all. What it would check is said to be unchecked where it can not. */
export function available(check: string, command: string, ...args: string[]): boolean {
  const found = spawnSync(command, args, { stdio: 'ignore', timeout: 20_000 }).status === 0;
  if (!found) process.stderr.write(`tests: ${check}: not checked with \`${command}\`, which is not here\n`);
  return found;
}
