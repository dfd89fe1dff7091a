/** Counting of basis states. */

/**
 * C(n, k), exact up to 2^53 and correctly rounded above; 0 for k < 0 or k > n. Infinity past the range of double precision.
 * @param n whole number ≥ 0
 */
export function binomial(n: number, k: number): number {
  if (k < 0 || k > n) return 0;
  const steps = Math.min(k, n - k);
  let value = 1n;
  for (let i = 1; i <= steps; i += 1) value = (value * BigInt(n - steps + i)) / BigInt(i);
  return Number(value);
}
