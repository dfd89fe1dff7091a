/**
 * The preparation of a clone, run as a child on a project of its own: the script itself, packages linked from here, two sources of a
 * line each, so that a compilation takes no time. A real installation from nothing is what a fresh clone's `npm test` begins with.
 */
import { spawn } from 'node:child_process';
import { cpSync, existsSync, mkdirSync, mkdtempSync, readFileSync, rmSync, symlinkSync, utimesSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';

const repository = fileURLToPath(new URL('../../..', import.meta.url));
let folder: string;
const at = (...path: string[]): string => join(folder, ...path);

interface Ended {
  readonly status: number | null;
  readonly stdout: string;
  readonly stderr: string;
}

function prepare(args: readonly string[] = ['start'], env: NodeJS.ProcessEnv = process.env): Promise<Ended> {
  const child = spawn(process.execPath, [at('deploy', 'prepare.mjs'), ...args], { env, stdio: ['ignore', 'pipe', 'pipe'] });
  let stdout = '';
  let stderr = '';
  child.stdout.on('data', (data: Buffer) => (stdout += data.toString()));
  child.stderr.on('data', (data: Buffer) => (stderr += data.toString()));
  return new Promise((resolve) => child.once('close', (status) => resolve({ status, stdout, stderr })));
}

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'windrow-prepare-'));
  for (const name of ['package.json', 'package-lock.json', 'deploy/prepare.mjs']) cpSync(join(repository, name), at(name));
  const { compilerOptions } = JSON.parse(readFileSync(join(repository, 'tsconfig.json'), 'utf8'));
  writeFileSync(
    at('tsconfig.json'),
    JSON.stringify({ compilerOptions: { ...compilerOptions, lib: ['ES5'], types: [] }, include: ['src'] }),
  );
  symlinkSync(join(repository, 'node_modules'), at('node_modules'));
  mkdirSync(at('src'));
  writeFileSync(at('src', 'a.ts'), 'export const a = 1;\n');
  writeFileSync(at('src', 'b.ts'), 'export const b = 2;\n');
});

afterEach(() => {
  rmSync(folder, { recursive: true, force: true });
});

describe('preparation', () => {
  it('compiles, and the second time does and says nothing', async () => {
    expect(await prepare()).toMatchObject({ status: 0, stdout: '', stderr: 'windrow: compiling\n' });
    expect(readFileSync(at('dist', 'src', 'a.js'), 'utf8')).toContain('a = 1');
    expect(await prepare(['test'])).toEqual({ status: 0, stdout: '', stderr: '' });
  });

  it('goes by content, not by the times of files', async () => {
    await prepare();
    utimesSync(at('src', 'a.ts'), new Date(), new Date());
    expect((await prepare()).stderr).toBe('');
    const old = new Date('2001-01-01');
    writeFileSync(at('src', 'a.ts'), 'export const a = 3;\n');
    utimesSync(at('src', 'a.ts'), old, old);
    expect((await prepare()).stderr).toBe('windrow: compiling\n');
    expect(readFileSync(at('dist', 'src', 'a.js'), 'utf8')).toContain('a = 3');
  });

  it('takes away what a removed source had been compiled to', async () => {
    await prepare();
    rmSync(at('src', 'b.ts'));
    expect(await prepare()).toMatchObject({ status: 0 });
    expect(existsSync(at('dist', 'src', 'b.js'))).toBe(false);
    expect(existsSync(at('dist', 'src', 'b.js.map'))).toBe(false);
    expect(existsSync(at('dist', 'src', 'a.js'))).toBe(true);
  });

  it('compiles again where dist was deleted', async () => {
    await prepare();
    rmSync(at('dist'), { recursive: true });
    expect(await prepare()).toMatchObject({ status: 0 });
    expect(existsSync(at('dist', 'src', 'a.js'))).toBe(true);
  });

  it('fails on a wrong source, and again the next time', async () => {
    writeFileSync(at('src', 'a.ts'), 'export const a: string = 1;\n');
    for (let time = 0; time < 2; time += 1) {
      const ended = await prepare();
      expect(ended.status).toBe(1);
      expect(ended.stderr).toMatch(/a\.ts.*TS2322/);
      expect(ended.stderr).toContain('windrow: the compilation failed');
    }
  });

  it('waits for another preparation, and breaks the lock of a dead one', async () => {
    const both = await Promise.all([prepare(), prepare()]);
    expect(both.map(({ status }) => status)).toEqual([0, 0]);
    // Only one of them found something to do.
    expect(both.filter(({ stderr }) => stderr.includes('compiling'))).toHaveLength(1);
    writeFileSync(at('.cache', 'prepare.lock'), '999999999');
    expect(await prepare()).toEqual({ status: 0, stdout: '', stderr: '' });
    expect(existsSync(at('.cache', 'prepare.lock'))).toBe(false);
  });

  it('installs with npm ci where a locked version is not the installed one', async () => {
    // A stand-in for npm on the PATH tells what it was asked; the real npm would fetch five hundred packages.
    const lock = JSON.parse(readFileSync(at('package-lock.json'), 'utf8'));
    lock.packages['node_modules/zod'].version = '0.0.1';
    writeFileSync(at('package-lock.json'), JSON.stringify(lock));
    mkdirSync(at('bin'));
    writeFileSync(at('bin', 'npm'), '#!/bin/sh\necho "npm $*"\nexit ${NPM_STATUS:-0}\n', { mode: 0o755 });
    const env: NodeJS.ProcessEnv = { ...process.env, PATH: `${at('bin')}:${process.env.PATH ?? ''}` };
    delete env.npm_execpath;
    const ended = await prepare(['start'], env);
    expect(ended.stdout).toMatch(/^npm ci --include=dev --ignore-scripts/);
    expect(ended.stderr).toContain('node_modules/zod is missing or differs');
    expect(await prepare(['start'], { ...env, NPM_STATUS: '7' })).toMatchObject({ status: 1 });
  });

  it.each([[[]], [['stop']], [['start', 'test']]])('refuses %j', async (args) => {
    expect(await prepare(args)).toMatchObject({ status: 2, stdout: '', stderr: 'windrow: usage: node deploy/prepare.mjs start|test\n' });
  });
});
