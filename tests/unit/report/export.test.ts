import { PassThrough } from 'node:stream';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { csvText, writeCsv, writeJsonLines } from '../../../src/report/export.js';
import { type FlatRecord, flatRecord, RECORD_KEYS } from '../../../src/report/flat-record.js';
import { CELL_FIELDS, POINT_FIELDS } from '../../../src/sweep/fields.js';
import { cellRow } from '../../support/two-level-rows.js';

async function written(work: (out: PassThrough) => Promise<void>): Promise<string> {
  const out = new PassThrough();
  const chunks: Buffer[] = [];
  out.on('data', (chunk: Buffer) => chunks.push(chunk));
  await work(out);
  return Buffer.concat(chunks).toString('utf8');
}

/** A reader of RFC 4180 that owes nothing to the writer. */
function readCsv(text: string): string[][] {
  const rows: string[][] = [];
  let row: string[] = [];
  let field = '';
  let quoted = false;
  for (let at = 0; at < text.length; at++) {
    const char = text[at];
    if (quoted) {
      if (char === '"' && text[at + 1] === '"') {
        field += '"';
        at++;
      } else if (char === '"') quoted = false;
      else field += char;
    } else if (char === '"') quoted = true;
    else if (char === ',' || char === '\n') {
      row.push(field);
      field = '';
      if (char === '\n') {
        rows.push(row);
        row = [];
      }
    } else field += char;
  }
  return rows;
}

const rows = [
  cellRow({ coupling: 0.1 + 0.2, flags: ['doubtful', 'resolution-sensitive'], cell: { recurrent_weight: 1e-300, mean_time: 1 / 3 } }),
  cellRow({ coupling: 1, state: 'failed' }),
  cellRow({ coupling: 2, state: 'missing' }),
].map((row) => flatRecord(row, 'a, "quoted" sweep'));

describe('a flat record', () => {
  it('has the same keys in the same order whatever became of the cell, each field by its own name', () => {
    for (const record of rows) expect(Object.keys(record)).toEqual(RECORD_KEYS);
    for (const { name } of [...POINT_FIELDS, ...CELL_FIELDS]) expect(RECORD_KEYS).toContain(name);
    expect(new Set(RECORD_KEYS).size).toBe(RECORD_KEYS.length);
  });

  it('tells computed, failed and missing apart', () => {
    expect(rows.map((record) => record['status'])).toEqual(['computed', 'failed', 'missing']);
    expect(rows[1]).toMatchObject({ failure_code: 'point.too-large', winding_number: null });
    expect(rows[0]).toMatchObject({ flags: ['doubtful', 'resolution-sensitive'], budget: 20, model: 'two-level' });
  });
});

describe('CSV', () => {
  it('reads back to the same doubles, texts and structures', async () => {
    const text = await written((out) => writeCsv(rows, RECORD_KEYS, out));
    const [header, ...lines] = readCsv(text) as [string[], ...string[][]];
    expect(header).toEqual(RECORD_KEYS);
    expect(lines).toHaveLength(3);
    const first = Object.fromEntries(header.map((key, column) => [key, lines[0]?.[column]]));
    expect(Number(first['coupling'])).toBe(0.1 + 0.2);
    expect(Number(first['recurrent_weight'])).toBe(1e-300);
    expect(Number(first['mean_time'])).toBe(1 / 3);
    expect(first['sweep']).toBe('a, "quoted" sweep');
    expect(JSON.parse(first['schedule'])).toEqual({ family: 'fixed', interval: 0.3 });
    expect(lines[2]?.[header.indexOf('winding_number')]).toBe('');
  });

  it('keeps every finite double, the negative zero included', () => {
    fc.assert(fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => Object.is(Number(csvText(value)), value)));
  });

  it('survives any text', async () => {
    const table = fc.array(fc.tuple(fc.string({ unit: 'grapheme' }), fc.string()), { minLength: 1, maxLength: 5 });
    await fc.assert(
      fc.asyncProperty(table, async (list) => {
        const text = await written((out) =>
          writeCsv(
            list.map(([a, b]) => ({ a, b })),
            ['a', 'b'],
            out,
          ),
        );
        // A lone carriage return is quoted by the writer and kept by the reader.
        expect(readCsv(text).slice(1)).toEqual(list);
      }),
    );
  });
});

describe('JSON lines', () => {
  it('are one object a line, equal to the records', async () => {
    const text = await written((out) => writeJsonLines(rows, out));
    const lines = text.trimEnd().split('\n');
    expect(lines.map((line) => JSON.parse(line) as FlatRecord)).toEqual(JSON.parse(JSON.stringify(rows)));
  });

  it('hold back a source whose reader is slow', async () => {
    let made = 0;
    function* endless() {
      for (; made < 100_000; made++) yield { filler: 'x'.repeat(1000) };
    }
    const out = new PassThrough();
    const done = writeJsonLines(endless(), out).catch(() => undefined);
    await new Promise((resolve) => setTimeout(resolve, 50));
    expect(made).toBeLessThan(1000);
    out.destroy();
    await done;
  });
});
