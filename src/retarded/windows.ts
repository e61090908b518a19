import { cos } from '../elementary/elementary.ts';
import type { Waveform } from '../scenario/waveform.ts';

/** Chebyshev nodes that a waveform is sampled at, and so the highest degree plus 1 that a window may be of. */
const SAMPLES = 24;

/** A window is resolved if this many of its highest coefficients, of each of q, w and w′, are rounding. */
const SPENT = 2;

/**
 * Coefficients up to this many roundings of the scale are dropped. Those of an analytic function fall geometrically, so
 * that all of them together, and what lies beyond the last, are worth about one more.
 */
const DROPPED = 2 * Number.EPSILON;

/** Of a waveform's time scale: the width of windows near a start or a seam, where nothing asks for another. */
const NARROW = 1 / 4;
/** Of the time since the last seam: the width of later windows. */
const LATE = 1 / 16;

/** Halvings of a window before its waveform counts as one that no polynomial follows. */
const HALVINGS = 16;

/** A stretch of source time on which a waveform is a polynomial to rounding of its peaks. */
export interface Window {
  /** where the kernel finds it */
  readonly address: number;
  /** the largest |w″| found there, A/s² */
  readonly bend: number;
}

/** Numbers before a window's coefficients: middle, 1/half, degree. */
const HEAD = 4;

/** Where windows lie in the kernel's memory. All of them are forgotten when it is full: they are made again alike. */
export class Shelf {
  readonly #numbers: Float64Array;
  readonly #integers: Int32Array;
  #next: number;
  /** grows with every time that all is forgotten */
  edition = 0;

  /** @param from in numbers of 8 bytes */
  constructor(
    memory: ArrayBuffer,
    readonly from: number,
  ) {
    this.#numbers = new Float64Array(memory);
    this.#integers = new Int32Array(memory);
    this.#next = from;
  }

  /**
   * Puts a window as the kernel reads it; returns its address.
   * @param powers of w, w′ and q: coefficients of ascending powers of (u − middle)/half, up to `degree`
   */
  put(middle: number, half: number, degree: number, powers: readonly Float64Array[]): number {
    if (this.#next + HEAD + 3 * SAMPLES > this.#numbers.length) {
      this.#next = this.from;
      this.edition++;
    }
    const at = this.#next;
    this.#numbers[at] = middle;
    this.#numbers[at + 1] = 1 / half;
    this.#integers[2 * (at + 2)] = degree;
    this.#next += HEAD;
    for (let power = degree; power >= 0; power--) for (const list of powers) this.#numbers[this.#next++] = list[power]!;
    return 8 * at;
  }
}

/** What q, w and w′ are measured against: they are right relative to their peaks, not to their tails. */
export const scalesOf = ({ peak, timeScale, finalCharge }: Waveform): readonly [number, number, number] => [
  Math.max(Math.abs(finalCharge), peak * timeScale),
  peak,
  peak / timeScale,
];

/**
 * A waveform in polynomials, made when they are asked for. Windows lie between kinks and seams, are powers of 2 of the time scale
 * wide and begin at multiples of half their width, so that any stretch of half a window lies in one of them. Which one
 * is taken, and what is in it, depends on the waveform and the stretch alone.
 */
export class Windows {
  readonly #starts: readonly number[];
  /** by stretch between seams, then by width and place; null where the waveform is not resolved */
  readonly #made: Map<number, Window | null>[];
  readonly #scales: readonly [number, number, number];
  #edition = 0;

  constructor(
    readonly waveform: Waveform,
    readonly shelf: Shelf,
  ) {
    this.#starts = [...new Set([0, ...waveform.kinks, ...waveform.seams])].sort((a, b) => a - b);
    this.#made = this.#starts.map(() => new Map());
    this.#scales = scalesOf(waveform);
  }

