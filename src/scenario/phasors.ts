import { cos, sin } from '../elementary/elementary.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import { JUMP_NOTED, orderOfJump, orderOfOnset } from './jump.ts';
import { bisect, largest } from './search.ts';
import type { Waveform, WaveformSpec } from './waveform.ts';

/**
 * A current that is known by frequency, as a solver in the frequency domain tells it: peak phasors I_k of e^(+jωt), so that
 *   w(t) = Re Σ_k I_k e^(j2πf_k t).
 * Where the f_k are multiples k·Δf without gaps this sum repeats after T = 1/Δf, and one period of it, 0 ≤ t < T, is the
 * pulse; before and after nothing flows. Its charge and derivatives are those of the sum, term by term.
 */
export type PhasorSpec = Extract<WaveformSpec, { type: 'phasors' }>;

/** Of Δf: how far a frequency may be off its multiple, for what files round away. */
const STEP_SLACK = 1e-4;

/** Multiples of Δf at most; every instant costs a term each. */
const MOST_MULTIPLES = 10_000;

/** Of a frequency: how near a question must be to a line to be that line. */
const SAME_LINE = 1e-9;

/** Samples of the sum in a period of its highest line. */
const SAMPLES = 4;

/** Orders of `Waveform.at`: q, w and four derivatives. */
const ORDERS = 6;
/** numbers of a line: (re, im) for each order */
const LINE = 2 * ORDERS;

/** Frequencies as multiples of one step: `first`·step, (first + 1)·step, … (0 Hz apart from them). */
export interface Comb {
  /** Δf, Hz */
  readonly step: number;
  /** multiple of the lowest frequency above 0 */
  readonly first: number;
  /** frequencies above 0 */
  readonly count: number;
}

/**
 * The step that frequencies are multiples of, without gaps, or why there is none.
 * @param frequencies Hz, ascending, 0 or more
 */
export function combOf(frequencies: readonly number[]): Comb | { readonly reason: string } {
  const lines = frequencies.filter((f) => f > 0);
  const zero = lines.length < frequencies.length;
  const lowest = lines[0];
  const top = lines.at(-1);
  if (lowest === undefined || top === undefined || (lines.length === 1 && !zero))
    return { reason: 'give one frequency alone, and a pulse needs several at equal steps' };
  const spacing = lines.length === 1 ? lowest : (top - lowest) / (lines.length - 1);
  const first = zero ? 1 : Math.round(lowest / spacing);
  const step = top / (first + lines.length - 1);
  const off = lines.findIndex((f, n) => !(Math.abs(f - (first + n) * step) <= STEP_SLACK * step));
  if (first < 1 || off >= 0) {
    const tell = (f: number) => formatQuantity(f, 'Hz', 6);
    const odd = Math.max(off, 0);
    return {
      reason: `are not multiples of one step without gaps: ${tell(lines[odd]!)} is not ${first + odd} times ${tell(step)}`,
    };
  }
  if (first + lines.length - 1 > MOST_MULTIPLES)
    return { reason: `end at ${first + lines.length - 1} times their step; the limit is ${MOST_MULTIPLES} times` };
  return { step, first, count: lines.length };
}

/**
 * The phasor at a frequency, A.
 * @throws RangeError for a frequency that is none of those given, naming its neighbours: between them nothing is known
 */
export function phasorAt({ frequencies, re, im }: PhasorSpec, frequency: number): readonly [number, number] {
  const n = frequencies.findIndex((f) => Math.abs(f - frequency) <= SAME_LINE * f);
  if (n >= 0) return [re[n]!, im[n]!];
  const tell = (f: number | undefined) => (f === undefined ? [] : [formatQuantity(f, 'Hz', 6)]);
  const near = [
    ...tell(frequencies.findLast((f) => f > 0 && f < frequency)),
    ...tell(frequencies.find((f) => f > frequency)),
  ];
  throw new RangeError(
    `frequency is ${formatQuantity(frequency, 'Hz', 6)}, at which a current that is given by frequency is not known; ` +
      `nearest it is known at ${near.join(' and ')}. Ask there, or give the current at this frequency too.`,
  );
}

/**
 * One period of the sum as a waveform.
 * @throws RangeError where the frequencies are no multiples of a step, or all phasors are 0
 */
