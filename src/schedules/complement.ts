/**
 * 1 − exp(a + i b) without loss of digits where the exponential is near 1: the building block of characteristic functions.
 *
 * Real part −expm1(a) + 2 eᵃ sin²(b/2): for a ≤ 0 both terms are ≥ 0, so nothing cancels. Imaginary part −eᵃ sin b.
 * Also the change of 1 − χ under a dead time, and the bounds that keep times within what double precision can turn into phases.
 */
import { z } from 'zod';

/** Writes 1 − exp(logModulus + i·angle) to out[0] (real) and out[1] (imaginary). */
export function complementOfExponential(logModulus: number, angle: number, out: Float64Array): void {
  const modulus = Math.exp(logModulus);
  const half = Math.sin(angle / 2);
  out[0] = 2 * modulus * half * half - Math.expm1(logModulus);
  out[1] = -modulus * Math.sin(angle);
}

/** Replaces 1 − χ by 1 − e^{i·angle} χ in place. */
export function rotateComplement(angle: number, out: Float64Array): void {
  const cos = Math.cos(angle);
  const sin = Math.sin(angle);
  const half = Math.sin(angle / 2);
  const re = out[0];
  const im = out[1];
  out[0] = 2 * half * half + cos * re - sin * im;
  out[1] = -sin + sin * re + cos * im;
}

/** Times a schedule may hold: far beyond any experiment, and small enough that no product with an energy overflows. */
export const LONGEST_TIME = 1e12;

/** A time > 0 in the inverse energy unit. */
export const positiveTime = (meaning: string) => z.number().gt(0).max(LONGEST_TIME).describe(meaning);

/** A time ≥ 0 in the inverse energy unit. */
export const nonNegativeTime = (meaning: string) => z.number().min(0).max(LONGEST_TIME).describe(meaning);
