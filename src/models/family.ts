/**
 * What all families share: checking a request, resolving its two states, restricting them to the sector of φ, canonical form.
 *
 * A family declares its words, its labels and how the sector of a set of labels is built; `defineFamily` makes the `ModelFamily` of it.
 * Guarantees of a built system: φ has norm 1, ψ is the same object as φ for the return problem, every number is finite.
 */
import { canonicalJson } from '../core/json.js';
import { WindrowError } from '../core/errors.js';
import type { HermitianMatrix, StateVector } from '../linalg/matrix.js';
import type { FamilyDefinition, Sector } from './family-definition.js';
import { quenches } from './quench.js';
import { checkCommon } from './request.js';
import { refusal } from './refusal.js';
import { canonicalState, resolveState } from './states.js';
import type { Label, StateSpace, Term } from './states.js';
import type { ModelFamily, StatedSpace, StateSpec, System, SystemRequest } from './types.js';

type QuenchReader<P> = ReturnType<typeof quenches<P>>;

function stateSpace<P>(definition: FamilyDefinition<P>, request: SystemRequest<P>, quench: QuenchReader<P>): StateSpace {
  const names = definition.states.map((state) => state.name);
  const namedTerms = (name: string): readonly Term[] | null | undefined =>
    definition.states.find((candidate) => candidate.name === name)?.terms(request);
  return {
    ...definition.labels(request),
    ...quench(request),
    basisNames: definition.states.filter((state) => state.whole !== true).map((state) => state.name),
    get fallback() {
      return names.find((name) => namedTerms(name)?.length) ?? names[0];
    },
    named(name, where) {
      const terms = namedTerms(name);
      if (terms === undefined) throw refusal('state.unknown', `${definition.name} has no state "${name}"`, where, name, names.join(', '));
      const needs = definition.states.find((state) => state.name === name)?.needs ?? 'another system';
      if (terms === null) throw refusal('state.invalid', `the state ${name} does not fit this system`, where, name, needs);
      return terms;
    },
    labels(like, where) {
      if (definition.space === undefined)
        throw refusal('state.invalid', `${definition.name} has no random or uniform states`, where, 'random or uniform', 'another state');
      return definition.space(request, like);
    },
  };
}

const labelsOf = (terms: readonly Term[]): readonly Label[] => terms.map((term) => term.label);

function vectorOf(terms: readonly Term[], sector: Sector): StateVector {
  const re = new Float64Array(sector.matrix.dimension);
  const im = terms.some((term) => term.im !== 0) ? new Float64Array(sector.matrix.dimension) : null;
  for (const term of terms) {
    const row = sector.indexOf(term.label);
    if (row < 0) continue;
    re[row] = term.re;
    if (im !== null) im[row] = term.im;
  }
  return { re, im };
}

function checkFinite(family: string, matrix: HermitianMatrix): void {
  const planes = matrix.kind === 'tridiagonal' ? [matrix.diagonal, matrix.offDiagonal] : [matrix.re, matrix.im];
  for (const plane of planes) {
    if (plane !== null && !plane.every(Number.isFinite))
      throw new WindrowError('matrix.not-finite', `a matrix element of ${family} is beyond double precision`, {
        where: 'coupling, parameters',
        allowed: 'energies below 1e308',
      });
  }
}

/** The family of a definition: its `check`, `canonical` and `build`. */
export function defineFamily<P>(definition: FamilyDefinition<P>): ModelFamily<P> {
  const quench = quenches(definition);
  const states = (request: SystemRequest<P>): { prepared: readonly Term[]; detected: readonly Term[] } => {
    checkCommon(definition, request);
    definition.checkParameters?.(request);
    const space = stateSpace(definition, request, quench);
    const prepared = resolveState(space, request.prepared, 'prepare');
    const detected = request.detected === 'same' ? prepared : resolveState(space, request.detected, 'detect');
    return { prepared, detected };
  };
  const productSpace = (request: SystemRequest<P>, scope: 'conserved' | 'whole'): StatedSpace => {
    const support = labelsOf(states(request).detected);
    return { basis: definition.basis!(request), space: definition.space!(request, scope === 'whole' ? null : support), support };
  };
  return {
    ...definition,
    check(request) {
      states(request);
    },
    canonical(request) {
      checkCommon(definition, request);
      definition.checkParameters?.(request);
      const space = stateSpace(definition, request, quench);
      const prepared = canonicalState(space, request.prepared, 'prepare');
      const detected: StateSpec = request.detected === 'same' ? 'same' : canonicalState(space, request.detected, 'detect');
      return {
        ...request,
        parameters: definition.complete?.(request.parameters, request.size) ?? request.parameters,
        disorder: request.disorder?.strength === 0 ? null : request.disorder,
        prepared,
        detected: canonicalJson(detected) === canonicalJson(prepared) ? 'same' : detected,
      };
    },
    extent(request) {
      return definition.extent(request, () => labelsOf(states(request).detected));
    },
    build(request): System {
      const { prepared, detected } = states(request);
      const sector = definition.sector(request, labelsOf(detected));
      checkFinite(definition.name, sector.matrix);
      const phi = vectorOf(detected, sector);
      return {
        hilbertDimension: definition.hilbertDimension(request, () => labelsOf(detected)),
        sectorDimension: sector.matrix.dimension,
        matrix: sector.matrix,
        detected: phi,
        prepared: prepared === detected ? phi : vectorOf(prepared, sector),
      };
    },
    ...(definition.space === undefined || definition.basis === undefined ? {} : { productSpace }),
  };
}
