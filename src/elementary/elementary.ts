import bytes from '../kernels/elementary.ts';
import { instantiate } from './wasm.ts';

/**
 * exp, log, expm1, log1p, pow, sin, cos, asin, atan2 in double precision, with the same last bit in Node and in every browser
 * (radians; the usual IEEE results for infinities and NaN). Everything that reaches a printed number uses these instead
 * of the host's `Math`, whose last bits are its own affair.
 */
interface Elementary {
  exp(x: number): number;
  log(x: number): number;
  /** eˣ − 1 without cancellation near 0 */
  expm1(x: number): number;
  /** log(1 + x) without cancellation near 0 */
  log1p(x: number): number;
  pow(x: number, y: number): number;
  sin(x: number): number;
  cos(x: number): number;
  asin(x: number): number;
  atan2(y: number, x: number): number;
}

export const { exp, log, expm1, log1p, pow, sin, cos, asin, atan2 } = instantiate(bytes, {}) as unknown as Elementary;

/** Decibels of a ratio of amplitudes: 20 log₁₀ x (−∞ for 0). */
export function decibels(ratio: number): number {
  return ratio > 0 ? (20 / Math.LN10) * log(ratio) : Number.NEGATIVE_INFINITY;
}

/** The ratio of amplitudes that is `dB` decibels: 10^(dB/20). */
export function fromDecibels(dB: number): number {
  return exp((dB * Math.LN10) / 20);
}