  /**
   * The window about source times from `lowest` to `highest`, between which no kink or seam lies but for rounding.
   * @returns undefined where the waveform must be asked itself: about the start of a broken power of time
   */
  about(lowest: number, highest: number): Window | undefined {
    if (this.#edition !== this.shelf.edition) {
      for (const made of this.#made) made.clear();
      this.#edition = this.shelf.edition;
    }
    const n = Math.max(0, firstAfter(this.#starts, (Math.max(0, lowest) + highest) / 2) - 1);
    const start = this.#starts[n]!;
    const end = this.#starts[n + 1] ?? Number.POSITIVE_INFINITY;
    const from = Math.max(lowest, start);
    const needed = 2 * (Math.min(highest, end) - from);
    const unit = NARROW * this.waveform.timeScale;
    const wanted = Math.max(needed, LATE * (from - start));
    let width = unit;
    let level = 0;
    while (width < wanted && width < end - start) {
      width *= 2;
      level++;
    }
    for (const lowestLevel = level - HALVINGS; level >= lowestLevel && width >= needed; level--) {
      // Small integers, which maps find fastest: the index is below 2 / LATE · 2^HALVINGS, the level from −HALVINGS to 47.
      const index = Math.floor((2 * (from - start)) / width) | 0;
      const key = (index * 64 + level + HALVINGS) | 0;
      const made = this.#made[n]!;
      let window = made.get(key);
      if (window === undefined) {
        const low = start + (index * width) / 2;
        window = this.#make(low, Math.min(low + width, end));
        made.set(key, window);
      }
      if (window) return window;
      width /= 2;
    }
    return undefined;
  }

  #make(low: number, high: number): Window | null {
    const middle = (low + high) / 2;
    const half = (high - low) / 2;
    let bend = 0;
    for (let m = 0; m < SAMPLES; m++) {
      this.waveform.at(middle + half * NODES[m]!, 3, sample);
      for (let kind = 0; kind < 3; kind++) samples[kind]![m] = sample[kind]!;
      bend = Math.max(bend, Math.abs(sample[3]!));
    }
    const degrees = samples.map((values, kind) => {
      chebyshev(values, coefficients[kind]!);
      return lastAbove(coefficients[kind]!, DROPPED * this.#scales[kind]!);
    });
    if (degrees.some((degree) => degree >= SAMPLES - SPENT)) return null;
    const [charge, current, slope] = coefficients.map((list, kind) => inPowers(list, degrees[kind]!));
    return { address: this.shelf.put(middle, half, Math.max(...degrees), [current!, slope!, charge!]), bend };
  }
}

const sample = new Float64Array(4);
const samples = [0, 1, 2].map(() => new Float64Array(SAMPLES));
const coefficients = [0, 1, 2].map(() => new Float64Array(SAMPLES));

/** Zeros of T₂₄, and T_k at them: COSINES[k·24 + m]. */
const NODES = Float64Array.from({ length: SAMPLES }, (_, m) => cos((Math.PI * (m + 0.5)) / SAMPLES));
const COSINES = Float64Array.from({ length: SAMPLES * SAMPLES }, (_, n) => {
  const [k, m] = [Math.floor(n / SAMPLES), n % SAMPLES];
  return cos((Math.PI * ((k * (2 * m + 1)) % (4 * SAMPLES))) / (2 * SAMPLES));
});

/** c_k = (2 − δ_k0)/n Σ f(x_m) T_k(x_m) (Trefethen, Approximation Theory and Approximation Practice, 2013, ch. 3–4, from memory). */
function chebyshev(values: Float64Array, out: Float64Array): void {
  for (let k = 0; k < SAMPLES; k++) {
    let sum = 0;
    for (let m = 0; m < SAMPLES; m++) sum += values[m]! * COSINES[k * SAMPLES + m]!;
    out[k] = ((k === 0 ? 1 : 2) / SAMPLES) * sum;
  }
}

/** The last index of a number above `limit`; 0 if there is none. */
function lastAbove(list: Float64Array, limit: number): number {
  let last = list.length - 1;
  // A number that is not one counts as above.
  while (last > 0 && Math.abs(list[last]!) <= limit) last--;
  return last;
}

/**
 * Σ c_k T_k up to `degree` in ascending powers, by T_{k+1} = 2x T_k − T_{k−1}. Coefficients that come to rounding within 24
 * fall by 4 or more from one to the next, so that powers, which grow by 1 + √2, do not cancel.
 */
function inPowers(series: Float64Array, degree: number): Float64Array {
  const powers = new Float64Array(SAMPLES);
  let previous = new Float64Array(SAMPLES + 1);
  let current = new Float64Array(SAMPLES + 1);
  current[0] = 1;
  for (let k = 0; k <= degree; k++) {
    const next = new Float64Array(SAMPLES + 1);
    const gain = k === 0 ? 1 : 2;
    for (let power = 0; power <= k; power++) {
      powers[power]! += series[k]! * current[power]!;
      next[power + 1] = gain * current[power]!;
    }
    for (let power = 0; power < k; power++) next[power]! -= previous[power]!;
    previous = current;
    current = next;
  }
  return powers;
}

/** The index of the first of ascending numbers that is above x. */
export function firstAfter(list: readonly number[], x: number): number {
  let low = 0;
  let high = list.length;
  while (low < high) {
    const middle = (low + high) >> 1;
    if (list[middle]! > x) high = middle;
    else low = middle + 1;
  }
  return low;
}
