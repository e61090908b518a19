import { bandOf } from '../../compare/band.ts';
import { type FeatureSelective, featureSelective } from '../../compare/featureSelective.ts';
import type { Field } from '../../compare/fields.ts';
import type { JudgedField, JudgedObserver, Judgement } from '../../compare/judgeResult.ts';
import { observerErrors } from '../../compare/observer.ts';
import { pointError, pointStatus } from '../../compare/pointError.ts';
import { type ObserverFieldResult, observerFieldResult, orNull } from '../../compare/result.ts';
import { type Spectra, spectraOf } from '../../compare/spectrum.ts';
import { distanceToSources, lastArrival } from '../../scenario/distance.ts';
import type { Scenario, Vec3 } from '../../scenario/model.ts';
import { observerCell, timeStepOf } from '../../scenario/sites.ts';
import { COMPONENTS, type Component, type FieldHistory, type Trace } from '../../trace/trace.ts';
import { ACTIVE, NO_RELATIVE_ERROR } from '../conclude.ts';
import { VANISHES } from '../levels.ts';
import { boundaryErrors, isPredictable, predictWalls } from '../predict.ts';
import { ownWall } from '../remedy.ts';
import { VERSION } from '../version.ts';
import { ExactInTime, exactAtTraces, type PlaceField } from './exactTraces.ts';
import { explain } from './explain.ts';
import { type Given, leastOf, Refit } from './refit.ts';
import { type FieldTraces, groupTraces, middleOf, nearestCell, yeeCellOf } from './sampled.ts';
import { type NotPredicted, type SoundError, SoundErrors, soundAt } from './sound.ts';
import { sentencesOf } from './words.ts';

/** A trace as it was judged, with what it was held against. */
export interface JudgedTrace {
  readonly observer: string;
  readonly component: Component;
  readonly at: Vec3;
  readonly time: Float64Array;
  readonly given: Float64Array;
  readonly exact: Float64Array;
  /** what a sound Yee grid would add to the exact field; null where it is not predicted */
  readonly sound: Float64Array | null;
}

/** A judgement with the signals behind it. */
export interface Judged {
  readonly result: Judgement;
  readonly traces: readonly JudgedTrace[];
  readonly spectra: readonly { readonly observer: string; readonly field: Field; readonly spectra: Spectra }[];
}

/** Near a null of E or H its own size is no measure: below this share of the field’s strength that share is taken. */
const WEAK = 0.1;

/** One field at one observer: what was given, what is exact, and the figures of both. */
interface Assessed {
  readonly group: FieldTraces;
  readonly given: FieldHistory;
  readonly exact: FieldHistory;
  readonly result: ObserverFieldResult;
  readonly judged: JudgedField;
  /** root of Σ over instants and given components of exact² */
  readonly own: number;
  /** the same, or a share of the field’s strength where E or H is nearly zero beside the other */
  readonly strength: number;
  readonly sound: readonly (Float64Array | null)[];
}

/** More instants than this are not validated by features: the sums grow with their square. */
const MOST_FEATURES = 8192;

/**
 * Traces of any solver against the exact field at their own places and instants: figures, what a sound Yee grid would
 * show, and which fault would make them so.
 * @param scenario whose grid is the Yee grid that predictions are for
 * @param json the same as JSON.parse made it
 * @param onProgress from 0 to 1
 * @throws RangeError where traces cannot be judged: on a source, or instants of components apart
 */
