import { fieldOf } from '../../retarded/field.ts';
import { exactHistory } from '../../retarded/history.ts';
import { prepareSources } from '../../retarded/prepare.ts';
import { lastArrival } from '../../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../../scenario/model.ts';
import type { FieldTraces } from './sampled.ts';

/** What the exact field is of. */
export interface Emitters {
  readonly sources: readonly Source[];
  readonly medium: Medium;
}

/** The six components at one place: V/m and A/m, one value an instant. */
export interface PlaceField {
  readonly values: readonly Float64Array[];
  /** bound of the error of each component */
  readonly errorBound: readonly number[];
}

/** Histories are made of waveforms sampled at the trace's own step; beyond this many time scales that tells nothing. */
const COARSEST = 1;

/** The six components at places, all at one place each, at one list of even instants. */
function evenField({ sources, medium }: Emitters, places: readonly Vec3[], time: Float64Array): PlaceField[] {
  const position = Float64Array.from(places.flatMap((at) => [0, 1, 2, 3, 4, 5].flatMap(() => at)));
  const points = { count: places.length, cell: new Int32Array(3 * places.length), position };
  const count = time.length;
  const { values, errorBound } = exactHistory(sources, medium, points, { count, E: time, H: time });
  return places.map((_, p) => ({
    values: [0, 1, 2, 3, 4, 5].map((c) => values.subarray((6 * p + c) * count, (6 * p + c + 1) * count)),
    errorBound: [...errorBound.subarray(6 * p, 6 * p + 6)],
  }));
}

/**
 * The exact field at the traces' own places and instants: nothing of anyone's is interpolated.
 * @returns one a component of the traces
 * @throws RangeError naming the source that a place lies on
 */
export function exactAtTraces(emitters: Emitters, { places, time, step, evenness }: FieldTraces): PlaceField[] {
  const scale = Math.min(...emitters.sources.map(({ waveform }) => waveform.timeScale));
  if (evenness === 'even' && step <= COARSEST * scale) return evenField(emitters, places, time);
  const at = fieldOf(prepareSources(emitters.sources, emitters.medium, 'best'), { potentials: false });
  return places.map((place) => {
    const values = Array.from({ length: 6 }, () => new Float64Array(time.length));
    let errorE = 0;
    let errorH = 0;
    time.forEach((t, n) => {
      const found = at(place, t);
      [...found.E, ...found.H].forEach((v, c) => {
        values[c]![n] = v;
      });
      errorE = Math.max(errorE, found.errorE);
      errorH = Math.max(errorH, found.errorH);
    });
    return { values, errorBound: [errorE, errorE, errorE, errorH, errorH, errorH] };
  });
}

/** Samples of the pulse's time scale: an 8-point rule between them leaves 10⁻⁷ of the field of a smooth pulse. */
const A_SCALE = 10;

/** What still radiates at the end of a resampled history, relative to its peak. */
const SPENT = 1e-7;

const MOST_SAMPLES = 60_000;

/**
 * The exact field at places as a function of time, for refitting: sampled finely once, then read between samples. It is
 * our own smooth field that is interpolated here, by an 8-point Lagrange rule, never anyone's trace.
 */
export class ExactInTime {
  readonly #fields: readonly PlaceField[];
  readonly #start: number;
  readonly #step: number;

  /** @throws RangeError naming the source that a place lies on */
  constructor(emitters: Emitters, places: readonly Vec3[], end: number) {
    const { sources, medium } = emitters;
    const scale = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
    const spent = Math.max(...places.map((at) => lastArrival(sources, medium, at, SPENT)));
    const last = Math.max(0, Math.min(end, spent)) + 8 * scale;
    this.#step = Math.max(scale / A_SCALE, last / MOST_SAMPLES);
    this.#start = -8 * this.#step;
    const count = Math.ceil((last - this.#start) / this.#step) + 8;
    const time = Float64Array.from({ length: count }, (_, n) => this.#start + n * this.#step);
    this.#fields = evenField(emitters, places, time);
  }

  /** A component at place n, at instants `of(t)`; zero before the start, unchanging after the end. */
  at(place: number, component: number, time: Float64Array, of: (t: number) => number): Float64Array {
    const samples = this.#fields[place]!.values[component]!;
    return time.map((t) => sampleAt(samples, (of(t) - this.#start) / this.#step));
  }
}

/** 1/Π_{k≠m} (m − k) for the 8-point Lagrange rule. */
const WEIGHTS = Float64Array.from({ length: 8 }, (_, m) => {
  let product = 1;
  for (let k = 0; k < 8; k++) if (k !== m) product *= m - k;
  return 1 / product;
});

/** Even samples read at a place between them, in samples: zero before them, their last value after them. */
export function sampleAt(samples: Float64Array, place: number): number {
  const count = samples.length;
  if (!(place >= 0)) return 0;
  if (place >= count - 1) return samples[count - 1]!;
  const first = Math.min(Math.max(Math.floor(place) - 3, 0), count - 8);
  const u = place - first;
  if (Number.isInteger(u)) return samples[first + u]!;
  let product = 1;
  for (let k = 0; k < 8; k++) product *= u - k;
  let sum = 0;
  for (let m = 0; m < 8; m++) sum += (samples[first + m]! * WEIGHTS[m]!) / (u - m);
  return product * sum;
}
