/**
 * A set of product-basis configurations, numbered in the order they are added.
 *
 * A configuration (one value < levels a site) is packed into 32-bit words, first site in the highest bits, so that comparing words
 * compares configurations. Lookup is an open-addressed hash table at most half full. A million states of 24 spins take about 16 MB.
 */
import type { Configuration } from './types.js';

export class ConfigurationIndex {
  readonly sites: number;
  /** Number of configurations. */
  count = 0;
  private readonly bits: number;
  private readonly perWord: number;
  private readonly words: number;
  private readonly packed: Uint32Array;
  private pool: Uint32Array;
  /** Number + 1 of the configuration in a slot, 0 for an empty slot. */
  private table: Int32Array;

  /**
   * @param sites length of a configuration
   * @param levels values a site takes, 1 … 65536
   */
  constructor(sites: number, levels: number) {
    this.sites = sites;
    this.bits = Math.max(1, Math.ceil(Math.log2(levels)));
    this.perWord = Math.floor(32 / this.bits);
    this.words = Math.max(1, Math.ceil(sites / this.perWord));
    this.packed = new Uint32Array(this.words);
    this.pool = new Uint32Array(64 * this.words);
    this.table = new Int32Array(256);
  }

  /** The number of a configuration, added if it is new. */
  add(configuration: Configuration): number {
    const slot = this.slotOf(this.pack(configuration));
    const found = this.table[slot];
    if (found !== 0) return found - 1;
    const number = this.count;
    const start = number * this.words;
    if (start + this.words > this.pool.length) this.growPool();
    for (let w = 0; w < this.words; w += 1) this.pool[start + w] = this.packed[w];
    this.table[slot] = number + 1;
    this.count = number + 1;
    if (this.count * 2 > this.table.length) this.growTable();
    return number;
  }

  /** The number of a configuration, −1 if it is not in the set. */
  find(configuration: Configuration): number {
    return this.table[this.slotOf(this.pack(configuration))] - 1;
  }

  /** Writes the configuration of a number into `out` (length sites). */
  read(number: number, out: Configuration): void {
    const { bits, perWord, sites, pool } = this;
    const mask = 2 ** bits - 1;
    let word = number * this.words;
    for (let first = 0; first < sites; first += perWord, word += 1) {
      let value = pool[word];
      for (let x = Math.min(first + perWord, sites) - 1; x >= first; x -= 1) {
        out[x] = value & mask;
        value >>>= bits;
      }
    }
  }

  /** The numbers in ascending lexicographic order of their configurations (radix sort, linear in the count). */
  sorted(): Uint32Array {
    let order = Uint32Array.from({ length: this.count }, (_, i) => i);
    let next = new Uint32Array(this.count);
    const starts = new Uint32Array(257);
    for (let w = this.words - 1; w >= 0; w -= 1) {
      for (let shift = 0; shift < 32; shift += 8) {
        starts.fill(0);
        for (let i = 0; i < this.count; i += 1) starts[((this.pool[i * this.words + w] >>> shift) & 255) + 1] += 1;
        if (starts.includes(this.count)) continue; // all digits are equal
        for (let digit = 0; digit < 256; digit += 1) starts[digit + 1] += starts[digit];
        for (let i = 0; i < this.count; i += 1) {
          const digit = (this.pool[order[i] * this.words + w] >>> shift) & 255;
          next[starts[digit]] = order[i];
          starts[digit] += 1;
        }
        [order, next] = [next, order];
      }
    }
    return order;
  }

  /** Packs into the scratch words and returns the hash. */
  private pack(configuration: Configuration): number {
    const { bits, perWord, sites, packed } = this;
    let hash = 0x9e3779b9;
    let w = 0;
    for (let first = 0; first < sites; first += perWord, w += 1) {
      const end = Math.min(first + perWord, sites);
      let value = 0;
      for (let x = first; x < end; x += 1) value = (value << bits) | configuration[x];
      packed[w] = value;
      hash = mixed(hash, value);
    }
    return hash;
  }

  /** The slot that holds the packed configuration, or the empty slot where it belongs. */
  private slotOf(hash: number): number {
    const { table, pool, packed, words } = this;
    const mask = table.length - 1;
    let slot = hash & mask;
    for (let entry = table[slot]; entry !== 0; entry = table[slot]) {
      const start = (entry - 1) * words;
      let w = 0;
      while (w < words && pool[start + w] === packed[w]) w += 1;
      if (w === words) break;
      slot = (slot + 1) & mask;
    }
    return slot;
  }

  private growPool(): void {
    const larger = new Uint32Array(this.pool.length * 2);
    larger.set(this.pool);
    this.pool = larger;
  }

  private growTable(): void {
    const table = new Int32Array(this.table.length * 2);
    const mask = table.length - 1;
    for (let number = 0; number < this.count; number += 1) {
      let hash = 0x9e3779b9;
      for (let w = 0; w < this.words; w += 1) hash = mixed(hash, this.pool[number * this.words + w]);
      let slot = hash & mask;
      while (table[slot] !== 0) slot = (slot + 1) & mask;
      table[slot] = number + 1;
    }
    this.table = table;
  }
}

/** One step of a 32-bit multiply–xorshift hash. */
function mixed(hash: number, word: number): number {
  let value = Math.imul(hash ^ word, 0x85ebca6b);
  value ^= value >>> 13;
  value = Math.imul(value, 0xc2b2ae35);
  return value ^ (value >>> 16);
}
