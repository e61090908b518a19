import { cos, sin } from '../elementary/elementary.ts';
import { phasorAt } from '../scenario/phasors.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { gaussLegendre } from './quadrature.ts';
import { sphericalBessel } from './sphericalBessel.ts';

export type Complex = readonly [re: number, im: number];

/** What a waveform is at a frequency: a complex amplitude, and a bound on its error. */
export interface WaveformLine {
  readonly value: Complex;
  readonly error: number;
}

/**
 * How waveforms drive a field by frequency: `steady`, each is amplitude · e^(+jωt) for ever (A), the amplitude that of its
 * specification, its peak where the specification has none, or its phasor at the frequency where it is given by frequency;
 * `pulse`, each is its Fourier integral W(f) = ∫₀^∞ w e^(−jωt) dt (A/Hz).
 */
export type Drive = 'steady' | 'pulse';

/**
 * Each waveform at a frequency above 0 Hz.
 * @throws (from what it returns) RangeError where the steady state of a current that is given by frequency is asked for
 *   between those frequencies
 */
export function linesOf(waveforms: readonly Waveform[], drive: Drive): (frequency: number) => WaveformLine[] {
  if (drive === 'steady') {
    return (frequency) =>
      waveforms.map(({ spec, peak }): WaveformLine => {
        if (spec.type === 'phasors') return { value: phasorAt(spec, frequency), error: 0 };
        return { value: ['amplitude' in spec ? spec.amplitude : peak, 0], error: 0 };
      });
  }
  const transforms = waveforms.map(fourierTransform);
  return (frequency) => transforms.map((transform) => transform(frequency));
}

/** Points of Gauss's rule on a part, and so Legendre coefficients of w′ on it. */
const POINTS = 16;

/** Coefficients by which the error on a part is judged. */
const LAST = 2;

/** Error asked of a part, as a share of the waveform's peak. */
const ACCURACY = 1e-14;

/** In time scales of the waveform: the points of a longer part might miss the pulse altogether. */
const LONGEST = 16;

/** A part is halved at most so often. */
const MOST_HALVINGS = 48;

/** w′ and w are followed until they are this part of their peaks. */
const SPENT = 1e-16;
const MOST_DOUBLINGS = 8;

/** A stretch of time, and the Legendre coefficients of w′ on it, A/s. */
interface Part {
  readonly middle: number;
  readonly half: number;
  readonly coefficients: Float64Array;
}

/**
 * W(f) = (1/jω) [w(0⁺) + ∫₀^∞ w′ e^(−jωt) dt]. On parts of time w′ = Σ c_l P_l(x), x from −1 to 1, and
 * ∫ P_l(x) e^(−jκx) dx = 2 (−j)^l j_l(κ) with spherical Bessel functions j_l, so that a frequency costs the same however
 * often it oscillates (N. S. Bakhvalov and L. G. Vasil’eva, USSR Comput. Math. Math. Phys. 8, 1968, from memory). Parts
 * are halved until the last coefficients are below rounding of the peak; |j_l| ≤ 1 makes them a bound.
 * @returns the transform, A/Hz, for frequencies above 0 Hz
 */
export function fourierTransform(waveform: Waveform): (frequency: number) => WaveformLine {
  const { kinks, peak } = waveform;
  const parts: Part[] = [];
  let last = waveform.lastActivity(SPENT);
  // A slow tail may have all but no slope and still a current.
  for (let m = 0; m < MOST_DOUBLINGS && Math.abs(waveform.value(last)) > SPENT * peak; m++) last *= 2;
  const stations = [...new Set([0, ...kinks.filter((kink) => kink > 0 && kink < last), last])].sort((a, b) => a - b);
  let error = Math.abs(waveform.value(last));
  for (let m = 1; m < stations.length; m++) error += divide(waveform, stations[m - 1]!, stations[m]!, 0, parts);
  const jump = waveform.value(0);
  const bessel = new Float64Array(POINTS);
  return (frequency) => {
    const omega = 2 * Math.PI * frequency;
    let re = jump;
    let im = 0;
    for (const { middle, half, coefficients } of parts) {
      sphericalBessel(omega * half, bessel);
      // Σ c_l 2 (−j)^l j_l: orders 0, 2, … are real with alternating sign, 1, 3, … imaginary.
      let even = 0;
      let odd = 0;
      for (let l = 0; l < POINTS; l += 2) {
        const sign = l % 4 === 0 ? 2 : -2;
        even += sign * coefficients[l]! * bessel[l]!;
        odd -= sign * coefficients[l + 1]! * bessel[l + 1]!;
      }
      const [turnRe, turnIm] = [cos(omega * middle), -sin(omega * middle)];
      re += half * (even * turnRe - odd * turnIm);
      im += half * (even * turnIm + odd * turnRe);
    }
    // An instant's rounding, ω t ε, acts where w′ is; peak is a bound of each half of ∫|w′| that a pulse makes.
    const rounding = Number.EPSILON * (16 + omega * last) * 2 * peak;
    return { value: [im / omega, -re / omega], error: (error + rounding) / omega };
  };
}

/** Parts of [from, to] on which w′ is resolved, appended; returns what its quadrature may be off by, A. */
function divide(waveform: Waveform, from: number, to: number, depth: number, parts: Part[]): number {
  const part = expand(waveform, from, to);
  const tail = part.coefficients.subarray(POINTS - LAST).reduce((sum, c) => sum + Math.abs(c), 0);
  const error = 2 * part.half * tail;
  const middle = (from + to) / 2;
  const resolved = error <= ACCURACY * waveform.peak && to - from <= LONGEST * waveform.timeScale;
  if (resolved || depth === MOST_HALVINGS || !(middle > from && middle < to)) {
    parts.push(part);
    return error;
  }
  return divide(waveform, from, middle, depth + 1, parts) + divide(waveform, middle, to, depth + 1, parts);
}

/** c_l = (2l + 1)/2 ∫ w′ P_l dx by Gauss's rule, whose points also make it exact to the order it is cut at. */
function expand(waveform: Waveform, from: number, to: number): Part {
  const { nodes, weights } = gaussLegendre(POINTS);
  const half = (to - from) / 2;
  const middle = from + half;
  const coefficients = new Float64Array(POINTS);
  nodes.forEach((x, m) => {
    const sample = weights[m]! * waveform.slope(middle + half * x);
    let below = 0;
    let here = 1;
    for (let l = 0; l < POINTS; l++) {
      coefficients[l]! += (l + 0.5) * sample * here;
      const above = ((2 * l + 1) * x * here - l * below) / (l + 1);
      below = here;
      here = above;
    }
  });
  return { middle, half, coefficients };
}