export function phasorPulse(spec: PhasorSpec): Waveform {
  const comb = combOf(spec.frequencies);
  if ('reason' in comb) throw new RangeError(`its frequencies ${comb.reason}.`);
  const sum = new Series(spec, comb);
  const { period, peak, steepest } = sum;
  if (peak === 0) throw new RangeError('every phasor is 0; a source needs a current.');
  const at = (t: number, orders: number, out: Float64Array) => sum.at(t, orders, out);
  const scratch = new Float64Array(ORDERS);
  const read = (order: 0 | 1 | 2) => (t: number) => {
    sum.at(t, Math.max(1, order), scratch);
    return scratch[order]!;
  };
  const [charge, value, slope] = [read(0), read(1), read(2)];
  const jump = Math.abs(value(0)) / Math.max(peak, spec.scale);
  const bend = Math.abs(slope(0)) / Math.max(steepest, spec.scale / sum.timeScale);
  // What the sum's own rounding is worth.
  const rounding = 4 * spec.frequencies.length * Number.EPSILON;
  return {
    spec,
    peak,
    at,
    charge,
    value,
    slope,
    kinks: jump > rounding || bend > rounding ? [0, period] : [],
    seams: [],
    jump,
    expectedOrder: orderOfOnset(jump, bend, 'the sum jumps at t = 0'),
    lastActivity: (level) => sum.lastActivity(level),
    finalCharge: charge(period),
    highestFrequency: (level) => highestLine(spec, level),
    timeScale: sum.timeScale,
  };
}

/**
 * The same current where nothing is asked in time: phasors that need not make a pulse.
 * @returns a waveform whose value, charge and derivatives in time throw RangeError
 */
export function phasorsAlone(spec: PhasorSpec): Waveform {
  const refuse = (): never => {
    throw new RangeError('the current is given by frequency and was read for questions by frequency alone.');
  };
  const top = spec.frequencies.at(-1)!;
  return {
    spec,
    peak: spec.re.reduce((most, re, n) => Math.max(most, sizeOf(re, spec.im[n]!)), 0),
    at: refuse,
    charge: refuse,
    value: refuse,
    slope: refuse,
    kinks: [],
    seams: [],
    jump: 0,
    expectedOrder: orderOfJump(0),
    lastActivity: refuse,
    get finalCharge() {
      return refuse();
    },
    highestFrequency: (level) => highestLine(spec, level),
    timeScale: 1 / (2 * Math.PI * top),
  };
}

/** What a wire's phasors are judged by, relative to the largest anywhere along it. */
export interface Ends {
  /** |f I| of the highest sixteenth of the lines, over the largest |f I| */
  readonly top: number;
  /** the same of the lowest line above 0 */
  readonly bottom: number;
  /** the largest |w| of any of them, A */
  readonly peak: number;
  /** |w(0)| over that; |w′(0)| over the largest |w′| */
  readonly jump: number;
  readonly bend: number;
  /** the current of 0 Hz that would let the one that starts with most start with nothing, A */
  readonly missing: number;
}

/** Part of the lines, from the highest down, by which the band's end is judged. */
const TOP_PART = 1 / 16;

/** How the sums at all stations of a wire begin and end, in frequency and in time. */
export function endsOf(stations: readonly PhasorSpec[], comb: Comb): Ends {
  const from = comb.first + comb.count - Math.max(1, Math.floor(comb.count * TOP_PART));
  let [all, top, bottom, peak, steepest, start, slope, missing] = [0, 0, 0, 0, 0, 0, 0, 0];
  const three = new Float64Array(ORDERS);
  for (const spec of stations) {
    spec.frequencies.forEach((f, n) => {
      const size = f * sizeOf(spec.re[n]!, spec.im[n]!);
      all = Math.max(all, size);
      if (f > (from - 0.5) * comb.step) top = Math.max(top, size);
      if (f > 0 && f < (comb.first + 0.5) * comb.step) bottom = Math.max(bottom, size);
    });
    const sum = new Series(spec, comb);
    peak = Math.max(peak, sum.peak);
    steepest = Math.max(steepest, sum.steepest);
    sum.at(0, 2, three);
    if (Math.abs(three[1]!) > start) [start, missing] = [Math.abs(three[1]!), -three[1]!];
    slope = Math.max(slope, Math.abs(three[2]!));
  }
  const part = (x: number, of: number) => (x === 0 ? 0 : x / of);
  return {
    top: part(top, all),
    bottom: part(bottom, all),
    peak,
    jump: part(start, peak),
    bend: part(slope, steepest),
    missing,
  };
}

/** Whether an end is small enough to be left out without a word. */
export const isNegligible = (part: number): boolean => part <= JUMP_NOTED;

const sizeOf = (re: number, im: number): number => Math.sqrt(re * re + im * im);

/** The highest frequency at which |f I| is `level` of its largest, Hz. */
function highestLine({ frequencies, re, im }: PhasorSpec, level: number): number {
  const sizes = frequencies.map((f, n) => f * sizeOf(re[n]!, im[n]!));
  const limit = level * sizes.reduce((most, size) => Math.max(most, size), 0);
  return frequencies[sizes.findLastIndex((size) => size >= limit)]!;
}

