/** Families on a product basis: the sector and the extent follow from the basis, the family adds its words and its matrix elements. */
import { defineFamily } from './family.js';
import type { FamilyDefinition } from './family.js';
import { exploreSector, measureSector } from './product-basis.js';
import type { ProductBasis } from './product-basis.js';
import type { Extent, ModelFamily, SystemRequest } from './types.js';

export interface ProductDefinition<P> extends Omit<FamilyDefinition<P>, 'sector' | 'extent'> {
  basis(request: SystemRequest<P>): ProductBasis;
  /** Upper bound of the stored matrix elements (diagonal included) of the whole space. */
  nonzeros(request: SystemRequest<P>): number;
  /** True where the matrix may have imaginary parts; default never. */
  complex?(request: SystemRequest<P>): boolean;
  /**
   * True where sectors are far smaller than the space: the extent then counts the sector of φ by a search (at most 2^20 states)
   * instead of taking the whole space as its bound.
   */
  readonly fragmented?: boolean;
}

const COUNTED = 2 ** 20;

/** The family of a product-basis definition. */
export function defineProductFamily<P>(definition: ProductDefinition<P>): ModelFamily<P> {
  return defineFamily({
    ...definition,
    sector: (request, support) => exploreSector(definition.basis(request), support),
    extent(request, support): Extent {
      const hilbertDimension = definition.hilbertDimension(request);
      const complex = definition.complex?.(request) ?? false;
      const whole = { dimension: hilbertDimension, nonzeros: definition.nonzeros(request) };
      const counted = definition.fragmented === true ? measureSector(definition.basis(request), support(), COUNTED) : null;
      return { hilbertDimension, ...(counted ?? whole), storage: 'sparse', complex };
    },
  });
}
