/** Sweep files on disk: what cannot be read, and files of measured intervals beside them. */
import { chmodSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, describe, expect, it } from 'vitest';
import { WindrowError } from '../../../src/core/errors.js';
import { parseIntervals } from '../../../src/sweep/intervals-file.js';
import { readSweepFile } from '../../../src/sweep/read-file.js';
import { smallSweep } from '../../support/small-sweep.js';

const folder = mkdtempSync(join(tmpdir(), 'windrow-sweep-'));
afterAll(() => rmSync(folder, { recursive: true }));

function write(name: string, content: string | Uint8Array): string {
  const path = join(folder, name);
  writeFileSync(path, content);
  return path;
}

function errorOf(work: () => unknown): WindrowError {
  try {
    work();
  } catch (error) {
    if (error instanceof WindrowError) return error;
    throw error;
  }
  throw new Error('nothing was refused');
}

const sweepWith = (schedule: object): string => JSON.stringify(smallSweep({ schedules: [schedule as never] }), null, 1);

describe('files that cannot be read', () => {
  it.each([
    ['a file that is not there', () => join(folder, 'none.yaml'), 'no such file'],
    ['a folder', () => folder, 'a folder'],
    ['a device', () => '/dev/zero', 'something that is not a regular file'],
    ['a path through a file', () => join(write('plain', ''), 'x.yaml'), 'a path through something that is no folder'],
    ['a huge file', () => write('huge.yaml', new Uint8Array(4 * 1024 * 1024 + 1)), '4194305 bytes'],
    ['a binary file', () => write('binary.yaml', Uint8Array.from([0x50, 0x4b, 3, 4, 0, 0])), 'a zero byte at offset 4'],
  ])('%s', (_, path, found) => {
    const file = path();
    const error = errorOf(() => readSweepFile(file));
    expect([error.code, error.exit, error.details.where, error.details.found]).toEqual(['sweep.file', 2, file, found]);
    expect(error.details.allowed).toBeTruthy();
  });

  it('a file without permission', () => {
    const file = write('secret.yaml', 'name: a');
    chmodSync(file, 0);
    const error = errorOf(() => unprivileged(() => readSweepFile(file)));
    expect([error.code, error.details.found]).toEqual(['sweep.file', 'no permission to read it']);
  });
});

/** Permissions do not bind root, so root becomes somebody else for a moment. */
function unprivileged<T>(work: () => T): T {
  if (process.geteuid?.() !== 0) return work();
  process.seteuid?.(65534);
  try {
    return work();
  } finally {
    process.seteuid?.(0);
  }
}

describe('measured intervals', () => {
  it('are looked for beside the sweep file and become part of the document', () => {
    mkdirSync(join(folder, 'data'), { recursive: true });
    write('data/a.txt', '# readings\n0.5 0.25\r\n\n1e-1, 2;3 # end\n');
    const document = readSweepFile(write('a.json', sweepWith({ family: 'empirical', file: 'data/a.txt' })));
    expect(document.schedules[0]).toEqual({
      family: 'empirical',
      intervals: { values: [[0.5, 0.25, 0.1, 2, 3]] },
      'dead-time': { values: [0] },
    });
    // The same numbers written in the sweep file are the same sweep.
    expect(readSweepFile(write('b.json', sweepWith({ family: 'empirical', intervals: [0.5, 0.25, 0.1, 2, 3] })))).toEqual(document);
  });

  it('names the line of the sweep file where the file is missing', () => {
    const path = write('c.json', sweepWith({ family: 'empirical', file: 'missing.txt' }));
    const { code, details } = errorOf(() => readSweepFile(path));
    const line =
      sweepWith({ family: 'empirical', file: 'missing.txt' })
        .split('\n')
        .findIndex((text) => text.includes('missing.txt')) + 1;
    expect([code, details.where, details.line, details.key]).toEqual(['sweep.file', path, line, 'schedules[0].file']);
  });

  it('names the line of the interval file where an entry is wrong', () => {
    const file = write('d.txt', '1\n2\n-3\n');
    const path = write('d.json', sweepWith({ family: 'empirical', file: 'd.txt' }));
    const { code, details } = errorOf(() => readSweepFile(path));
    expect([code, details.where, details.line, details.found]).toEqual(['sweep.value', file, 3, '-3']);
  });

  it.each([
    ['a word', 'two', 'two'],
    ['infinity', 'Infinity', 'Infinity'],
    ['a hexadecimal number', '0x10', '0x10'],
    ['nothing', '# nothing\n', 'no number'],
  ])('refuses %s', (_, text, found) => {
    expect(errorOf(() => parseIntervals(text, 'f')).details.found).toBe(found);
  });

  it('refuses more than a schedule may hold', () => {
    expect(errorOf(() => parseIntervals('1\n'.repeat(100_001), 'f')).details).toMatchObject({ line: 100_001, allowed: 'at most 100000' });
  });
});