export function judgeTraces(
  scenario: Scenario,
  json: unknown,
  traces: readonly Trace[],
  file: string,
  notes: readonly string[],
  onProgress: (stage: string, fraction: number) => void,
): Judged {
  const started = performance.now();
  const groups = groupTraces(traces);
  const end = Math.max(...groups.map(({ time }) => time.at(-1)!));
  const sound = new SoundErrors(scenario, end);
  const observers = [...new Set(groups.map(({ observer }) => observer))];
  const assessed: Assessed[] = [];
  const results = observers.map((observer, n) => {
    onProgress('the exact field at the traces', (0.3 * n) / observers.length);
    const own = groups.filter((group) => group.observer === observer);
    const { result, parts } = assessObserver(scenario, own, sound);
    assessed.push(...parts);
    return result;
  });
  onProgress('likely causes', 0.3);
  const refit = new Refit(
    scenario,
    assessed.flatMap(({ group }) => givenOf(group, groups, scenario)),
    assessed.flatMap((one) => one.group.components.map(() => comparable(one.group, one))),
    assessed.length,
    sound,
  );
  const predicted = assessed.every(
    ({ result, judged }) => result.relativeL2 === null || judged.sound.relativeL2 !== null,
  );
  const causes = explain(refit, json, predicted, (fraction) => onProgress('likely causes', 0.3 + 0.7 * fraction));
  const errors = assessed.flatMap(({ result }) => result.relativeL2 ?? []);
  const error = errors.length > 0 ? Math.sqrt(errors.reduce((sum, e) => sum + e * e, 0) / errors.length) : null;
  const uneven = groups.filter(({ evenness }) => evenness === 'uneven');
  const partial = {
    title: scenario.title,
    version: VERSION,
    tolerance: scenario.tolerance,
    traces: { file, count: traces.length, error },
    observers: results,
    sound: {
      cellSize: scenario.grid.cellSize,
      timeStep: timeStepOf(scenario.grid, scenario.medium),
      walls: wallShareOf(scenario) !== null,
    },
    causes,
  };
  const result: Judgement = {
    ...partial,
    ...sentencesOf(partial),
    timings: { seconds: (performance.now() - started) / 1000 },
    environment: {},
    notes: [
      ...notes,
      ...uneven.map(
        ({ observer, field }) =>
          `${field} at observer “${observer}”: instants are not evenly spaced; norms are by the trapezoidal rule, and shift, rise time, band and features are not measured.`,
      ),
      ...scenario.notes,
    ],
    scenario: json,
  };
  return {
    result,
    traces: assessed.flatMap(tracesOf),
    spectra: assessed
      .filter(({ group }) => group.evenness !== 'uneven')
      .map(({ group, given, exact }) => ({
        observer: group.observer,
        field: group.field,
        spectra: spectraOf(given, exact, group.field, 0),
      })),
  };
}

function tracesOf({ group, given, exact, sound }: Assessed): JudgedTrace[] {
  const count = group.time.length;
  return group.components.map((c, n) => ({
    observer: group.observer,
    component: COMPONENTS[c]!,
    at: group.places[n]!,
    time: group.time,
    given: given.values.slice(c * count, (c + 1) * count),
    exact: exact.values.slice(c * count, (c + 1) * count),
    sound: sound[n]!,
  }));
}

/** The traces of a group for refitting, each with the Yee cell that its observer reads. */
function givenOf(group: FieldTraces, all: readonly FieldTraces[], { grid }: Scenario): Given[] {
  const cell = cellOf(
    grid,
    all.filter(({ observer }) => observer === group.observer),
  );
  return group.components.map((component, n) => ({
    group,
    component,
    place: group.places[n]!,
    values: group.values[n]!,
    cell,
  }));
}

const cellOf = (grid: Scenario['grid'], own: readonly FieldTraces[]) =>
  yeeCellOf(grid, own) ?? nearestCell(grid, middleOf(own));

/**
 * The strength that residuals of a group are told by: the weaker of trace and field, so that a field lost by a slip of units
 * is told from one lost by another; near a null of the field, its strength beside the other one.
 */
function comparable({ values }: FieldTraces, { own, strength }: Pick<Assessed, 'own' | 'strength'>): number {
  const given = Math.sqrt(values.reduce((sum, list) => sum + list.reduce((s, v) => s + v * v, 0), 0));
  if (given === 0 || strength === 0) return Math.max(given, strength);
  return own < strength ? strength : Math.min(given, strength);
}

