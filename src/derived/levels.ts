import { decibels, log, pow } from '../elementary/elementary.ts';
import type { Complex } from '../retarded/waveformSpectrum.ts';

/**
 * Amplitudes in the units of emission measurements. A vector's amplitude is √(Σ_c |F_c|²) over its components, the one by
 * which field strength meters with three crossed antennas tell it; for linear polarisation it is that of the field.
 */
export const amplitudeOf = (vector: readonly Complex[]): number =>
  Math.sqrt(vector.reduce((sum, [re, im]) => sum + re * re + im * im, 0));

const MICRO = 1e-6;
const MEGAHERTZ = 1e6;

/**
 * dBµV/m of a steady state: 20 log₁₀(E_rms / 1 µV/m), E_rms = |E|/√2, |E| the amplitude (V/m). Receivers are calibrated in
 * the root mean square of a sine (CISPR 16-1-1, from memory).
 */
export const steadyLevel = (amplitude: number): number => decibels(amplitude / Math.SQRT2 / MICRO);

/**
 * dBµV/m/MHz of a pulse: 20 log₁₀(√2 |E(f)| · 1 MHz / 1 µV/m), |E(f)| the Fourier integral ∫ E e^(−jωt) dt (V/m/Hz). A
 * bandpass of impulse bandwidth B shows a pulse as a burst of amplitude 2 |E(f)| B, root mean square √2 |E(f)| B (CISPR
 * 16-1-1 and MIL-STD-461, from memory).
 */
export const pulseLevel = (density: number): number => decibels((Math.SQRT2 * density * MEGAHERTZ) / MICRO);

/**
 * The band round the largest of some amplitudes within which they are at least `level` of it: from the frequency where
 * they rise through it to that where they fall through it, straight between neighbours on logarithmic scales; null at an
 * end where they do not.
 * @param frequencies Hz, ascending
 */
export function bandAbove(
  frequencies: readonly number[],
  amplitudes: readonly number[],
  level: number,
): { readonly from: number | null; readonly to: number | null } {
  const peak = amplitudes.reduce((best, a, n) => (a > amplitudes[best]! ? n : best), 0);
  const limit = level * amplitudes[peak]!;
  const edge = (step: 1 | -1): number | null => {
    for (let n = peak; n + step >= 0 && n + step < frequencies.length; n += step) {
      const [inside, outside] = [amplitudes[n]!, amplitudes[n + step]!];
      if (outside >= limit) continue;
      const share = outside > 0 ? log(inside / limit) / log(inside / outside) : 0;
      return frequencies[n]! * pow(frequencies[n + step]! / frequencies[n]!, share);
    }
    return null;
  };
  return { from: edge(-1), to: edge(1) };
}
