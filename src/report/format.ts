/** Numbers and names as people read them: tables, axis labels, captions. Exports don't use this; they keep full precision. */
import type { QuenchSpec, StateSpec } from '../models/types.js';
import type { ScheduleSpec } from '../schedules/types.js';
import type { Coordinates } from '../analysis/samples.js';

/** Shortest form with at most `digits` significant digits; exponents below 1e-4 and from 1e7 on. '–' for null. */
export function formatNumber(value: number | null | undefined, digits = 4): string {
  if (value === null || value === undefined || Number.isNaN(value)) return '–';
  if (Number.isInteger(value) && Math.abs(value) < 1e7) return String(value);
  const size = Math.abs(value);
  if (size >= 1e7 || size < 1e-4)
    return value
      .toExponential(digits - 1)
      .replace(/\.?0+e/, 'e')
      .replace('e+', 'e');
  return String(Number(value.toPrecision(digits)));
}

/** Whole numbers with thin groups of three: 1 800 000. */
export function formatCount(value: number): string {
  return String(Math.round(value)).replace(/\B(?=(\d{3})+$)/g, '\u202f');
}

const BYTE_UNITS = ['B', 'KiB', 'MiB', 'GiB', 'TiB'] as const;

export function formatBytes(bytes: number): string {
  const power = bytes < 1 ? 0 : Math.min(BYTE_UNITS.length - 1, Math.floor(Math.log2(bytes) / 10));
  return `${formatNumber(bytes / 1024 ** power, 3)} ${BYTE_UNITS[power]}`;
}

export function formatSeconds(seconds: number): string {
  if (seconds < 60) return `${formatNumber(seconds, 3)} s`;
  if (seconds < 3600) return `${Math.floor(seconds / 60)} min ${Math.round(seconds % 60)} s`;
  return `${Math.floor(seconds / 3600)} h ${Math.round((seconds % 3600) / 60)} min`;
}

function parameterText(value: unknown): string {
  if (typeof value === 'number') return formatNumber(value);
  if (Array.isArray(value)) return value.length > 4 ? `${value.length} values` : `[${value.map(parameterText).join(', ')}]`;
  return typeof value === 'string' ? value : JSON.stringify(value);
}

/** For example 'gamma, mean 0.5, shape 2.5, dead-time 0.1'. */
export function scheduleText(spec: ScheduleSpec): string {
  const { family, ...parameters } = spec as { family: string } & Record<string, unknown>;
  const shown = Object.entries(parameters).filter(([name, value]) => !(name === 'dead-time' && value === 0));
  return [family, ...shown.map(([name, value]) => `${name} ${parameterText(value)}`)].join(', ');
}

/** For example 'all-left', 'site 3', 'occupation [4, 0]', 'ground-state (coupling 2, within neel)'. */
export function stateText(state: StateSpec): string {
  if (typeof state === 'string') return state;
  if ('occupation' in state) return `occupation [${state.occupation.join(', ')}]`;
  if ('site' in state) return `site ${state.site}`;
  if ('product' in state) return `product ${state.product}`;
  if ('random' in state)
    return `random (seed ${state.random.seed}${'like' in state.random ? `, like ${stateText(state.random.like)}` : ''})`;
  if ('uniform' in state) return `uniform like ${stateText(state.uniform.like)}`;
  if ('ground-state' in state) return groundStateText(state['ground-state']);
  return state.superposition
    .map(([amplitude, part]) => {
      const factor = typeof amplitude === 'number' ? formatNumber(amplitude) : `(${amplitude.map((x) => formatNumber(x)).join(', ')}i)`;
      return `${factor} ${stateText(part)}`;
    })
    .join(' + ');
}

function groundStateText({ coupling, parameters, within }: QuenchSpec): string {
  const values = Object.entries({ ...(coupling === undefined ? {} : { coupling }), ...(parameters as object | undefined) });
  const parts = values.map(([name, value]) => `${name} ${parameterText(value)}`);
  if (within !== undefined) parts.push(`within ${stateText(within as StateSpec)}`);
  return `ground-state (${parts.join(', ')})`;
}

/** For example 'tilt 0.1, size 12'. */
export function coordinatesText(at: Coordinates): string {
  return Object.entries(at)
    .map(([axis, value]) => `${axis} ${typeof value === 'number' ? formatNumber(value, 6) : value}`)
    .join(', ');
}
