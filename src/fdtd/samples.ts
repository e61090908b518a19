import type { Layout } from './layout.ts';
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

/** A sample in SI units from a scaled, biased field: E_a = (e_a − bias)/d_a, H_a = (h_a − bias)/(η d_a). */
function unitOf(problem: GridProblem, component: number): number {
  const length = problem.cellSize[component % 3]!;
  return component < 3 ? 1 / length : 1 / (problem.medium.impedance * length);
}

/**
 * Collects a group's samples: values[(point·6 + component)·count + m], V/m and A/m. `take` reads a batch from the
 * kernel's buffer (instants by samples in row order by six components) and tells how restless the field was.
 */
export class Collector {
  readonly values: Float64Array;
  readonly count: number;
  /** instants kept so far */
  taken = 0;
  private readonly order: Uint32Array;
  private readonly units: number[];
  private readonly bias: number;
  /** largest |E|² and |H|² seen at each point */
  private readonly peaks: Float64Array;

  constructor(problem: GridProblem, group: SampleGroup, layout: Layout, order: Uint32Array) {
    this.count = keptCount(group, problem.steps);
    this.values = new Float64Array(order.length * 6 * this.count);
    this.order = order;
    this.units = [0, 1, 2, 3, 4, 5].map((c) => unitOf(problem, c));
    this.bias = layout.bias;
    this.peaks = new Float64Array(2 * order.length);
  }

  /** Takes `instants` instants that start at index `at` of `reals`. */
  take(reals: Float32Array | Float64Array, at: number, instants: number): void {
    const { order, values, count, taken, units, bias } = this;
    const perInstant = order.length * 6;
    for (let r = 0; r < order.length; r++)
      for (let c = 0; c < 6; c++) {
        const to = (order[r]! * 6 + c) * count + taken;
        const from = at + r * 6 + c;
        for (let m = 0; m < instants; m++) values[to + m] = (reals[from + m * perInstant]! - bias) * units[c]!;
      }
    this.taken += instants;
  }

  /**
   * How much the field still moved over the last `instants` instants: the largest change of a point's E (or H) vector
   * from one of them to the newest, relative to the largest |E| (or |H|) of that point so far.
   */
  restlessness(instants: number): number {
    const { values, count, taken, peaks } = this;
    let worst = 0;
    for (let f = 0; f < peaks.length; f++) {
      const first = f * 3 * count;
      let change = 0;
      for (let m = Math.max(0, taken - instants); m < taken; m++) {
        let square = 0;
        let moved = 0;
        for (let c = 0; c < 3; c++) {
          const v = values[first + c * count + m]!;
          const d = v - values[first + c * count + taken - 1]!;
          square += v * v;
          moved += d * d;
        }
        peaks[f] = Math.max(peaks[f]!, square);
        change = Math.max(change, moved);
      }
      if (peaks[f]! > 0) worst = Math.max(worst, change / peaks[f]!);
    }
    return Math.sqrt(worst);
  }

  /** Holds the newest value at all instants that were not marched. */
  hold(): void {
    const { values, count, taken } = this;
    if (taken === 0) return;
    for (let line = 0; line < values.length; line += count)
      values.fill(values[line + taken - 1]!, line + taken, line + count);
  }
}