function assessObserver(
  scenario: Scenario,
  own: readonly FieldTraces[],
  sound: SoundErrors,
): { result: JudgedObserver; parts: readonly Assessed[] } {
  const { sources, medium, grid } = scenario;
  const yee = yeeCellOf(grid, own);
  const cell = yee ?? nearestCell(grid, middleOf(own));
  const centre = ([0, 1, 2] as const).map(
    (a) => grid.box.from[a] + (cell[a] + 0.5) * grid.cellSize[a],
  ) as unknown as Vec3;
  const place = yee ? centre : middleOf(own);
  const arrival = lastArrival(sources, medium, place, ACTIVE);
  const prediction = sound.at(cell);
  const inside = place.every((x, a) => x >= grid.box.from[a]! && x <= grid.box.to[a]!);
  const walls = inside && !('reason' in prediction) ? (wallShareOf(scenario)?.(cell) ?? null) : null;
  const parts = own.map((group) => assess(scenario, group, arrival, prediction, walls));
  const of = (field: Field) => parts.find(({ group }) => group.field === field);
  const name = own[0]!.observer;
  const asked = scenario.observers.find((o) => o.name === name);
  const node = (index: readonly number[]) =>
    ([0, 1, 2] as const).map((a) => grid.box.from[a] + index[a]! * grid.cellSize[a]) as unknown as Vec3;
  return {
    parts,
    result: {
      name,
      at: asked?.at ?? place,
      snapped: node(yee ?? (inside ? observerCell(grid, place) : cell)),
      sites: Object.fromEntries(
        own.flatMap(({ components, places }) => components.map((c, n) => [COMPONENTS[c]!, places[n]!])),
      ),
      inside,
      distance: distanceToSources(sources, place),
      E: of('E')?.result ?? null,
      H: of('H')?.result ?? null,
      budget: null,
      extrapolated: null,
      judged: { E: of('E')?.judged ?? null, H: of('H')?.judged ?? null },
    },
  };
}

/** A field at one point whose components are those that were given; the others are zero in both. */
function historyOf({ components, places, time }: FieldTraces, values: readonly Float64Array[]): FieldHistory {
  const count = time.length;
  const position = new Float64Array(18);
  for (let c = 0; c < 6; c++) position.set(places[components.indexOf(c)] ?? places[0]!, 3 * c);
  const all = new Float64Array(6 * count);
  components.forEach((c, n) => {
    all.set(values[n]!, c * count);
  });
  return {
    points: { count: 1, cell: new Int32Array(3), position },
    instants: { count, E: time, H: time },
    values: all,
  };
}

/** Root mean square over instants of the vector that the given components make, and of the other field at one place. */
function strengths({ field, components, time }: FieldTraces, exact: readonly PlaceField[], impedance: number) {
  const square = (list: Float64Array) => list.reduce((sum, v) => sum + v * v, 0) / time.length;
  const own = Math.sqrt(components.reduce((sum, c, n) => sum + square(exact[n]!.values[c]!), 0));
  const other = field === 'E' ? [3, 4, 5] : [0, 1, 2];
  const beside = Math.sqrt(other.reduce((sum, c) => sum + square(exact[0]!.values[c]!), 0));
  return { own, field: Math.max(own, field === 'E' ? impedance * beside : beside / impedance) };
}

function assess(
  scenario: Scenario,
  group: FieldTraces,
  arrival: number,
  prediction: SoundError | NotPredicted,
  walls: number | null,
): Assessed {
  const { field, components, time, evenness, values } = group;
  const { medium, tolerance } = scenario;
  const places = exactAtTraces(scenario, group);
  const own = components.map((c, n) => places[n]!.values[c]!);
  const given = historyOf(group, values);
  const exact = historyOf(group, own);
  const bound = Math.sqrt(components.reduce((sum, c, n) => sum + places[n]!.errorBound[c]! ** 2, 0));
  const levels = { rounding: none, truncation: none, gridded: none, computed: none, exact: () => bound };
  const strength = strengths(group, places, medium.impedance);
  const vanishes = strength.own <= VANISHES * strength.field;

  const found = observerErrors(given, exact, field, 0, arrival);
  const even = evenness !== 'uneven';
  const root = trapezoid(time).map(Math.sqrt);
  const weighted = (history: FieldHistory): FieldHistory =>
    even ? history : { ...history, values: history.values.map((v, n) => v * root[n % time.length]!) };
  const band = even
    ? bandOf(given, exact, field, 0, bound, tolerance)
    : {
        lowEnd: 2 / (time.at(-1)! - time[0]!),
        bands: [],
        limit: { status: 'unmeasured' as const, reason: 'instants are not evenly spaced' },
      };
  const errors = even
    ? found
    : {
        ...found,
        ...uneven(weighted(given), weighted(exact), field),
        riseTimeError: Number.NaN,
        timeShift: Number.NaN,
        amplitudeRatio: Number.NaN,
      };
  const measured = observerFieldResult(errors, pointStatus(exact, field, 0, arrival, levels), band);
  const result = vanishes ? { ...measured, ...NO_RELATIVE_ERROR } : measured;

  const sound = components.map((c) => ('reason' in prediction ? null : soundAt(prediction, c, time, (t) => t)));
  const amplitude = strength.own * Math.sqrt(time.length);
  const predicted =
    vanishes || 'reason' in prediction
      ? null
      : Math.sqrt(sound.reduce((sum, list) => sum + list!.reduce((s, v) => s + v * v, 0), 0)) / amplitude;
  const expected = predicted === null ? null : Math.sqrt(predicted * predicted + (walls ?? 0) ** 2);
  const dominant = components.indexOf(COMPONENTS.indexOf(result.component));
  const features: FeatureSelective | null =
    even && time.length >= 16 && time.length <= MOST_FEATURES && !vanishes
      ? featureSelective(values[dominant]!, own[dominant]!, result.component)
      : null;
  return {
    group,
    given,
    exact,
    result,
    own: amplitude,
    strength: Math.max(strength.own, WEAK * strength.field) * Math.sqrt(time.length),
    sound,
    judged: {
      components: components.map((c) => COMPONENTS[c]!),
      samples: time.length,
      instants: evenness,
      exactError: strength.field > 0 ? bound / strength.field : null,
      fitted: vanishes ? null : fittedTo(scenario, group, amplitude),
      sound: {
        relativeL2: orNull(expected ?? Number.NaN),
        ratio: expected === null || result.relativeL2 === null ? null : orNull(result.relativeL2 / expected),
        reason: vanishes ? 'is not told where the field vanishes' : 'reason' in prediction ? prediction.reason : null,
      },
      featureSelective: features,
    },
  };
}

