/**
 * Ground states of another coupling: the states of quenches.
 *
 * The ground state is that of the connected component(s) of the other Hamiltonian's graph which hold the basis states of `within`. It is
 * refused where it is not one state to double precision, so that a degenerate level never gives an arbitrary vector.
 */
import { WindrowError } from '../core/errors.js';
import { canonicalJson } from '../core/json.js';
import type { Json } from '../core/json.js';
import { groundState } from '../linalg/ground-state.js';
import type { FamilyDefinition } from './family-definition.js';
import { refusal } from './refusal.js';
import { remember } from './remember.js';
import type { QuenchForm } from './state-shape.js';
import type { Label, Quench, StateSpace, Term } from './states.js';
import type { SystemRequest } from './types.js';

/** States of the sector a ground state is computed in: some seconds and 50 MB. */
const MOST_STATES = 20_000;
/** A gap below this part of the energy scale leaves the ground state undetermined to more than eight digits. */
const LEAST_GAP = 1e-8;
/** Amplitudes below the accuracy of the vector; kept, they would pull in sectors that do not belong to the state. */
const NOISE = 1e-13;

/** The parts of a state space that know about other Hamiltonians. Ground states are remembered: a scan asks for the same one again and again. */
export function quenches<P>(
  definition: FamilyDefinition<P>,
): (request: SystemRequest<P>) => Pick<StateSpace, 'groundState' | 'readQuench'> {
  const solve = remember(
    8,
    ({ request, within }: Asked<P>) => {
      const { size, coupling, parameters, disorder } = request;
      return canonicalJson({ size, coupling, parameters, disorder, within: within.map((label) => label.join()).sort() } as unknown as Json);
    },
    ({ request, within, where }) => compute(definition, request, within, where),
  );
  return (request) => ({
    readQuench: (form, where) => readQuench(definition, request, form, where),
    groundState(quench, within, where) {
      const parameters = { ...request.parameters, ...quench.parameters } as P;
      return solve({ request: { ...request, coupling: quench.coupling, parameters }, within, where });
    },
  });
}

interface Asked<P> {
  readonly request: SystemRequest<P>;
  readonly within: readonly Label[];
  readonly where: string;
}

function readQuench<P>(definition: FamilyDefinition<P>, request: SystemRequest<P>, form: QuenchForm, where: string): Quench {
  const overrides = form.parameters ?? {};
  if (typeof overrides !== 'object' || Array.isArray(overrides))
    throw refusal('model.parameter', 'parameters are not a mapping', `${where}.parameters`, overrides, 'a mapping of names to values');
  const parsed = definition.parameters.safeParse({ ...request.parameters, ...overrides });
  if (!parsed.success) {
    const issue = parsed.error.issues[0];
    const path = [where, 'parameters', ...(issue?.path.map(String) ?? [])].join('.');
    throw refusal('model.parameter', 'a parameter of a ground state is not allowed', path, overrides, issue?.message ?? 'another value');
  }
  const all = parsed.data as Record<string, Json>;
  const parameters = Object.fromEntries(Object.keys(overrides).map((name) => [name, all[name]]));
  checkOverrides(definition, { ...request, parameters: parsed.data }, where);
  return { coupling: readCoupling(definition, request.size, all, form, request.coupling, where), parameters };
}

/** What a list of the wrong length is refused with names the point's own parameters; here it is the ground state's. */
function checkOverrides<P>(definition: FamilyDefinition<P>, request: SystemRequest<P>, where: string): void {
  try {
    definition.checkParameters?.(request);
  } catch (error) {
    if (!(error instanceof WindrowError)) throw error;
    const { details } = error;
    throw new WindrowError(error.code, error.message, { ...details, where: `${where}.${details.where ?? 'parameters'}`, cause: error });
  }
}

function readCoupling<P>(
  definition: FamilyDefinition<P>,
  size: number,
  parameters: Record<string, unknown>,
  form: QuenchForm,
  own: number,
  where: string,
): number {
  const names = definition.scales.map((scale) => scale.name);
  const scale = form.as === undefined ? definition.scales[0] : definition.scales.find(({ name }) => name === form.as);
  if (scale === undefined)
    throw refusal('model.coupling', `${definition.name} has no such scale`, `${where}.as`, form.as, names.join(', '));
  if (form.coupling === undefined) return own;
  if (typeof form.coupling !== 'number' || !Number.isFinite(form.coupling))
    throw refusal(
      'model.coupling',
      'the coupling of a ground state is not a number',
      `${where}.coupling`,
      form.coupling,
      'a finite number',
    );
  return scale.toCoupling(form.coupling, size, parameters);
}

function compute<P>(definition: FamilyDefinition<P>, request: SystemRequest<P>, within: readonly Label[], where: string): readonly Term[] {
  const { dimension } = definition.extent(request, () => within);
  if (dimension > MOST_STATES)
    throw refusal('state.invalid', 'the sector of a ground state is too large', where, dimension, `at most ${MOST_STATES} states`);
  const sector = definition.sector(request, within);
  const { energy, gap, vector } = groundState(sector.matrix);
  if (!(gap > LEAST_GAP * Math.max(Math.abs(energy), Number.MIN_VALUE)))
    throw refusal('state.invalid', 'the ground state is degenerate', where, `a gap of ${gap} at energy ${energy}`, 'one lowest state');
  const kept: Term[] = [];
  let square = 0;
  for (let row = 0; row < vector.re.length; row += 1) {
    const [re, im] = [vector.re[row], vector.im === null ? 0 : vector.im[row]];
    if (Math.hypot(re, im) <= NOISE) continue;
    square += re * re + im * im;
    kept.push({ label: sector.labelOf(row), re, im });
  }
  const norm = Math.sqrt(square);
  return kept.map(({ label, re, im }) => ({ label, re: re / norm, im: im / norm }));
}
