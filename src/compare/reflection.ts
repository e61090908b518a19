import type { FieldHistory } from '../trace/trace.ts';
import { FIRST_COMPONENT, type Field, requireAligned, samplesOf } from './fields.ts';
import { magnitudes, spectrumOf } from './spectrum.ts';

/**
 * What the walls send back, alone: the grid in its box minus the very same lattice without walls, as a ratio to the exact
 * field. Everything the two lattices share (dispersion, near field, gridding) cancels, so this is the walls' own doing.
 *
 * Ratios are of amplitudes and raw: where one lies below `floor`, what is measured is the leftover of the lattice without
 * walls, and nothing may be called a reflection.
 */
export interface Reflection {
  /** largest component of what came back, at any instant, over that of the exact field */
  readonly peak: number;
  /** the same up to the passing of every wall's echo */
  readonly transient: number;
  /** the same afterwards: what drifts or rings on; NaN where the window ends before */
  readonly late: number;
  /** |⟨grid⟩ − ⟨free⟩|/|⟨exact⟩| of the averages afterwards; NaN where the exact field leaves nothing static */
  readonly static: number;
  /** what ratios to the exact peak cannot be told from */
  readonly floor: number;
  readonly time: ReflectionTrace;
  readonly frequency: ReflectionSpectrum;
}

/** Largest component over the exact peak, the largest of each of at most `TRACE_POINTS` pieces of the window. */
export interface ReflectionTrace {
  /** middles of the pieces, s */
  readonly t: Float64Array;
  readonly reflected: Float64Array;
  /** the exact field itself, for scale */
  readonly exact: Float64Array;
}

/** |reflected(f)|/|exact(f)| at lines where the exact field stands within 40 dB of its strongest. */
export interface ReflectionSpectrum {
  /** Hz */
  readonly f: Float64Array;
  readonly ratio: Float64Array;
}

const TRACE_POINTS = 200;

/** Lines below this share of the strongest (−40 dB) hold too little to be divided by. */
const OF_STRONGEST = 0.01;

/** The first line used, 2/T: below it the window is too short. */
const FIRST_LINE = 2;

/** A static remainder counts from this share of the exact peak: −60 dB. */
const STATIC_SHARE = 1e-3;

/**
 * The reflection seen in one field at one point.
 * @param floor what is left of reflections in `free`, a share of the exact peak
 * @param echoesPast instant by which the first echo of every wall has passed the point, s
 * @throws Error where the three are not sampled alike
 */
export function reflectionAt(
  grid: FieldHistory,
  free: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
  floor: number,
  echoesPast: number,
): Reflection {
  requireAligned({ grid, free, exact });
  const t = exact.instants[field];
  const reflected = largestComponent(point, field, grid, free);
  const direct = largestComponent(point, field, exact);
  const peak = largest(direct);
  const found = t.findIndex((instant) => instant > echoesPast);
  const end = found < 0 ? t.length : found;
  return {
    peak: largest(reflected) / peak,
    transient: largest(reflected.subarray(0, end)) / peak,
    late: end < t.length ? largest(reflected.subarray(end)) / peak : Number.NaN,
    static: staticRatio(grid, free, exact, field, point, end, peak),
    floor,
    time: {
      t: pieces(t, (piece) => (piece[0]! + piece[piece.length - 1]!) / 2),
      reflected: pieces(reflected, largest).map((v) => v / peak),
      exact: pieces(direct, largest).map((v) => v / peak),
    },
    frequency: spectrumRatio(grid, free, exact, field, point),
  };
}

const largest = (values: Float64Array): number => values.reduce((most, v) => Math.max(most, v), 0);

/** max over a field's components of |a − b|, instant by instant; of |a| alone without b. */
function largestComponent(point: number, field: Field, a: FieldHistory, b?: FieldHistory): Float64Array {
  const result = new Float64Array(a.instants.count);
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const as = samplesOf(a, point, c);
    const bs = b && samplesOf(b, point, c);
    for (let n = 0; n < as.length; n++) result[n] = Math.max(result[n]!, Math.abs(as[n]! - (bs ? bs[n]! : 0)));
  }
  return result;
}

/** One value for each of at most `TRACE_POINTS` equal pieces. */
function pieces(values: Float64Array, of: (piece: Float64Array) => number): Float64Array {
  const length = Math.ceil(values.length / TRACE_POINTS);
  return Float64Array.from({ length: Math.ceil(values.length / length) }, (_, m) =>
    of(values.subarray(m * length, (m + 1) * length)),
  );
}

function staticRatio(
  grid: FieldHistory,
  free: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
  end: number,
  peak: number,
): number {
  let lost = 0;
  let left = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const mean = (of: FieldHistory) => {
      const rest = samplesOf(of, point, c).subarray(end);
      return rest.reduce((sum, v) => sum + v, 0) / rest.length;
    };
    lost += (mean(grid) - mean(free)) ** 2;
    left += mean(exact) ** 2;
  }
  return Math.sqrt(left) >= STATIC_SHARE * peak ? Math.sqrt(lost / left) : Number.NaN;
}

/** The spectrum of a difference is the difference of spectra, which have one taper. */
function spectrumRatio(
  grid: FieldHistory,
  free: FieldHistory,
  exact: FieldHistory,
  field: Field,
  point: number,
): ReflectionSpectrum {
  const values = grid.values.map((v, i) => v - free.values[i]!);
  const back = magnitudes(spectrumOf({ ...grid, values }, field, point));
  const spectrum = spectrumOf(exact, field, point);
  const direct = magnitudes(spectrum);
  const least = OF_STRONGEST * largest(direct);
  const lines = [...direct.keys()].filter((k) => k >= FIRST_LINE && direct[k]! > 0 && direct[k]! >= least);
  return {
    f: Float64Array.from(lines, (k) => k / spectrum.window),
    ratio: Float64Array.from(lines, (k) => back[k]! / direct[k]!),
  };
}
