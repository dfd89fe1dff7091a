/** The two axes a sweep is looked at along when nobody says which. */
import type { GridAxis } from '../sweep/types.js';
import { AVERAGED_AXES } from './curves.js';

const varies = ({ values }: GridAxis): boolean => values.length > 1;
const numeric = ({ values }: GridAxis): boolean => values.every((value) => typeof value === 'number');

/**
 * To the right the coupling and upwards the size; where one of them has a single value, the first other axis that varies takes its place,
 * numbers before words. An axis that is averaged over is neither.
 * @param fixed axes that are held at one value
 */
export function mapAxes(axes: readonly GridAxis[], fixed: readonly string[] = []): { readonly x: string; readonly y: string } {
  const open = axes.filter((axis) => varies(axis) && !AVERAGED_AXES.includes(axis.name) && !fixed.includes(axis.name));
  const others = open.filter(({ name }) => name !== 'coupling' && name !== 'size');
  const order = [...others.filter(numeric), ...others.filter((axis) => !numeric(axis))].map(({ name }) => name);
  const has = (name: string): boolean => open.some((axis) => axis.name === name);
  const x = has('coupling') ? 'coupling' : (order.shift() ?? (has('size') ? 'size' : 'coupling'));
  if (x === 'size') return { x, y: 'coupling' };
  return { x, y: has('size') ? 'size' : (order.shift() ?? 'size') };
}
