/** JSON values, their canonical form (RFC 8785) and content digests. */
import { sha256 } from '@noble/hashes/sha2.js';
import { bytesToHex, utf8ToBytes } from '@noble/hashes/utils.js';
import canonicalize from 'canonicalize';
import { WindrowError } from './errors.js';

export type Json = null | boolean | number | string | readonly Json[] | { readonly [key: string]: Json };

/**
 * Canonical JSON text of a value (RFC 8785): keys sorted, numbers in shortest round-trip form.
 * @throws WindrowError `internal.invariant` for NaN, infinities and anything that is not JSON.
 */
export function canonicalJson(value: Json): string {
  let text: string | undefined;
  try {
    text = canonicalize(value);
  } catch (cause) {
    throw new WindrowError('internal.invariant', 'a value to be identified is not JSON', { cause });
  }
  if (text === undefined) throw new WindrowError('internal.invariant', 'a value to be identified is not JSON');
  return text;
}

/** SHA-256 of the canonical JSON of a value, 64 lower-case hexadecimal digits. */
export function digest(value: Json): string {
  return bytesToHex(sha256(utf8ToBytes(canonicalJson(value))));
}
