/**
 * The contract of a model family: what a Hamiltonian family declares about itself, and the system it builds.
 *
 * A family is one file (name, parameter schema, units, conventions, builder) and one line in the registry. Families are pure: no I/O,
 * no clock, randomness only from the seed in the request. Energies are in the family's unit, ħ = 1.
 */
import type { z } from 'zod';
import type { Json } from '../core/json.js';
import type { HermitianMatrix, StateVector } from '../linalg/matrix.js';

/** An amplitude of a superposition: a real number or [real, imaginary]. */
export type Amplitude = number | readonly [number, number];

/**
 * A state as a user writes it and as it is identified. Superpositions are normalised when built.
 *
 * - a name of the family
 * - occupation: one occupation (or local quantum number) a site; product: the same as a text, one character a site
 * - site: one particle on that site, counted from 1
 * - random: a basis state drawn evenly, from those with the conserved numbers of `like` where it is given
 * - uniform: the equal superposition of all basis states with the conserved numbers of `like`
 * - ground-state: that of the same system at another coupling (in the family's scale `as`, its own by default) or with other parameters,
 *   in the connected component(s) of H's graph that hold `within`, by default the first named state
 * - superposition: amplitudes and states
 */
export type StateSpec =
  | string
  | { readonly occupation: readonly number[] }
  | { readonly product: string }
  | { readonly site: number }
  | { readonly random: { readonly seed: number } | { readonly seed: number; readonly like: StateSpec } }
  | { readonly uniform: { readonly like: StateSpec } }
  | { readonly 'ground-state': QuenchSpec }
  | { readonly superposition: readonly (readonly [Amplitude, StateSpec])[] };

/** coupling, as, parameters (a mapping of names to values), within (a state): all optional. */
export interface QuenchSpec {
  readonly [key: string]: Json;
}

export interface Disorder {
  /** Full width W of the uniform distribution [−W/2, W/2], in the family's energy unit. */
  readonly strength: number;
  readonly seed: number;
  /** Number of this realisation, from 0. */
  readonly realisation: number;
}

/** Everything that fixes one Hamiltonian. `parameters` have passed the family's schema (defaults filled in). */
export interface SystemRequest<P = unknown> {
  readonly size: number;
  /** The family's own coupling, not a scaled one. */
  readonly coupling: number;
  readonly parameters: P;
  readonly disorder: Disorder | null;
  readonly prepared: StateSpec;
  /** A state, or 'same' for the return problem. */
  readonly detected: StateSpec;
}

/** A built system, restricted to the sector that holds the detected state. */
export interface System {
  /** D: dimension of the full space at that size with its conserved numbers fixed; exact up to 2^53. */
  readonly hilbertDimension: number;
  /** Size of the connected component(s) of H's graph in the product basis that hold the detected state; = matrix.dimension. */
  readonly sectorDimension: number;
  readonly matrix: HermitianMatrix;
  /** Unit vector φ in the sector. */
  readonly detected: StateVector;
  /** The part of ψ inside the sector (norm ≤ 1); the same object as `detected` for the return problem. */
  readonly prepared: StateVector;
  /** <φ|ψ> is computed from these; no other state is needed. */
}

/** A coupling that may be given in another scale, for example an interaction ratio. */
export interface CouplingScale {
  readonly name: string;
  readonly meaning: string;
  /** To the family's own coupling. */
  readonly toCoupling: (value: number, size: number, parameters: Record<string, unknown>) => number;
}

export interface ModelFamily<P = unknown> {
  readonly name: string;
  /** One sentence, with the Hamiltonian in plain text. */
  readonly summary: string;
  /** Where the model is defined: title, journal, volume, article, year, DOI; or 'common practice'. */
  readonly source: string;
  readonly energyUnit: string;
  readonly size: { readonly symbol: string; readonly meaning: string; readonly minimum: number; readonly maximum: number };
  readonly coupling: { readonly symbol: string; readonly meaning: string };
  /** The first is the family's own coupling, the default of `as:`. */
  readonly scales: readonly [CouplingScale, ...CouplingScale[]];
  /** A strict zod object; every parameter has a description and a default. */
  readonly parameters: z.ZodType<P>;
  /** True where `disorder` adds random on-site energies. */
  readonly disordered: boolean;
  /** State names this family resolves. */
  readonly states: readonly { readonly name: string; readonly meaning: string }[];
  /** Replaces parameters that are given in terms of the size (particles: 'size') by their values. */
  complete?(parameters: P, size: number): P;
  /** Checks a request without building anything. @throws WindrowError model.size, model.parameter, state.unknown, state.invalid */
  check(request: SystemRequest<P>): void;
  /**
   * The same request in the one form that identifies it: parameters complete, no disorder of zero strength, states by the first name
   * they have, 'same' where ψ and φ are written alike. Throws what `check` throws for states.
   */
  canonical(request: SystemRequest<P>): SystemRequest<P>;
  /** Upper estimates before anything is built: sector dimension ≤ dimension, stored nonzeros, and the kernel's storage. */
  extent(request: SystemRequest<P>): Extent;
  build(request: SystemRequest<P>): System;
  /**
   * The product basis and H on it; absent where the family has none.
   * @param scope 'conserved': configurations that have the conserved numbers of φ (what hilbertDimension counts); 'whole': all that the family
   * allows at that size
   * @throws WindrowError point.too-large where the numbering itself does not fit into memory, and what `check` throws
   */
  productSpace?(request: SystemRequest<P>, scope: 'conserved' | 'whole'): StatedSpace;
}

/** One small integer a site: an occupation, a local level. */
export type Configuration = Uint16Array;

/** Reports <c'|H|c> of the configuration as it now stands (c') from the one that was handed in (c). */
export type Emit = (re: number, im?: number) => void;

/** H on a basis of configurations, element by element. */
export interface ProductBasis {
  /** Length of a configuration. */
  readonly sites: number;
  /** Values a site takes: 0 … levels − 1, levels ≤ 65536. */
  readonly levels: number;
  /** <c|H|c> */
  diagonal(configuration: Configuration): number;
  /**
   * Reports every c' ≠ c with <c'|H|c> ≠ 0: change the configuration in place, call `emit`, change it back. Both directions of a term
   * (hop and its conjugate) are reported, each from the configuration it applies to; several reports of the same c' are summed.
   */
  connect(configuration: Configuration, emit: Emit): void;
}

/** A set of configurations in ascending lexicographic order, each found from its number and back without storing any of them. */
export interface ConfigurationSpace {
  readonly sites: number;
  readonly levels: number;
  /** Number of configurations; exact up to 2^53. */
  readonly dimension: number;
  /** Number of a configuration, from 0; −1 for one outside the space. */
  rank(configuration: ArrayLike<number>): number;
  /** Writes the configuration of a number (0 ≤ rank < dimension ≤ 2^53) into `out`, length `sites`. */
  read(rank: number, out: Configuration): void;
}

/** The product basis of a system, for counting sectors without a matrix. H leads from any configuration only to others of the space. */
export interface ProductSpace {
  readonly basis: ProductBasis;
  readonly space: ConfigurationSpace;
}

/** The same with the state that is detected. */
export interface StatedSpace extends ProductSpace {
  /** configurations of φ */
  readonly support: readonly (readonly number[])[];
}

export interface Extent {
  readonly hilbertDimension: number;
  /** Upper bound of the matrix dimension that will be worked on. */
  readonly dimension: number;
  readonly nonzeros: number;
  readonly storage: HermitianMatrix['kind'];
  readonly complex: boolean;
}
