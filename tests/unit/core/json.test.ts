/**
 * Canonical JSON and digests.
 * Sources: JSON Canonicalization Scheme (JCS), RFC 8785, 2020, DOI 10.17487/RFC8785, sections 3.2.2–3.2.4 and appendix B;
 * Secure Hash Standard, FIPS PUB 180-4, 2015, DOI 10.6028/NIST.FIPS.180-4, as node's OpenSSL computes it.
 */
import { createHash } from 'node:crypto';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { WindrowError } from '../../../src/core/errors.js';
import { canonicalJson, digest, type Json } from '../../../src/core/json.js';

describe('canonical JSON', () => {
  it('writes the sample of RFC 8785 section 3.2.2 as section 3.2.3 prints it', () => {
    const sample = JSON.parse(String.raw`{
      "numbers": [333333333.33333329, 1E30, 4.50, 2e-3, 0.000000000000000000000000001],
      "string": "\u20ac$\u000F\u000aA'\u0042\u0022\u005c\\\"\/",
      "literals": [null, true, false]
    }`) as Json;
    expect(canonicalJson(sample)).toBe(
      String.raw`{"literals":[null,true,false],"numbers":[333333333.3333333,1e+30,4.5,0.002,1e-27],"string":"€$\u000f\nA'B\"\\\\\"/"}`,
    );
  });

  it('gives the bytes of RFC 8785 section 3.2.4', () => {
    const sample = {
      numbers: [333333333.3333333, 1e30, 4.5, 2e-3, 0.000000000000000000000000001],
      string: '€$\u000F\nA\'B"\\\\"/',
      literals: [null, true, false],
    };
    const published =
      '7b226c69746572616c73223a5b6e756c6c2c747275652c66616c73655d2c226e756d62657273223a5b3333333333333333332e333333333333332c31652b33302c342e352c302e3030322c31652d32375d2c22737472696e67223a22e282ac245c75303030665c6e4127425c225c5c5c5c5c222f227d';
    expect(Buffer.from(canonicalJson(sample), 'utf8').toString('hex')).toBe(published);
  });

  it('sorts keys by their UTF-16 code units, as the example of RFC 8785 section 3.2.3', () => {
    const sample = {
      '\u20ac': 'Euro Sign',
      '\r': 'Carriage Return',
      '\ufb33': 'Hebrew Letter Dalet With Dagesh',
      '1': 'One',
      '\ud83d\ude00': 'Emoji: Grinning Face',
      '\u0080': 'Control',
      '\u00f6': 'Latin Small Letter O With Diaeresis',
    };
    const order = [
      'Carriage Return',
      'One',
      'Control',
      'Latin Small Letter O With Diaeresis',
      'Euro Sign',
      'Emoji: Grinning Face',
      'Hebrew Letter Dalet With Dagesh',
    ];
    const text = canonicalJson(sample);
    expect(order.map((value) => text.indexOf(value))).toEqual(order.map((value) => text.indexOf(value)).sort((a, b) => a - b));
    expect(JSON.parse(text)).toEqual(sample);
  });

  // Appendix B of RFC 8785: IEEE 754 bits and their serialisation.
  it.each([
    ['0000000000000000', '0'],
    ['8000000000000000', '0'],
    ['0000000000000001', '5e-324'],
    ['8000000000000001', '-5e-324'],
    ['7fefffffffffffff', '1.7976931348623157e+308'],
    ['ffefffffffffffff', '-1.7976931348623157e+308'],
    ['4340000000000000', '9007199254740992'],
    ['c340000000000000', '-9007199254740992'],
    ['4430000000000000', '295147905179352830000'],
    ['44b52d02c7e14af5', '9.999999999999997e+22'],
    ['44b52d02c7e14af6', '1e+23'],
    ['44b52d02c7e14af7', '1.0000000000000001e+23'],
    ['444b1ae4d6e2ef4e', '999999999999999700000'],
    ['444b1ae4d6e2ef4f', '999999999999999900000'],
    ['444b1ae4d6e2ef50', '1e+21'],
    ['3eb0c6f7a0b5ed8c', '9.999999999999997e-7'],
    ['3eb0c6f7a0b5ed8d', '0.000001'],
    ['41b3de4355555553', '333333333.3333332'],
    ['41b3de4355555554', '333333333.33333325'],
    ['41b3de4355555555', '333333333.3333333'],
    ['41b3de4355555556', '333333333.3333334'],
    ['41b3de4355555557', '333333333.33333343'],
    ['becbf647612f3696', '-0.0000033333333333333333'],
    ['43143ff3c1cb0959', '1424953923781206.2'],
  ])('writes the double %s as %s', (bits, text) => {
    expect(canonicalJson(Buffer.from(bits, 'hex').readDoubleBE())).toBe(text);
  });

  it.each([
    ['NaN', Number.NaN],
    ['infinity', Number.POSITIVE_INFINITY],
    ['a function', (): void => undefined],
    ['nothing', undefined],
    ['a NaN within', { a: [1, Number.NaN] }],
  ])('refuses %s', (_name, value) => {
    expect(() => canonicalJson(value as unknown as Json)).toThrow(expect.objectContaining({ code: 'internal.invariant' }) as WindrowError);
  });

  it('keeps every value and is its own canonical form', () => {
    fc.assert(
      fc.property(fc.jsonValue({ stringUnit: 'binary' }), (value) => {
        const text = canonicalJson(value as Json);
        // JSON has no negative zero; canonical JSON writes 0.
        expect(JSON.parse(text)).toEqual(JSON.parse(JSON.stringify(value)));
        expect(canonicalJson(JSON.parse(text) as Json)).toBe(text);
      }),
    );
  });
});

describe('digest', () => {
  it('is SHA-256 over the UTF-8 bytes of the canonical text', () => {
    fc.assert(
      fc.property(fc.jsonValue(), (value) => {
        expect(digest(value as Json)).toBe(
          createHash('sha256')
            .update(canonicalJson(value as Json), 'utf8')
            .digest('hex'),
        );
      }),
    );
  });

  it('does not depend on the order of keys', () => {
    fc.assert(
      fc.property(fc.dictionary(fc.string(), fc.double({ noNaN: true, noDefaultInfinity: true })), (record) => {
        const reversed = Object.fromEntries(Object.entries(record).reverse());
        expect(digest(reversed)).toBe(digest(record));
      }),
    );
  });
});
