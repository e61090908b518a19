import type { GridProblem, SampleGroup } from './problem.ts';

/** Kept instants of a group: steps n with (steps − 1 − n) a multiple of `every`, so that the last step is among them. */
export function keptCount(group: SampleGroup, steps: number): number {
  return Math.floor((steps - 1) / group.every) + 1;
}

/** Number m of the kept instant of step n, or −1 when the group does not keep it. */
export function keptIndex(group: SampleGroup, steps: number, step: number): number {
  const before = steps - 1 - step;
  return before % group.every === 0 ? keptCount(group, steps) - 1 - before / group.every : -1;
}

/** Which instants a group keeps: `count` of the run's `steps`. */
interface Kept {
  readonly count: number;
  readonly every: number;
  readonly steps: number;
}

/**
 * What is needed to turn a group's raw samples into its result; structured-cloneable, and shared between threads, which
 * each take a share of the points.
 */
export interface Collection extends Kept {
  /** values[(point·6 + component)·count + m], V/m and A/m */
  readonly values: Float64Array;
  /** the point of each raw sample, which come in row order */
  readonly order: Uint32Array;
  /** factors of the six components: E_a = (e_a − bias)/d_a, H_a = (h_a − bias)/(η d_a) */
  readonly units: readonly number[];
  readonly bias: number;
  /** the kernel's buffer: kept instants of a batch, by raw samples, by components */
  readonly buffer: number;
}

/** @param shared whether several threads will write the values */
export function collectionOf(
  problem: GridProblem,
  group: SampleGroup,
  order: Uint32Array,
  bias: number,
  buffer: number,
  shared: boolean,
): Collection {
  const count = keptCount(group, problem.steps);
  const length = order.length * 6 * count;
  const units = [0, 1, 2, 3, 4, 5].map((c) => 1 / (problem.cellSize[c % 3]! * (c < 3 ? 1 : problem.medium.impedance)));
  const values = shared ? new Float64Array(new SharedArrayBuffer(8 * length)) : new Float64Array(length);
  return { values, count, every: group.every, steps: problem.steps, order, units, bias, buffer };
}

/** Takes what steps [first, first + steps) have left in the kernel's buffer: this thread's share of the points. */
export function collect(
  collection: Collection,
  reals: Float32Array | Float64Array,
  first: number,
  steps: number,
  thread: number,
  threads: number,
): void {
  const { values, count, order, units, bias, buffer } = collection;
  const [from, to] = keptBetween(collection, first, steps);
  const perInstant = order.length * 6;
  const start = buffer / reals.BYTES_PER_ELEMENT;
  const last = Math.floor((order.length * (thread + 1)) / threads);
  for (let r = Math.floor((order.length * thread) / threads); r < last; r++)
    for (let c = 0; c < 6; c++) {
      const line = (order[r]! * 6 + c) * count;
      const unit = units[c]!;
      let raw = start + r * 6 + c;
      for (let m = from; m < to; m++, raw += perInstant) values[line + m] = (reals[raw]! - bias) * unit;
    }
}

/** Numbers of the kept instants among steps [first, first + steps): from, and to, not included. */
export function keptBetween(kept: Kept, first: number, steps: number): [number, number] {
  // Kept steps lie a multiple of `every` before the last one.
  const before = (step: number) => Math.max(0, kept.count - Math.ceil((kept.steps - step) / kept.every));
  return [before(first), before(first + steps)];
}

/** Holds instant m − 1 at instant m and all that follow. */
export function holdFrom({ values, count }: Collection, m: number): void {
  if (m === 0 || m === count) return;
  for (let line = 0; line < values.length; line += count) values.fill(values[line + m - 1]!, line + m, line + count);
}

/** So many points of a group are looked at when it is asked whether the field still moves. */
const WATCHED = 4096;

/** Watches how much a group's field still moves. */
export class Watch {
  private readonly collection: Collection;
  private readonly stride: number;
  /** largest |E|² and |H|² so far at each watched point */
  private readonly peaks: Float64Array;

  constructor(collection: Collection) {
    this.collection = collection;
    const points = collection.order.length;
    this.stride = Math.max(1, Math.ceil(points / WATCHED));
    this.peaks = new Float64Array(2 * Math.ceil(points / this.stride));
  }

  /**
   * How restless the field was while steps [first, first + steps) were marched: the largest change of a point's E (or H)
   * vector since the instant before them, relative to the largest |E| (or |H|) of that point so far.
   */
  restlessness(first: number, steps: number): number {
    const { values, count } = this.collection;
    const [from, to] = keptBetween(this.collection, first, steps);
    // A group that keeps nothing in these steps is judged by its last two instants.
    const since = Math.max(0, Math.min(from - 1, to - 2));
    let worst = 0;
    for (let w = 0; w < this.peaks.length; w++) {
      const point = (w >> 1) * this.stride;
      const line = (point * 6 + (w & 1) * 3) * count;
      let moved = 0;
      for (let m = since; m < to; m++) {
        let square = 0;
        let change = 0;
        for (let c = 0; c < 3; c++) {
          const v = values[line + c * count + m]!;
          const d = v - values[line + c * count + to - 1]!;
          square += v * v;
          change += d * d;
        }
        this.peaks[w] = Math.max(this.peaks[w]!, square);
        moved = Math.max(moved, change);
      }
      if (this.peaks[w]! > 0) worst = Math.max(worst, moved / this.peaks[w]!);
    }
    return Math.sqrt(worst);
  }
}
