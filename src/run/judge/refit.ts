import type { Axis, Medium, Scenario, Source, Vec3 } from '../../scenario/model.ts';
import { type Emitters, ExactInTime } from './exactTraces.ts';
import { type FieldTraces, nearestCell } from './sampled.ts';
import { type SoundErrors, soundAt } from './sound.ts';

/**
 * One signal a trace, in the order of the traces: what was given, what is exact, what a fault would make of it. All norms
 * are Σ w |·|², w one over the strength of the field at that observer, so that every field at every observer counts alike.
 */
export type Signals = readonly Float64Array[];

/** One trace among all that are judged together. */
export interface Given {
  readonly group: FieldTraces;
  /** index into COMPONENTS */
  readonly component: number;
  readonly place: Vec3;
  readonly values: Float64Array;
  /** the Yee cell whose sound error is held against it */
  readonly cell: readonly [number, number, number];
}

/** The field that sources make at chosen places, for reading any component at any instants. */
export class Arrangement {
  readonly #exact: ExactInTime;

  /** @throws RangeError where a place lies on a source */
  constructor(
    readonly given: readonly Given[],
    places: readonly Vec3[],
    emitters: Emitters,
    end: number,
    readonly sound: SoundErrors | null,
    readonly cells: readonly (readonly [number, number, number])[],
  ) {
    this.#exact = new ExactInTime(emitters, places, end);
  }

  /**
   * @param of what instant is read for t
   * @param component which component is read for a trace
   * @param withSound with what a sound grid adds
   */
  signals(of: (t: number, trace: number) => number, component: (trace: number) => number, withSound: boolean): Signals {
    return this.given.map(({ group }, k) => {
      const c = component(k);
      const exact = this.#exact.at(k, c, group.time, (t) => of(t, k));
      const sound = withSound ? this.sound?.at(this.cells[k]!) : undefined;
      if (!sound || 'reason' in sound) return exact;
      const added = soundAt(sound, c, group.time, (t) => of(t, k));
      return exact.map((v, n) => v + added[n]!);
    });
  }
}

/** Everything that refitting starts from. */
export class Refit {
  readonly scenario: Scenario;
  readonly given: readonly Given[];
  readonly sound: SoundErrors | null;
  readonly end: number;
  /** 1/strength² of each trace's field, over the number of fields */
  readonly weight: readonly number[];
  /** the exact field as the scenario has it, and where it is predicted, what a sound grid makes of it */
  readonly bases: readonly Signals[];
  readonly plain: Arrangement;

  constructor(
    scenario: Scenario,
    given: readonly Given[],
    /** strength of each trace's field, root of a sum of squares over instants */
    strength: readonly number[],
    fields: number,
    sound: SoundErrors | null,
  ) {
    this.scenario = scenario;
    this.given = given;
    this.sound = sound;
    this.end = Math.max(...given.map(({ group }) => group.time.at(-1)!));
    this.weight = strength.map((s) => (s > 0 ? 1 / (s * s * fields) : 0));
    this.plain = this.arrangement(this.places());
    const read = (withSound: boolean) => this.plain.signals((t) => t, this.own, withSound);
    const predicted = given.some(({ cell }) => sound && !('reason' in sound.at(cell)));
    this.bases = predicted ? [read(false), read(true)] : [read(false)];
  }

  readonly own = (trace: number): number => this.given[trace]!.component;

  places(): readonly Vec3[] {
    return this.given.map(({ place }) => place);
  }

  /** @throws RangeError where a place lies on a source */
  arrangement(places: readonly Vec3[], emitters: Emitters = this.scenario, reach = 1.5): Arrangement {
    const cells = this.given.map(({ cell, place }, k) =>
      places[k]!.every((x, a) => Math.abs(x - place[a]!) <= this.scenario.grid.cellSize[a]!)
        ? cell
        : nearestCell(this.scenario.grid, places[k]!),
    );
    return new Arrangement(this.given, places, emitters, reach * this.end, this.sound, cells);
  }

  /** Σ w |given − model|², or of two signals */
  residual(model: Signals, of: Signals = this.signals()): number {
    let sum = 0;
    of.forEach((values, k) => {
      const m = model[k]!;
      let own = 0;
      for (let n = 0; n < values.length; n++) own += (values[n]! - m[n]!) ** 2;
      sum += this.weight[k]! * own;
    });
    return sum;
  }

  /** ⟨a, b⟩ = Σ w a b over some traces */
  inner(a: Signals, b: Signals, over: (trace: number) => boolean = () => true): number {
    let sum = 0;
    a.forEach((x, k) => {
      if (!over(k)) return;
      const y = b[k]!;
      let own = 0;
      for (let n = 0; n < x.length; n++) own += x[n]! * y[n]!;
      sum += this.weight[k]! * own;
    });
    return sum;
  }

  readonly signals = (): Signals => this.given.map(({ values }) => values);
}

export const times = (signals: Signals, factor: (trace: number) => number): Signals =>
  signals.map((values, k) => {
    const f = factor(k);
    return values.map((v) => f * v);
  });

export const plus = (a: Signals, b: Signals, factor = 1): Signals =>
  a.map((values, k) => values.map((v, n) => v + factor * b[k]![n]!));

/** Places moved along an axis. */
export const moved = (places: readonly Vec3[], by: (place: number) => Vec3): Vec3[] =>
  places.map((at, k) => {
    const d = by(k);
    return [at[0] + d[0], at[1] + d[1], at[2] + d[2]];
  });

/** Coordinates in another order. */
export const permuted = (at: Vec3, order: readonly Axis[]): Vec3 => [at[order[0]!], at[order[1]!], at[order[2]!]];

/** The least of f on a range: best of a coarse scan, then golden sections around it. */
export function leastOf(
  f: (x: number) => number,
  scan: readonly number[],
  sections = 24,
): { x: number; value: number } {
  const found = scan.map(f);
  let best = 0;
  found.forEach((value, n) => {
    if (value < found[best]!) best = n;
  });
  let [low, high] = [scan[Math.max(0, best - 1)]!, scan[Math.min(scan.length - 1, best + 1)]!];
  const ratio = 0.6180339887498949;
  let x1 = high - ratio * (high - low);
  let x2 = low + ratio * (high - low);
  let f1 = f(x1);
  let f2 = f(x2);
  for (let n = 0; n < sections; n++)
    if (f1 < f2) {
      [high, x2, f2] = [x2, x1, f1];
      x1 = high - ratio * (high - low);
      f1 = f(x1);
    } else {
      [low, x1, f1] = [x1, x2, f2];
      x2 = low + ratio * (high - low);
      f2 = f(x2);
    }
  const refined = f1 < f2 ? { x: x1, value: f1 } : { x: x2, value: f2 };
  return refined.value < found[best]! ? refined : { x: scan[best]!, value: found[best]! };
}

/** Sources one by one, where there are several. */
export const oneByOne = (sources: readonly Source[], medium: Medium): Emitters[] =>
  sources.length < 2 ? [] : sources.map((source) => ({ sources: [source], medium }));