const none = () => 0;

/** Relative L2 where samples carry weights. */
const uneven = (given: FieldHistory, exact: FieldHistory, field: Field) => ({
  relativeL2: pointError(given, exact, exact, field, 0),
  transient: Number.NaN,
  staticResidue: Number.NaN,
});

/** Weights of the trapezoidal rule, s. */
function trapezoid(time: Float64Array): Float64Array {
  const last = time.length - 1;
  return time.map((_, n) => (time[Math.min(n + 1, last)]! - time[Math.max(n - 1, 0)]!) / 2);
}

/** The offset and the scale with which a field's traces fit best; both are shown beside the raw figures, never instead. */
function fittedTo(scenario: Scenario, group: FieldTraces, amplitude: number): JudgedField['fitted'] {
  const { places, components, time, values } = group;
  const end = time.at(-1)!;
  const exact = new ExactInTime(scenario, places, 1.5 * end);
  const at = (by: number) => {
    let cross = 0;
    let square = 0;
    const shifted = components.map((c, n) => exact.at(n, c, time, (t) => t - by));
    shifted.forEach((x, n) => {
      x.forEach((v, m) => {
        cross += v * values[n]![m]!;
        square += v * v;
      });
    });
    const scale = square > 0 ? cross / square : 0;
    let rest = 0;
    shifted.forEach((x, n) => {
      x.forEach((v, m) => {
        rest += (values[n]![m]! - scale * v) ** 2;
      });
    });
    return { scale, rest };
  };
  const width = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale));
  const reach = Math.min(0.5 * end, 20 * width);
  const count = Math.max(1, Math.ceil(reach / (0.5 * width)));
  const scan = Array.from({ length: 2 * count + 1 }, (_, n) => ((n - count) * reach) / count);
  const { x } = leastOf((by) => at(by).rest, scan, 32);
  const { scale, rest } = at(x);
  const relativeL2 = Math.sqrt(rest) / amplitude;
  return Number.isFinite(relativeL2) ? { timeOffset: x, scale, relativeL2 } : null;
}

/** What the scenario's walls are predicted to add at a cell, a share of the field; null where they are not predictable. */
function wallShareOf(scenario: Scenario): ((cell: readonly [number, number, number]) => number | null) | null {
  const wall = ownWall(scenario);
  if (!wall || !isPredictable(wall)) return null;
  return (cell) => {
    try {
      const [errors] = predictWalls(scenario, { cells: Int32Array.from(cell), band: null });
      const share = boundaryErrors(errors!, wall)[0]!;
      return Number.isFinite(share) ? share : null;
    } catch (error) {
      if (error instanceof RangeError) return null;
      throw error;
    }
  };
}
