/**
 * The sectors of the systems a sweep file names, by size: what `windrow sectors` prints.
 *
 * Sectors depend on which elements of H are zero, hardly ever on their values. So of the couplings one that is zero and one that is not
 * stand for all, disorder and its realisations are left out where they only move energies, and every other axis is gone along.
 */
import { type FragmentationVerdict, fragmentationOf } from '../analysis/fragmentation.js';
import type { Coordinates } from '../analysis/samples.js';
import { WindrowError } from '../core/errors.js';
import type { Json } from '../core/json.js';
import { modelFamilies } from '../models/registry.js';
import type { SystemRequest } from '../models/types.js';
import { partitionSectors, type SectorCensus } from '../spectral/sectors.js';
import type { SweepDocument } from '../sweep/document.js';
import { type SpaceAxis, sweepSpace } from '../sweep/space.js';

export type Scope = 'conserved' | 'whole';

export interface SizedCensus {
  readonly size: number;
  readonly census: SectorCensus;
  /** configurations in the sectors of the detected state */
  readonly sector_dimension: number;
}

/** Sizes at one place on all other axes. */
export interface SectorSeries {
  /** axis → value, the axes that vary */
  readonly at: Coordinates;
  readonly rows: readonly SizedCensus[];
  readonly verdict: FragmentationVerdict;
}

/** Places on one axis that may differ in their sectors. */
function telling({ name, values }: SpaceAxis): number[] {
  const all = values.map((_, index) => index);
  if (name === 'realisation') return [0];
  if (name !== 'coupling' && name !== 'disorder') return all;
  const zero = all.find((index) => values[index] === 0);
  const other = all.find((index) => values[index] !== 0);
  return [zero, other].filter((index) => index !== undefined);
}

function product(choices: readonly (readonly number[])[]): number[][] {
  return choices.reduce<number[][]>((places, choice) => places.flatMap((place) => choice.map((index) => [...place, index])), [[]]);
}

const coordinate = (value: Json): number | string =>
  typeof value === 'number' || typeof value === 'string' ? value : JSON.stringify(value);

function countAt(document: SweepDocument, request: SystemRequest, scope: Scope, memory: number): SizedCensus {
  const family = modelFamilies.get(document.model)!;
  const product = family.productSpace!(request, scope);
  const partition = partitionSectors(product, memory);
  return { size: request.size, census: partition.census, sector_dimension: partition.unionSize(product.support) };
}

/**
 * @param memory bytes the numbering of one space may use
 * @throws WindrowError cli.usage for a model without a product basis; point.too-large
 */
export function sectorSeries(document: SweepDocument, scope: Scope, memory: number): SectorSeries[] {
  const space = sweepSpace(document);
  if (space.family.productSpace === undefined) {
    const able = [...modelFamilies.values()].filter((family) => family.productSpace !== undefined);
    throw new WindrowError('cli.usage', `${space.family.name} has no product basis whose sectors could be counted`, {
      where: 'model',
      found: space.family.name,
      allowed: able.map(({ name }) => name).join(', '),
    });
  }
  const choices = space.axes.map(telling);
  const sizes = choices[0];
  return product(choices.slice(1)).map((place) => {
    const rows = sizes.map((size) => countAt(document, space.requestAt([size, ...place]), scope, memory)).sort((a, b) => a.size - b.size);
    const varying = space.axes
      .slice(1)
      .flatMap((axis, k) => (choices[k + 1].length > 1 ? [[axis.name, coordinate(axis.values[place[k]])] as const] : []));
    return {
      at: Object.fromEntries(varying),
      rows,
      verdict: fragmentationOf(rows.map(({ size, census }) => ({ size, share: census.largest_sector_fraction }))),
    };
  });
}
