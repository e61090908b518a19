import { cos, sin } from '../elementary/elementary.ts';
import { orderOfOnset } from './jump.ts';
import { bisect, largest } from './search.ts';
import type { Waveform, WaveformSpec } from './waveform.ts';

/** Frequencies at which a spectrum is looked at, up to twice what the samples resolve. */
const LINES = 240;

/** A, of the largest sample: squares of what is less are lost to rounding. */
const LEAST_PEAK = 1e-30;

/** s, between samples: divided by less, currents are beyond the largest number. */
const LEAST_STEP = 1e-30;

/**
 * A current given by samples: the natural cubic spline through them (de Boor, A Practical Guide to Splines, 1978, ch. IV,
 * from memory), 0 before the first and after the last. Charge and derivatives are the spline's own.
 * @throws RangeError for fewer than 3 samples, times that do not rise or lie before 0, numbers that are not finite, a
 *   current that is 0 throughout, or one that ends (or starts after t = 0) with a value other than 0
 */
export function table(spec: Extract<WaveformSpec, { type: 'table' }>): Waveform {
  const { times, currents } = spec;
  check(times, currents);
  const last = times.length - 1;
  const bends = naturalBends(times, currents);
  const charges = new Float64Array(times.length);
  for (let m = 0; m < last; m++) {
    const h = times[m + 1]! - times[m]!;
    const trapezium = (h * (currents[m]! + currents[m + 1]!)) / 2;
    charges[m + 1] = charges[m]! + trapezium - (h * h * h * (bends[m]! + bends[m + 1]!)) / 24;
  }

  const pieceOf = (t: number) => {
    let low = 0;
    let high = last;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (t < times[middle]!) high = middle;
      else low = middle;
    }
    return low;
  };
  const at = (t: number, orders: number, out: Float64Array) => {
    out.fill(0, 0, orders + 1);
    if (t < times[0]!) return;
    if (t >= times[last]!) {
      out[0] = charges[last]!;
      return;
    }
    const m = pieceOf(t);
    const h = times[m + 1]! - times[m]!;
    const u = t - times[m]!;
    const third = (bends[m + 1]! - bends[m]!) / h;
    const slope = slopeAtStart(times, currents, bends, m);
    out[0] = charges[m]! + u * (currents[m]! + u * (slope / 2 + u * (bends[m]! / 6 + (u * third) / 24)));
    out[1] = currents[m]! + u * (slope + u * (bends[m]! / 2 + (u * third) / 6));
    if (orders > 1) out[2] = slope + u * (bends[m]! + (u * third) / 2);
    if (orders > 2) out[3] = bends[m]! + u * third;
    if (orders > 3) out[4] = third;
  };
  const three = new Float64Array(3);
  const read = (order: number) => (t: number) => {
    at(t, 2, three);
    return three[order]!;
  };
  const [charge, value, slope] = [read(0), read(1), read(2)];

  const onPieces = (f: (t: number) => number) => {
    let most = 0;
    for (let m = 0; m < last; m++) {
      const h = times[m + 1]! - times[m]!;
      most = Math.max(most, largest(f, times[m]!, times[m]! + h, h / 4));
    }
    return most;
  };
  const peak = onPieces((t) => Math.abs(value(t)));
  // w′ is quadratic on a piece: largest at an end or where w″ is 0.
  const steepest = onPieces((t) => Math.abs(slope(t)));
  const jump = Math.abs(value(times[0]!)) / peak;
  const startSlope = Math.abs(slope(times[0]!)) / steepest;
  const transform = transformOf(times, currents, bends);
  const frequencies = new Map<number, number>();
  return {
    spec,
    peak,
    at,
    charge,
    value,
    slope,
    kinks: [times[0]!, times[last]!],
    seams: times.slice(1, last),
    jump,
    expectedOrder: orderOfOnset(jump, startSlope, 'the table jumps at its first sample'),
    lastActivity: (level) => {
      const active = (t: number) => Math.abs(slope(t)) >= level * steepest;
      for (let m = last - 1; m >= 0; m--) {
        const h = times[m + 1]! - times[m]!;
        for (let part = 7; part >= 0; part--) {
          const t = times[m]! + (part * h) / 8;
          if (active(t)) return bisect(active, t, t + h / 8);
        }
      }
      return times[0]!;
    },
    finalCharge: charges[last]!,
    highestFrequency: (level) => {
      const found = frequencies.get(level);
      if (found !== undefined) return found;
      const top = 2 * resolved(times);
      const sizeAt = (f: number) => transform(2 * Math.PI * f);
      const sizes = Array.from({ length: LINES }, (_, n) => sizeAt((top * (n + 1)) / LINES));
      const limit = level * largest(sizeAt, top / LINES, top, top / LINES);
      const line = sizes.findLastIndex((size) => size >= limit);
      const from = (top * (line + 1)) / LINES;
      const highest = line === LINES - 1 ? top : bisect((f) => sizeAt(f) >= limit, from, from + top / LINES);
      frequencies.set(level, highest);
      return highest;
    },
    timeScale: peak / steepest,
  };
}

