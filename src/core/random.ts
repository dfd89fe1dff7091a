/**
 * Random streams: a seed and a path of labels give one stream, independent of every other path. The same arguments give the same
 * numbers on every machine, so a disorder realisation or a drawn schedule can be named by its seed.
 */
import { sha256 } from '@noble/hashes/sha2.js';
import { utf8ToBytes } from '@noble/hashes/utils.js';
import { xoroshiro128plusFromState } from 'pure-rand/generator/xoroshiro128plus';

export interface RandomStream {
  /** Uniform in [0, 1), 53 random bits. */
  uniform(): number;
  /** Standard normal. */
  normal(): number;
}

/** @param path labels that tell this stream from others of the same seed, e.g. ('disorder', 3) */
export function randomStream(seed: number, ...path: readonly (string | number)[]): RandomStream {
  const view = new DataView(sha256(utf8ToBytes(JSON.stringify([seed, ...path]))).buffer);
  // The whole 128-bit state comes from the digest; it is all zero, which the generator cannot leave, with probability 2^-128.
  const generator = xoroshiro128plusFromState([0, 4, 8, 12].map((offset) => view.getInt32(offset)));
  const uniform = (): number => {
    const high = generator.next() >>> 5;
    const low = generator.next() >>> 6;
    return (high * 67108864 + low) / 9007199254740992;
  };
  let spare: number | null = null;
  return {
    uniform,
    normal() {
      if (spare !== null) {
        const value = spare;
        spare = null;
        return value;
      }
      // Box–Muller; 1 − u avoids ln 0.
      const radius = Math.sqrt(-2 * Math.log(1 - uniform()));
      const angle = 2 * Math.PI * uniform();
      spare = radius * Math.sin(angle);
      return radius * Math.cos(angle);
    },
  };
}
