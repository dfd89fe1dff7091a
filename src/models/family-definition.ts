/** What a family declares, beyond what its users see: its words, its labels and how the sector of some labels is built. */
import type { HermitianMatrix } from '../linalg/matrix.js';
import type { NumberedSpace } from './configuration-space.js';
import type { Label, LabelReader, Term } from './states.js';
import type { Extent, ModelFamily, ProductBasis, SystemRequest } from './types.js';

export interface NamedState<P> {
  readonly name: string;
  readonly meaning: string;
  /** What a system must be for the name to have a meaning, e.g. 'an even number of bosons'; required where `terms` may be null. */
  readonly needs?: string;
  terms(request: SystemRequest<P>): readonly Term[] | null;
  /** True for a state that is never a basis state and costs as many terms as the space; it is not tried as a name of basis states. */
  readonly whole?: true;
}

/** H restricted to the connected component(s) of some labels. */
export interface Sector {
  readonly matrix: HermitianMatrix;
  /** Row of a label, or −1 for a label outside the sector. */
  indexOf(label: Label): number;
  /** Label of a row; the inverse of indexOf. */
  labelOf(row: number): Label;
}

type Made = 'states' | 'check' | 'canonical' | 'extent' | 'build' | 'productSpace';

export interface FamilyDefinition<P> extends Omit<ModelFamily<P>, Made> {
  readonly states: readonly NamedState<P>[];
  /** Checks that need more than one value, such as the length of a list. @throws WindrowError */
  checkParameters?(request: SystemRequest<P>): void;
  labels(request: SystemRequest<P>): LabelReader;
  /** @param support gives the labels of φ, for families whose conserved numbers are those of φ */
  hilbertDimension(request: SystemRequest<P>, support: () => readonly Label[]): number;
  /** The labels that share the conserved numbers of those given; all for null. Families without it have no random or uniform states. */
  space?(request: SystemRequest<P>, like: readonly Label[] | null): NumberedSpace;
  /** H on those labels, for families on a product basis. */
  basis?(request: SystemRequest<P>): ProductBasis;
  /** @param support gives the labels of φ, for families that count its sector */
  extent(request: SystemRequest<P>, support: () => readonly Label[]): Extent;
  /** @param support labels of φ, distinct */
  sector(request: SystemRequest<P>, support: readonly Label[]): Sector;
}
