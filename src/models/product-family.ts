/**
 * Families on a product basis. A family gives its configurations (a rule that may conserve numbers), its words and its matrix elements;
 * sector, extent, dimension, random and uniform states and the product space for counting sectors follow.
 */
import { canonicalJson } from '../core/json.js';
import type { Json } from '../core/json.js';
import { chargeKey, chargesOf, configurationSpace } from './configuration-space.js';
import type { ConfigurationRule, NumberedSpace } from './configuration-space.js';
import { defineFamily } from './family.js';
import type { FamilyDefinition, NamedState } from './family-definition.js';
import { exploreSector, measureSector } from './product-basis.js';
import { refusal } from './refusal.js';
import { remember } from './remember.js';
import { MOST_TERMS } from './states.js';
import type { Label, LabelReader } from './states.js';
import type { Extent, ModelFamily, ProductBasis, SystemRequest } from './types.js';

type Made = 'sector' | 'extent' | 'hilbertDimension' | 'space' | 'basis';

export interface ProductDefinition<P> extends Omit<FamilyDefinition<P>, Made> {
  basis(request: SystemRequest<P>): ProductBasis;
  /** The configurations of the family at that size, with the numbers that H conserves at those parameters. */
  rule(request: SystemRequest<P>): ConfigurationRule;
  /** A closed form of the dimension, where there is one; otherwise the rule's configurations are counted. */
  hilbertDimension?(request: SystemRequest<P>): number;
  /** Most elements that `connect` reports from one configuration. */
  moves(request: SystemRequest<P>): number;
  /** Upper bound of the stored matrix elements (diagonal included) of the whole space; default dimension × (1 + moves). */
  nonzeros?(request: SystemRequest<P>): number;
  /** True where the matrix may have imaginary parts; default never. */
  complex?(request: SystemRequest<P>): boolean;
  /**
   * True where sectors are far smaller than the space: the extent then counts the sector of φ by a search (at most 2^20 states)
   * instead of taking the whole space as its bound. 'by coupling' where the value of the coupling, or a realisation of disorder, may
   * take elements away.
   */
  readonly fragmented?: true | 'by coupling';
}

const COUNTED = 2 ** 20;

/** Extents of φ with at most this many basis states are remembered: neighbouring points of a sweep share their graph. */
const FEW = 1000;

/** Numberings and counts that are remembered; the numberings take up to 200 MB each. */
const SPACES = 2;
const DIMENSIONS = 64;

interface Asked<P> {
  readonly request: SystemRequest<P>;
  /** charge keys, sorted; null for all */
  readonly charges: readonly string[] | null;
}

/** The family of a product-basis definition. */
export function defineProductFamily<P>(definition: ProductDefinition<P>): ModelFamily<P> {
  const keyOf = ({ request: { size, parameters }, charges }: Asked<P>): string =>
    canonicalJson({ size, parameters, charges } as unknown as Json);
  const numbered = remember(SPACES, keyOf, ({ request, charges }: Asked<P>) =>
    configurationSpace(definition.rule(request), charges === null ? null : new Set(charges)),
  );
  const dimensionOf = remember(DIMENSIONS, keyOf, (asked: Asked<P>) => numbered(asked).dimension);
  const ask = (request: SystemRequest<P>, like: readonly Label[] | null): Asked<P> => {
    if (like === null) return { request, charges: null };
    const rule = definition.rule(request);
    return { request, charges: [...new Set(like.map((label) => chargeKey(chargesOf(rule, label) ?? [])))].sort() };
  };
  const space = (request: SystemRequest<P>, like: readonly Label[] | null): NumberedSpace => numbered(ask(request, like));
  const hilbertDimension = (request: SystemRequest<P>, support: () => readonly Label[]): number =>
    definition.hilbertDimension?.(request) ?? dimensionOf(ask(request, support()));
  const uniform: NamedState<P> = {
    name: 'uniform',
    meaning: 'the equal superposition of all basis states',
    needs: `at most ${MOST_TERMS} basis states`,
    whole: true,
    terms(request) {
      const all = space(request, null);
      return all.dimension > MOST_TERMS ? null : all.list().map((label) => ({ label, re: 1, im: 0 }));
    },
  };
  const measured = remember(
    DIMENSIONS,
    ({ request, support }: { readonly request: SystemRequest<P>; readonly support: readonly Label[] }) =>
      // The graph changes with an amplitude only where that vanishes; a random one is taken not to.
      canonicalJson([
        request.size,
        ...(definition.fragmented === 'by coupling'
          ? [request.coupling, request.disorder as unknown as Json]
          : [request.coupling === 0, request.disorder !== null]),
        request.parameters as Json,
        support.map((label) => label.join()),
      ]),
    ({ request, support }) => ({ counted: measureSector(definition.basis(request), support, COUNTED) }),
  );
  const count = (request: SystemRequest<P>, support: readonly Label[]): ReturnType<typeof measureSector> =>
    support.length <= FEW ? measured({ request, support }).counted : measureSector(definition.basis(request), support, COUNTED);
  return defineFamily<P>({
    ...definition,
    states: [...definition.states, uniform],
    hilbertDimension,
    space,
    labels: (request) => allowedLabels(definition, request),
    sector: (request, support) => exploreSector(definition.basis(request), support),
    extent(request, support): Extent {
      const whole = hilbertDimension(request, support);
      const complex = definition.complex?.(request) ?? false;
      const bound = { dimension: whole, nonzeros: definition.nonzeros?.(request) ?? whole * (1 + definition.moves(request)) };
      const counted = definition.fragmented !== undefined ? count(request, support()) : null;
      return { hilbertDimension: whole, ...(counted ?? bound), storage: 'sparse', complex };
    },
  });
}

/** The family's labels, those that its rule does not allow refused. */
function allowedLabels<P>(definition: ProductDefinition<P>, request: SystemRequest<P>): LabelReader {
  const labels = definition.labels(request);
  const rule = definition.rule(request);
  return {
    ...labels,
    occupation(values, where) {
      const label = labels.occupation(values, where);
      if (chargesOf(rule, label) === null)
        throw refusal('state.invalid', `${definition.name} does not hold this configuration`, where, values, definition.size.meaning);
      return label;
    },
  };
}
