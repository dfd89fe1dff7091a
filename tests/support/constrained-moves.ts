/**
 * Constrained models told by their moves alone, on all levels^sites configurations: written apart from the model families, so that counts
 * of sectors have a second definition to agree with.
 */
import type { Configuration, ProductSpace } from '../../src/models/types.js';

/** A move of neighbouring sites: `from` may become `to`, and back. */
export type Move = readonly [from: readonly number[], to: readonly number[]];

/** All configurations, numbered as digits of a number in base `levels`. */
function radixSpace(sites: number, levels: number): ProductSpace['space'] {
  return {
    sites,
    levels,
    dimension: levels ** sites,
    rank: (configuration) => Array.from(configuration).reduce((rank, value) => rank * levels + value, 0),
    read(rank, out) {
      let rest = rank;
      for (let site = sites - 1; site >= 0; site -= 1) {
        out[site] = rest % levels;
        rest = Math.floor(rest / levels);
      }
    },
  };
}

/** Every move at every place it fits; on a ring also across the end. */
export function movingSpace(sites: number, levels: number, moves: readonly Move[], ring = false): ProductSpace {
  const both = moves.flatMap(([from, to]) => [
    [from, to],
    [to, from],
  ]);
  const fits = (c: Configuration, at: number, pattern: readonly number[]): boolean =>
    pattern.every((value, k) => c[(at + k) % sites] === value);
  const write = (c: Configuration, at: number, pattern: readonly number[]): void =>
    pattern.forEach((value, k) => (c[(at + k) % sites] = value));
  return {
    space: radixSpace(sites, levels),
    basis: {
      sites,
      levels,
      diagonal: () => 0,
      connect(c, emit) {
        for (const [from, to] of both) {
          const places = ring ? sites : sites - from.length + 1;
          for (let at = 0; at < places; at += 1) {
            if (!fits(c, at, from)) continue;
            write(c, at, to);
            emit(1);
            write(c, at, from);
          }
        }
      },
    },
  };
}

/** A hole 0 changes place with a spin 1 or 2. */
export const T_JZ: readonly Move[] = [
  [
    [0, 1],
    [1, 0],
  ],
  [
    [0, 2],
    [2, 0],
  ],
];

/** S+ (S−)² S+ + h.c. on spin one, −, 0, + as 0, 1, 2. */
export const DIPOLE_THREE: readonly Move[] = [0, 1].flatMap((a) =>
  [0, 1].map((b): Move => [
    [a, 2, b],
    [a + 1, 0, b + 1],
  ]),
);

/** S+ S− S− S+ + h.c. on spin one. */
export const DIPOLE_FOUR: readonly Move[] = [0, 1].flatMap((a) =>
  [0, 1].flatMap((d) =>
    [1, 2].flatMap((b) =>
      [1, 2].map((c): Move => [
        [a, b, c, d],
        [a + 1, b - 1, c - 1, d + 1],
      ]),
    ),
  ),
);

/** Two equal neighbours become two equal neighbours of another colour. */
export const pairFlip = (colours: number): readonly Move[] =>
  Array.from({ length: colours }, (_, a) => a).flatMap((a) =>
    Array.from({ length: a }, (_, b): Move => [
      [a, a],
      [b, b],
    ]),
  );

export const PAIR_HOPPING: readonly Move[] = [
  [
    [1, 0, 0, 1],
    [0, 1, 1, 0],
  ],
];

/** A particle hops where the outer neighbours are equal. */
export const FOLDED_XXZ: readonly Move[] = [0, 1].map((outer): Move => [
  [outer, 0, 1, outer],
  [outer, 1, 0, outer],
]);

/** A particle hops to the right of a particle. */
export const EAST_HOPPING: readonly Move[] = [
  [
    [1, 1, 0],
    [1, 0, 1],
  ],
];

/** A spin flips to the right of an up spin. */
export const EAST: readonly Move[] = [
  [
    [1, 0],
    [1, 1],
  ],
];
