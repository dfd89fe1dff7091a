import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { doubles, id, ids, integers, parseDoubles, texts, typeParsers } from '../../../src/store/postgres/encoding.js';

/** Reads an array literal by the rules of "Array Input and Output Syntax" in the PostgreSQL documentation (section 8.15.6). */
function readLiteral(literal: string): (string | null)[] {
  const body = literal.slice(1, -1);
  const elements: (string | null)[] = [];
  const token = /(?:"((?:\\[^]|[^"\\])*)"|([^",]+))(,|$)/y;
  while (token.lastIndex < body.length) {
    const [, quoted, bare] = token.exec(body)!;
    elements.push(quoted === undefined ? (bare === 'NULL' ? null : bare) : quoted.replace(/\\([^])/g, '$1'));
  }
  return elements;
}

describe('array literals', () => {
  it('carry any text and null', () => {
    fc.assert(
      fc.property(fc.array(fc.option(fc.string({ unit: 'grapheme' }))), (list) => {
        expect(readLiteral(texts(list))).toEqual(list);
      }),
    );
  });

  it('carry lists inside lists', () => {
    fc.assert(
      fc.property(fc.array(fc.array(fc.string())), (lists) => {
        const inner = readLiteral(texts(lists.map((list) => texts(list))));
        expect(inner.map((literal) => readLiteral(literal!))).toEqual(lists);
      }),
    );
  });

  it('carry any double, the sign of zero too', () => {
    fc.assert(
      fc.property(fc.array(fc.double()), (values) => {
        expect([...parseDoubles(doubles(values))]).toEqual(values);
      }),
    );
    expect(doubles([-0, 0, NaN, -Infinity, 5e-324, null])).toBe('{-0,0,NaN,-Infinity,5e-324,NULL}');
  });

  it('carry ids as bytes', () => {
    const digits = 'ab'.repeat(32);
    expect(readLiteral(ids([digits, digits]))).toEqual([`\\x${digits}`, `\\x${digits}`]);
    expect(id(digits)).toBe(`\\x${digits}`);
    expect(integers([0, 2 ** 40])).toBe('{0,1099511627776}');
  });
});

describe('type parsers', () => {
  it('leave binary values and foreign types to the driver', () => {
    expect(typeParsers.getTypeParser(16, 'text')('t')).toBe(true);
    expect(typeParsers.getTypeParser(17, 'text')('\\xabcd')).toBe('abcd');
    expect(typeParsers.getTypeParser(1184, 'text')('2026-01-02 03:04:05.678+00')).toBe('2026-01-02T03:04:05.678Z');
  });
});