/** The highest frequency that samples resolve, Hz: half of one over their widest spacing (Nyquist). */
export function resolved(times: readonly number[]): number {
  let widest = 0;
  for (let m = 1; m < times.length; m++) widest = Math.max(widest, times[m]! - times[m - 1]!);
  return 1 / (2 * widest);
}

function check(times: readonly number[], currents: readonly number[]): void {
  if (times.length < 3 || times.length !== currents.length)
    throw new RangeError(`the table has ${times.length} instants and ${currents.length} currents; it needs 3 or more.`);
  times.forEach((t, m) => {
    if (!Number.isFinite(t) || !Number.isFinite(currents[m]!))
      throw new RangeError(`sample ${m + 1} is ${t} s, ${currents[m]} A; both must be finite.`);
    if (m === 0 && t < 0)
      throw new RangeError(`the first sample is at ${t} s; nothing flows before t = 0, shift the table.`);
    if (m > 0 && !(t > times[m - 1]!))
      throw new RangeError(`sample ${m + 1} is at ${t} s, not after ${times[m - 1]} s; times must rise.`);
    if (m > 0 && t - times[m - 1]! < LEAST_STEP)
      throw new RangeError(`sample ${m + 1} is ${t - times[m - 1]!} s after the one before; it takes ${LEAST_STEP} s.`);
  });
  const peak = currents.reduce((most, i) => Math.max(most, Math.abs(i)), 0);
  if (peak === 0) throw new RangeError('every current of the table is 0; a source needs a current.');
  if (peak < LEAST_PEAK)
    throw new RangeError(
      `no current of the table is above ${peak} A; it takes ${LEAST_PEAK} A, whose square is not lost.`,
    );
  const ends = times[0]! > 0 ? [0, currents.length - 1] : [currents.length - 1];
  for (const m of ends)
    if (currents[m] !== 0)
      throw new RangeError(
        `sample ${m + 1} is ${currents[m]} A, from where the current would jump to 0; begin and end the table with 0 A.`,
      );
}

/** w″ at the samples: 0 at both ends, w′ continuous between, by elimination (Thomas's algorithm). */
function naturalBends(times: readonly number[], currents: readonly number[]): Float64Array {
  const n = times.length;
  const bends = new Float64Array(n);
  const above = new Float64Array(n);
  for (let m = 1; m < n - 1; m++) {
    const before = times[m]! - times[m - 1]!;
    const after = times[m + 1]! - times[m]!;
    const rise = (currents[m + 1]! - currents[m]!) / after - (currents[m]! - currents[m - 1]!) / before;
    const pivot = 2 * (before + after) - before * above[m - 1]!;
    above[m] = after / pivot;
    bends[m] = (6 * rise - before * bends[m - 1]!) / pivot;
  }
  for (let m = n - 2; m > 0; m--) bends[m]! -= above[m]! * bends[m + 1]!;
  return bends;
}

/** w′ at the start of piece m. */
function slopeAtStart(times: readonly number[], currents: readonly number[], bends: Float64Array, m: number): number {
  const h = times[m + 1]! - times[m]!;
  return (currents[m + 1]! - currents[m]!) / h - (h * (2 * bends[m]! + bends[m + 1]!)) / 6;
}

/**
 * |∫w′ e^(−jωt)dt| of the spline, by parts thrice: jumps of w′ at the ends over jω, jumps of w‴ at the samples over (jω)³
 * (w″ has none, being 0 at the ends).
 */
function transformOf(times: readonly number[], currents: readonly number[], bends: Float64Array) {
  const last = times.length - 1;
  const third = (m: number) => (m < 0 || m >= last ? 0 : (bends[m + 1]! - bends[m]!) / (times[m + 1]! - times[m]!));
  const jumps = Float64Array.from(times, (_, m) => third(m) - third(m - 1));
  const h = times[last]! - times[last - 1]!;
  const start = slopeAtStart(times, currents, bends, 0);
  const end = slopeAtStart(times, currents, bends, last - 1) + (h * (bends[last - 1]! + bends[last]!)) / 2;
  return (omega: number): number => {
    let re = 0;
    let im = 0;
    times.forEach((t, m) => {
      // 1/(jω) of the slope's jump; 1/(jω)³ = −1/(ω² jω) of w‴'s
      const size = (m === 0 ? start : m === last ? -end : 0) - jumps[m]! / (omega * omega);
      re += size * cos(omega * (t - times[0]!));
      im -= size * sin(omega * (t - times[0]!));
    });
    return Math.sqrt(re * re + im * im) / omega;
  };
}