/** Σ_k I_k e^(j2πkΔf t), its integral from 0 and its derivatives, on one period. */
class Series {
  readonly period: number;
  readonly peak: number;
  readonly steepest: number;
  /** a time over which the sum changes by itself, s */
  readonly timeScale: number;
  readonly #first: number;
  readonly #direct: number;
  /** of line after line: I (jω)^n, (re, im), for n = −1, 0, …, 4 */
  readonly #lines: Float64Array;
  /** w′ at equidistant instants of the period */
  readonly #slopes: Float64Array;

  constructor({ frequencies, re, im }: PhasorSpec, { step, first, count }: Comb) {
    this.period = 1 / step;
    this.#first = first;
    const skip = frequencies.length - count;
    this.#direct = skip > 0 ? re[0]! : 0;
    this.#lines = new Float64Array(LINE * count);
    for (let n = 0; n < count; n++) {
      const omega = 2 * Math.PI * step * (first + n);
      // I/(jω) = (Im I − j Re I)/ω, and from order to order times jω
      let [a, b] = [im[skip + n]! / omega, -re[skip + n]! / omega];
      for (let at = LINE * n; at < LINE * (n + 1); at += 2) {
        this.#lines[at] = a;
        this.#lines[at + 1] = b;
        [a, b] = [-omega * b, omega * a];
      }
    }
    const samples = SAMPLES * (first + count);
    const values = this.#sampled(1, samples);
    this.#slopes = this.#sampled(2, samples);
    this.peak = this.#refined(1, values);
    this.steepest = this.#refined(2, this.#slopes);
    this.timeScale = this.steepest === 0 ? this.period : this.peak / this.steepest;
  }

  at(t: number, orders: number, out: Float64Array): void {
    out.fill(0, 0, orders + 1);
    if (t < 0) return;
    if (t >= this.period) {
      out[0] = this.#direct * this.period;
      return;
    }
    const turn = t / this.period;
    const begin = this.#first * turn;
    let zRe = cos(2 * Math.PI * (begin - Math.floor(begin)));
    let zIm = sin(2 * Math.PI * (begin - Math.floor(begin)));
    const [stepRe, stepIm] = [cos(2 * Math.PI * turn), sin(2 * Math.PI * turn)];
    const lines = this.#lines;
    for (let from = 0; from < lines.length; from += LINE) {
      // e^(jωt) − 1: what has flowed since t = 0
      out[0]! += lines[from]! * (zRe - 1) - lines[from + 1]! * zIm;
      for (let order = 1, at = from + 2; order <= orders; order++, at += 2)
        out[order]! += lines[at]! * zRe - lines[at + 1]! * zIm;
      const re = zRe * stepRe - zIm * stepIm;
      zIm = zRe * stepIm + zIm * stepRe;
      zRe = re;
    }
    out[0]! += this.#direct * t;
    out[1]! += this.#direct;
  }

  lastActivity(level: number): number {
    const limit = level * this.steepest;
    const spacing = this.period / this.#slopes.length;
    const last = this.#slopes.findLastIndex((x) => Math.abs(x) >= limit);
    if (last === this.#slopes.length - 1) return this.period;
    const out = new Float64Array(ORDERS);
    const active = (t: number) => {
      this.at(t, 2, out);
      return Math.abs(out[2]!) >= limit;
    };
    return bisect(active, last * spacing, (last + 1) * spacing);
  }

  /** One order at equidistant instants of the period, by a table of one turn. */
  #sampled(order: 1 | 2, samples: number): Float64Array {
    const turnRe = Float64Array.from({ length: samples }, (_, m) => cos((2 * Math.PI * m) / samples));
    const turnIm = Float64Array.from({ length: samples }, (_, m) => sin((2 * Math.PI * m) / samples));
    return Float64Array.from({ length: samples }, (_, m) => {
      let sum = order === 1 ? this.#direct : 0;
      let place = (this.#first * m) % samples;
      for (let at = 2 * order; at < this.#lines.length; at += LINE) {
        sum += this.#lines[at]! * turnRe[place]! - this.#lines[at + 1]! * turnIm[place]!;
        place += m;
        if (place >= samples) place -= samples;
      }
      return sum;
    });
  }

  /** The largest size of one order, refined beside its largest sample. */
  #refined(order: 1 | 2, samples: Float64Array): number {
    const best = samples.reduce((m, x, n) => (Math.abs(x) > Math.abs(samples[m]!) ? n : m), 0);
    const spacing = this.period / samples.length;
    const out = new Float64Array(ORDERS);
    const size = (t: number) => {
      this.at(t, order, out);
      return Math.abs(out[order]!);
    };
    return largest(size, Math.max(0, (best - 1) * spacing), (best + 1) * spacing, spacing);
  }
}
