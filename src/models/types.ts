/**
 * The contract of a model family: what a Hamiltonian family declares about itself, and the system it builds.
 *
 * A family is one file (name, parameter schema, units, conventions, builder) and one line in the registry. Families are pure: no I/O,
 * no clock, randomness only from the seed in the request. Energies are in the family's unit, ħ = 1.
 */
import type { z } from 'zod';
import type { HermitianMatrix, StateVector } from '../linalg/matrix.js';

/** An amplitude of a superposition: a real number or [real, imaginary]. */
export type Amplitude = number | readonly [number, number];

/**
 * A state as a user writes it and as it is identified: a name of the family, an occupation (or local quantum number) list, a site
 * (counted from 1), or a superposition. Superpositions are normalised when built.
 */
export type StateSpec =
  | string
  | { readonly occupation: readonly number[] }
  | { readonly site: number }
  | { readonly superposition: readonly (readonly [Amplitude, StateSpec])[] };

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
}

export interface Extent {
  readonly hilbertDimension: number;
  /** Upper bound of the matrix dimension that will be worked on. */
  readonly dimension: number;
  readonly nonzeros: number;
  readonly storage: HermitianMatrix['kind'];
  readonly complex: boolean;
}
