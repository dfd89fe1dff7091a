/** The two ways families label their product basis: occupation lists, and the position of a single particle. */
import { refusal } from './refusal.js';
import type { Label, LabelReader } from './states.js';

const isWhole = (value: unknown): value is number => Number.isSafeInteger(value) && (value as number) >= 0;

function readList(values: readonly unknown[], length: number, what: string, where: string): readonly number[] {
  if (values.length !== length)
    throw refusal('state.invalid', `an occupation has ${values.length} entries, the system ${length}`, where, values, `${length} ${what}`);
  if (!values.every(isWhole)) throw refusal('state.invalid', 'an occupation is not a whole number ≥ 0', where, values, `${length} ${what}`);
  return values;
}

function readSite(site: unknown, sites: number, where: string): number {
  if (!isWhole(site) || site < 1 || site > sites)
    throw refusal('state.invalid', 'there is no such site', where, site, `a whole number from 1 to ${sites}`);
  return site;
}

export interface OccupationOptions {
  readonly sites: number;
  /** Local states a site has: values 0 … levels − 1. */
  readonly levels: number;
  /** The conserved sum of the list, or null where none is fixed. */
  readonly total: number | null;
  /** What a value counts, plural: 'bosons'. */
  readonly unit: string;
}

/** Labels that are occupation (or local quantum number) lists, one value a site. A single site is a state where the total is 1. */
export function occupationLabels({ sites, levels, total, unit }: OccupationOptions): LabelReader {
  const sum = total === null ? '' : ` that sum to ${total}`;
  const allowed = `whole numbers from 0 to ${levels - 1}${sum}`;
  return {
    occupation(values, where) {
      const list = readList(values, sites, allowed, where);
      if (list.some((value) => value >= levels))
        throw refusal('state.invalid', 'an occupation is larger than a site holds', where, values, `${sites} ${allowed}`);
      const held = list.reduce((a, b) => a + b, 0);
      if (total !== null && held !== total)
        throw refusal('state.invalid', `an occupation holds ${held} ${unit}, the system ${total}`, where, values, `${sites} ${allowed}`);
      return list;
    },
    site(site, where) {
      const position = readSite(site, sites, where);
      if (total !== 1)
        throw refusal(
          'state.invalid',
          'a site is a state of one particle only',
          where,
          site,
          total === null ? 'an occupation list' : `an occupation list of ${total} ${unit}`,
        );
      return Array.from({ length: sites }, (_, x) => (x === position - 1 ? 1 : 0));
    },
    write: (label) => ({ occupation: label }),
  };
}

/**
 * Labels of a chain of sites with a few local states each and no fixed total.
 * @param symbols one character a local state, in the order of the values 0, 1, …
 */
export function localLabels(sites: number, symbols: string): LabelReader {
  return { ...occupationLabels({ sites, levels: symbols.length, total: null, unit: 'quanta' }), symbols };
}

/** Labels [x] of one particle on sites x = 0 … sites − 1; an occupation list with a single 1 is read as well. */
export function positionLabels(sites: number): LabelReader {
  return {
    occupation(values, where) {
      const allowed = 'zeros and a single 1';
      const list = readList(values, sites, allowed, where);
      const position = list.indexOf(1);
      if (position < 0 || list.reduce((a, b) => a + b, 0) !== 1)
        throw refusal('state.invalid', 'an occupation does not hold exactly one particle', where, values, `${sites} ${allowed}`);
      return [position];
    },
    site: (site, where): Label => [readSite(site, sites, where) - 1],
    write: ([position = 0]) => ({ site: position + 1 }),
  };
}
