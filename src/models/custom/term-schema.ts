/** How a list of terms is written: the parameters of the family `terms`. */
import { z } from 'zod';
import { geometryParameter } from '../lattice.js';

/** Names that coefficients may use besides `coupling`; each is a parameter, and so may be an axis. */
export const COEFFICIENTS = ['J', 'K', 'U', 'V', 'g', 'h', 't', 'mu'] as const;

/** Sites of one list. */
const WIDEST = 12;
const MOST_TERMS = 64;
const MOST_LISTS = 1000;

const named = z.number().nullable().default(null).describe('value of the coefficient of that name; given exactly where a term uses it');

const part = z.union([z.number(), z.enum(['coupling', ...COEFFICIENTS, 'random', 'i'])], {
  error: `a number, coupling, ${COEFFICIENTS.join(', ')}, random, i`,
});

const FORMS = `a number, a name (coupling, ${COEFFICIENTS.join(', ')}, random, i), or a list of such factors`;

const coefficient = z
  .union([part, z.array(part).min(1).max(8)], { error: FORMS })
  .default(1)
  .describe(
    'factor of the term: a number, a name, or a list whose product it is; random: W(r − 1/2) with the width W of `disorder`, r in [0, 1) ' +
      'drawn for every list of sites; i: the imaginary unit',
  );

const sites = z.array(z.int().min(1)).min(1).max(WIDEST);

const over = z
  .union(
    [
      z.enum(['sites', 'bonds', 'next-bonds']),
      z.strictObject({ stretch: z.int().min(1).max(WIDEST) }),
      z.array(sites).min(1).max(MOST_LISTS),
    ],
    {
      error: 'sites, bonds, next-bonds, { stretch: number of neighbouring sites }, or lists of sites counted from 1: [[1, 3], …]',
    },
  )
  .describe('the lists of sites the term is summed over; stretch: so many neighbouring sites, everywhere on the chain');

const term = z.strictObject({
  coefficient,
  product: z
    .string()
    .min(1)
    .max(200)
    .describe(
      'operators separated by spaces, one for each site of a list in its order, or each with its place: "n@1 S+@2"; the rightmost acts first',
    ),
  over,
  hc: z.boolean().default(false).describe('adds the Hermitian conjugate of the term'),
});

export const parameters = z.strictObject({
  local: z
    .enum(['spin', 'boson', 'fermion'])
    .default('spin')
    .describe('what a site holds; operators Sx, Sy, Sz, S+, S- and for spin 1/2 also X, Y, Z; b, bdag, n; c, cdag, n'),
  spin: z.number().min(0.5).max(15.5).multipleOf(0.5).nullable().default(null).describe('the spin s of a site, default 1/2'),
  most: z.int().min(1).max(31).nullable().default(null).describe('bosons a site holds at most; has to be given for bosons'),
  geometry: geometryParameter,
  terms: z
    .array(term)
    .max(MOST_TERMS)
    .default([])
    .describe('the Hamiltonian, has to be given: a list of terms { coefficient, product, over, hc }'),
  ...(Object.fromEntries(COEFFICIENTS.map((name) => [name, named])) as Record<(typeof COEFFICIENTS)[number], typeof named>),
});

export type TermParameters = z.infer<typeof parameters>;
export type TermForm = TermParameters['terms'][number];
