import { cos, sin } from '../elementary/elementary.ts';
import type { FieldHistory } from '../trace/trace.ts';
import { FIRST_COMPONENT, type Field, samplesOf } from './fields.ts';

/** Share of the window over which both signals are brought down to zero at its end. */
const TAPER_SHARE = 0.1;

/**
 * Discrete Fourier lines of a field's three components at one point: X_c[k] = Δt Σ_n taper_n x_c[n] e^(−j2πkn/N), at
 * k/T, T = NΔt the window, k from 0 to ⌊N/2⌋; V/(m·Hz) or A/(m·Hz).
 */
export interface Spectrum {
  /** T, s */
  readonly window: number;
  /** number of lines */
  readonly lines: number;
  /** re[c][k] and im[c][k], c = 0, 1, 2 */
  readonly re: readonly Float64Array[];
  readonly im: readonly Float64Array[];
}

/** 1, then half a period of a cosine down to 0 over the last tenth: a static tail must not end in a step. */
export function endTaper(count: number): Float64Array {
  const length = Math.max(1, Math.round(TAPER_SHARE * count));
  return Float64Array.from({ length: count }, (_, n) => {
    const into = n - (count - 1 - length);
    return into <= 0 ? 1 : 0.5 * (1 + cos((Math.PI * into) / length));
  });
}

/** The spectrum of a field at one point, by the defining sum: exact for any number of instants. */
export function spectrumOf(history: FieldHistory, field: Field, point: number): Spectrum {
  const instants = history.instants[field];
  const count = instants.length;
  const timeStep = count > 1 ? (instants[count - 1]! - instants[0]!) / (count - 1) : 0;
  const taper = endTaper(count);
  const turn = (2 * Math.PI) / count;
  const cosines = Float64Array.from({ length: count }, (_, m) => cos(turn * m));
  const sines = Float64Array.from({ length: count }, (_, m) => sin(turn * m));
  const lines = Math.floor(count / 2) + 1;
  const re = [0, 1, 2].map(() => new Float64Array(lines));
  const im = [0, 1, 2].map(() => new Float64Array(lines));
  for (let c = 0; c < 3; c++) {
    const tapered = samplesOf(history, point, FIRST_COMPONENT[field] + c).map((x, n) => x * taper[n]!);
    for (let k = 0; k < lines; k++) {
      let real = 0;
      let imaginary = 0;
      for (let n = 0, m = 0; n < count; n++) {
        real += tapered[n]! * cosines[m]!;
        imaginary -= tapered[n]! * sines[m]!;
        m += k;
        if (m >= count) m -= count;
      }
      re[c]![k] = real * timeStep;
      im[c]![k] = imaginary * timeStep;
    }
  }
  return { window: count * timeStep, lines, re, im };
}

/** |X[k]| = √(Σ_c |X_c[k]|²) for every line. */
export function magnitudes({ lines, re, im }: Spectrum): Float64Array {
  return Float64Array.from({ length: lines }, (_, k) => {
    let sum = 0;
    for (let c = 0; c < 3; c++) sum += re[c]![k]! ** 2 + im[c]![k]! ** 2;
    return Math.sqrt(sum);
  });
}

/** |exact|, |grid| and |grid − exact| by frequency: what a chart of spectra shows. */
export interface Spectra {
  /** Hz */
  readonly frequency: Float64Array;
  /** V/(m·Hz) or A/(m·Hz) */
  readonly exact: Float64Array;
  readonly grid: Float64Array;
  readonly difference: Float64Array;
}

/** The spectra of a field of both solvers and of their difference at one point. */
export function spectraOf(grid: FieldHistory, exact: FieldHistory, field: Field, point: number): Spectra {
  const g = spectrumOf(grid, field, point);
  const x = spectrumOf(exact, field, point);
  const minus = (a: readonly Float64Array[], b: readonly Float64Array[]) =>
    a.map((values, c) => values.map((v, k) => v - b[c]![k]!));
  return {
    frequency: Float64Array.from({ length: x.lines }, (_, k) => k / x.window),
    exact: magnitudes(x),
    grid: magnitudes(g),
    difference: magnitudes({ ...x, re: minus(g.re, x.re), im: minus(g.im, x.im) }),
  };
}
