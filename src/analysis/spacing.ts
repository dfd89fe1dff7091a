/** How the values of an axis are spaced, so that slopes are taken and figures drawn on the scale the grid was made for. */

/** Relative spread of steps below which a grid counts as regular; file values are often rounded to a few digits. */
const REGULAR = 0.05;

function regular(steps: readonly number[]): boolean {
  const low = Math.min(...steps);
  const high = Math.max(...steps);
  return low > 0 && high - low <= REGULAR * high;
}

/** 'log' when ratios of ascending positive neighbours are constant and differences are not; 'linear' otherwise. */
export function spacingOf(values: readonly number[]): 'linear' | 'log' {
  if (values.length < 3 || values.some((value) => value <= 0)) return 'linear';
  const differences = values.slice(1).map((value, index) => value - values[index]);
  const ratios = values.slice(1).map((value, index) => Math.log(value / values[index]));
  return !regular(differences) && regular(ratios) ? 'log' : 'linear';
}
