/** Spins that all interact with each other alike: one large spin S = N/2 in a field. */
import { z } from 'zod';
import { defineFamily } from './family.js';
import type { Sector } from './family-definition.js';
import { occupationLabels } from './labels.js';
import { exploreSector } from './product-basis.js';
import { refusal } from './refusal.js';
import { basisState } from './states.js';
import type { Label, Term } from './states.js';
import { tridiagonalSector } from './tridiagonal-sector.js';
import type { SystemRequest } from './types.js';

const parameters = z.strictObject({
  field: z.number().default(1).describe('transverse field h: − h S_x'),
  bias: z.number().default(0).describe('longitudinal field: − bias S_z'),
  anisotropy: z.number().default(0).describe('γ: the interaction along y over that along z; 0 leaves H tridiagonal'),
});

type Request = SystemRequest<z.infer<typeof parameters>>;

/** Most spins; a configuration entry holds 65535. */
const MOST = 65_535;

/** Elements of H, by the number of spins that are down. */
interface Elements {
  readonly diagonal: (down: number) => number;
  /** One spin turned down. */
  readonly single: (down: number) => number;
  /** Two spins turned down. */
  readonly double: (down: number) => number;
}

function elements({ size, coupling, parameters: { field, bias, anisotropy } }: Request): Elements {
  const spin = size / 2;
  const lower = (down: number): number => Math.sqrt((size - down) * (down + 1));
  const strength = coupling / size;
  return {
    diagonal(down) {
      const m = spin - down;
      // S_y² has the diagonal (S(S + 1) − m²)/2 and the elements −(S₊² + S₋²)/4.
      return -strength * (m * m + (anisotropy * (spin * (spin + 1) - m * m)) / 2) - bias * m;
    },
    single: (down) => (-field * lower(down)) / 2,
    double: (down) => (strength * anisotropy * lower(down) * lower(down + 1)) / 4,
  };
}

const isTridiagonal = ({ coupling, parameters: { anisotropy } }: Request): boolean => anisotropy === 0 || coupling === 0;

function sector(request: Request, support: readonly Label[]): Sector {
  const { size } = request;
  const { diagonal, single, double } = elements(request);
  if (!isTridiagonal(request)) {
    return exploreSector(
      {
        sites: 2,
        levels: size + 1,
        diagonal: ([, down]) => diagonal(down),
        connect(c, emit) {
          const down = c[1];
          for (const [step, amplitude] of [
            [1, down < size ? single(down) : 0],
            [-1, down > 0 ? single(down - 1) : 0],
            [2, down + 1 < size ? double(down) : 0],
            [-2, down > 1 ? double(down - 2) : 0],
          ]) {
            if (amplitude === 0) continue;
            c[0] = size - down - step;
            c[1] = down + step;
            emit(amplitude);
          }
          c[0] = size - down;
          c[1] = down;
        },
      },
      support,
    );
  }
  const found = tridiagonalSector(
    Float64Array.from({ length: size + 1 }, (_, down) => diagonal(down)),
    Float64Array.from({ length: size }, (_, down) => single(down)),
    support.map(([, down]) => down),
  );
  return {
    matrix: found.matrix,
    indexOf: ([, down]) => found.indexOf([down]),
    labelOf: (row) => found.labelOf(row).flatMap((down) => [size - down, down]),
  };
}

/** All spins along x: binomial amplitudes, from their logarithms so that 65535 spins neither overflow nor vanish too early. */
function alongField(size: number): readonly Term[] {
  let log = (-size * Math.LN2) / 2;
  return Array.from({ length: size + 1 }, (_, down) => {
    const term = { label: [size - down, down], re: Math.exp(log), im: 0 };
    log += Math.log((size - down) / (down + 1)) / 2;
    return term;
  });
}

/**
 * H = −(λ/N)(S_z² + γ S_y²) − h S_x − bias S_z with S = N/2, in the basis |up, down>, up + down = N, S_z = (up − down)/2; D = N + 1. The
 * ground state breaks its symmetry for λ > h (bias 0, 0 ≤ γ < 1). At h = bias = 0, γ = 0 the levels are −λ m²/N.
 */
export const collectiveSpin = defineFamily<z.infer<typeof parameters>>({
  name: 'collective-spin',
  summary: 'N spins with all-to-all coupling: H = −(λ/N)(S_z² + γ S_y²) − h S_x − bias S_z, with total spin S = N/2.',
  source:
    'Validity of many-body approximation methods for a solvable model: (I) exact solutions and perturbation theory, Nucl. Phys. 62, 188 (1965), ' +
    'DOI 10.1016/0029-5582(65)90862-X (from memory)',
  energyUnit: 'that of λ and h, usually h = 1',
  size: { symbol: 'N', meaning: 'number of spins', minimum: 1, maximum: MOST },
  coupling: { symbol: 'λ', meaning: 'strength of the all-to-all interaction' },
  scales: [
    { name: 'λ', meaning: 'the interaction strength itself', toCoupling: (value) => value },
    {
      name: 'λ/h',
      meaning: 'interaction in units of the transverse field; the transition of the ground state is at 1',
      toCoupling(value, _size, { field }) {
        if (field === 0 || typeof field !== 'number')
          throw refusal('model.coupling', 'λ/h is not defined without a field', 'parameters.field', field, 'field ≠ 0, or the scale λ');
        return field * value;
      },
    },
  ],
  parameters,
  disordered: false,
  states: [
    { name: 'all-up', meaning: 'all spins up, S_z = N/2', terms: ({ size }) => basisState([size, 0]) },
    { name: 'all-down', meaning: 'all spins down, S_z = −N/2', terms: ({ size }) => basisState([0, size]) },
    {
      name: 'balanced',
      meaning: 'as many spins up as down, S_z = 0',
      needs: 'an even number of spins',
      terms: ({ size }) => (size % 2 === 0 ? basisState([size / 2, size / 2]) : null),
    },
    { name: 'along-field', meaning: 'all spins along the transverse field, S_x = N/2', terms: ({ size }) => alongField(size), whole: true },
  ],
  labels: ({ size }) => occupationLabels({ sites: 2, levels: size + 1, total: size, unit: 'spins' }),
  hilbertDimension: ({ size }) => size + 1,
  extent(request) {
    const { size } = request;
    const tridiagonal = isTridiagonal(request);
    const nonzeros = tridiagonal ? 3 * size + 1 : 5 * (size + 1);
    return { hilbertDimension: size + 1, dimension: size + 1, nonzeros, storage: tridiagonal ? 'tridiagonal' : 'sparse', complex: false };
  },
  sector,
});
