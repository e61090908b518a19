import { hostName } from '#platform';
import { bandOf } from '../compare/band.ts';
import { boundaryLevel, budgetAt, budgetOf, type Histories, type Levels } from '../compare/budget.ts';
import { type Closest, closestDistance } from '../compare/closest.ts';
import { farthestDistance } from '../compare/farthest.ts';
import { FIELDS, FIRST_COMPONENT, type Field, samplesOf } from '../compare/fields.ts';
import { relativeL1, relativeL2, relativeLinf } from '../compare/norms.ts';
import { observerErrors } from '../compare/observer.ts';
import { pointErrors, pointStatus } from '../compare/pointError.ts';
import { budgetResult, normsResult, type ObserverResult, observerFieldResult, type Result } from '../compare/result.ts';
import { type Spectra, spectraOf } from '../compare/spectrum.ts';
import { verdictOf } from '../compare/verdict.ts';
import { wallClearance } from '../compare/wall.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridResult } from '../fdtd/run.ts';
import { distanceToSources, lastArrival } from '../scenario/distance.ts';
import type { Observer, Vec3 } from '../scenario/model.ts';
import { cellCentre } from '../scenario/sites.ts';
import { COMPONENTS, type FieldHistory } from '../trace/trace.ts';
import type { Answers, Asked } from './answers.ts';
import { describeBoundary, notesOf } from './describe.ts';
import { dispersionErrorAt, farthestModel } from './farthest.ts';
import { latticeCheck } from './latticeCheck.ts';
import { budgetLevels, relativeBound, vanishes, volumeLevels } from './levels.ts';
import { SEED } from './places.ts';
import { continuityResidual, residualsOf } from './residuals.ts';
import { VERSION } from './version.ts';

/** A result with the signals behind it. */
export interface Comparison {
  readonly result: Result;
  /** the fields at observers inside the box, one point an observer in their order; null without any */
  readonly signals: Histories | null;
  /** exact fields of observers outside the box */
  readonly outside: FieldHistory;
  readonly observers: readonly Observer[];
  readonly spectra: readonly { readonly observer: string; readonly field: Field; readonly spectra: Spectra }[];
}

/** Everything that a comparison is concluded from. */
export interface Case extends Asked {
  readonly answers: Answers;
  readonly threads: number;
}

/** What still radiates (1 % of the peak of w′) must have passed a point for its error to be counted. */
export const ACTIVE = 0.01;

const perField = <T>(find: (field: Field) => T): Record<Field, T> => ({ E: find('E'), H: find('H') });

/** From answers to findings. */
export function conclude(given: Case): Comparison {
  const started = performance.now();
  const { question, json, places, box, free, answers, threads } = given;
  const { scenario, steps, timeStep } = question;
  const { grid, sources, medium, tolerance } = scenario;
  const signals = signalsOf(answers);
  const levels = budgetLevels(answers, free?.floor ?? 0);
  const points = Array.from({ length: signals.exact.points.count }, (_, p) => p);

  const budget = budgetOf(signals, levels, 'E', places.budgetWeights);
  const inside = places.inside.map((observer, p) => observerInside(given, signals, levels, observer, p));
  const outside = places.outside.map((observer, p) => observerOutside(given, observer, p));
  const integralError = Math.max(0, ...points.map((p) => relativeBound(answers.exact, 'E', p, medium.impedance)));
  const trusted = trustedDistances(given);
  const verdict = verdictOf({
    tolerance,
    ...trusted,
    bands: inside.map(({ name, distance, E, H }) => ({ observer: name, distance, E: E!.band, H: H!.band })),
    budget,
    boundary: describeBoundary(scenario),
    boundaryLevel: boundaryLevel(
      signals,
      levels,
      'E',
      points.filter((p) => !vanishes(signals.exact, 'E', p, medium.impedance)),
    ),
    integralError,
  });
  const centres = points.slice(0, 3).map((p) => cellCentre(grid, places.budgetCells, p));
  const residuals = residualsOf(sources, medium, centres, steps * timeStep);

  const timing = ({ seconds, cellUpdates }: GridResult) => ({ seconds, cellUpdates });
  const integrals = [answers.exact, answers.computed, answers.gridded, answers.volumeExact, answers.outsideExact];
  const result: Result = {
    title: scenario.title,
    version: VERSION,
    tolerance,
    norms: volumeNorms(given),
    budget: budgetResult(budget),
    observers: scenario.observers.map(({ name }) => [...inside, ...outside].find((o) => o.name === name)!),
    verdict,
    checks: [latticeCheck(signals, answers.lattice, levels, places, medium.impedance)],
    integral: {
      errorEstimate: integralError,
      gaugeResidual: residuals?.gauge ?? null,
      waveResidual: residuals?.wave ?? null,
      potentialResidual: residuals?.potentials ?? null,
      continuityResidual: continuityResidual(question.gridded, steps * timeStep),
    },
    grid: {
      cells: grid.cells[0] * grid.cells[1] * grid.cells[2],
      shape: grid.cells,
      steps,
      timeStep,
      memoryBytes: Math.max(memoryNeeded(box).bytes, free?.memoryBytes ?? 0),
    },
    timings: {
      box: timing(answers.box),
      rounding: timing(answers.probe),
      free: answers.free ? timing(answers.free) : null,
      exact: { seconds: answers.exactSeconds, evaluations: integrals.reduce((sum, i) => sum + i.evaluations, 0) },
      comparison: { seconds: (performance.now() - started) / 1000 },
    },
    environment: {
      host: hostName(),
      threads,
      precision: grid.precision,
      fusedMultiplyAdd: box.fusedMultiplyAdd === true,
    },
    notes: notesOf(question, places, free, answers),
    scenario: json,
  };
  return {
    result,
    signals: places.inside.length > 0 ? signals : null,
    outside: answers.outsideExact.history,
    observers: [...places.inside, ...places.outside],
    spectra: places.inside.flatMap(({ name }, p) =>
      FIELDS.map((field) => ({ observer: name, field, spectra: spectraOf(signals.grid, signals.exact, field, p) })),
    ),
  };
}

/** The fields at the budget's points. */
function signalsOf({ box, free, exact, computed, gridded }: Answers): Histories {
  const of = ({ samples }: GridResult): FieldHistory => ({ ...exact.history, values: samples[0]! });
  return {
    grid: of(box),
    ...(free ? { free: of(free) } : {}),
    gridded: gridded.history,
    computed: computed.history,
    exact: exact.history,
  };
}

/** The fields at the volume's samples; without a free-space run the box stands for it. */
function volumeFields({ box, free, volumeExact }: Answers) {
  const of = ({ samples }: GridResult): FieldHistory => ({ ...volumeExact.history, values: samples[1]! });
  return { grid: of(box), free: of(free ?? box), exact: volumeExact.history };
}

/** Closest and farthest trusted distance and wall clearance, for E and for H. */
function trustedDistances(given: Case) {
  const { question, places, free, answers } = given;
  const { grid, sources, medium, tolerance } = question.scenario;
  const volume = volumeFields(answers);
  const levels = volumeLevels(answers, free?.floor ?? 0);
  const { distance, wallDistance, weight } = places.volume;
  const arrivals = Float64Array.from({ length: volume.exact.points.count }, (_, p) =>
    lastArrival(sources, medium, cellCentre(grid, places.volume.cell, p), ACTIVE),
  );
  const samples = (a: FieldHistory, field: Field) => {
    const { error, status } = pointErrors(a, volume.exact, volume.exact, field, arrivals, levels);
    return { error, status, weight };
  };
  const model = farthestModel(question);
  const closest = perField<Closest>((field) =>
    closestDistance({ ...samples(volume.free, field), distance }, tolerance, SEED),
  );
  return {
    closest,
    farthest: perField((field) => farthestDistance(closest[field].bins, tolerance, model)),
    wall: perField((field) => {
      const near = closest[field];
      const from = 'distance' in near ? near.distance : 0;
      return wallClearance({ ...samples(volume.grid, field), distance: wallDistance }, distance, from, tolerance);
    }),
  };
}

/** Norms over the samples of the volume outside the mask. */
function volumeNorms({ question, places, answers }: Case): Result['norms'] {
  const { grid, exact } = volumeFields(answers);
  const { distance, weight, strata } = places.volume;
  const { mask } = question.scenario.grid;
  const weights = weight.map((w, p) => (distance[p]! >= mask ? w : 0));
  const masked = weights.filter((w) => w === 0).length;
  return perField((field) =>
    normsResult(
      relativeL1(grid, exact, field, weights),
      relativeL2(grid, exact, field, weights, strata),
      relativeLinf(grid, exact, field, weights),
      masked,
    ),
  );
}

/** Figures of a field that vanishes: relative to nothing. */
export const NO_RELATIVE_ERROR = {
  status: 'below floor',
  relativeL2: null,
  transient: null,
  staticResidue: null,
  peakError: null,
  riseTimeError: null,
  timeShift: null,
  amplitudeRatio: null,
} as const;

function observerInside(
  given: Case,
  signals: Histories,
  levels: Levels,
  { name, at }: Observer,
  p: number,
): ObserverResult {
  const { grid, sources, medium, tolerance } = given.question.scenario;
  const cells = given.places.budgetCells;
  const place = cellCentre(grid, cells, p);
  const arrival = lastArrival(sources, medium, place, ACTIVE);
  const perObserver = (field: Field) => {
    const floor = levels.rounding(field, p) + levels.exact(field, p);
    const found = observerFieldResult(
      observerErrors(signals.grid, signals.exact, field, p, arrival),
      pointStatus(signals.exact, field, p, arrival, levels),
      bandOf(signals.grid, signals.exact, field, p, floor, tolerance),
    );
    return vanishes(signals.exact, field, p, medium.impedance) ? { ...found, ...NO_RELATIVE_ERROR } : found;
  };
  const { position } = signals.exact.points;
  const site = (c: number): Vec3 => {
    const first = (p * 6 + c) * 3;
    return [position[first]!, position[first + 1]!, position[first + 2]!];
  };
  return {
    name,
    at,
    snapped: nodeOf(given, cells, p),
    sites: Object.fromEntries(COMPONENTS.map((component, c) => [component, site(c)])) as ObserverResult['sites'],
    inside: true,
    distance: distanceToSources(sources, place),
    ...perField(perObserver),
    budget: vanishes(signals.exact, 'E', p, medium.impedance) ? null : budgetResult(budgetAt(signals, levels, 'E', p)),
    extrapolated: null,
  };
}

function observerOutside(given: Case, { name, at }: Observer, p: number): ObserverResult {
  const { question, places, answers } = given;
  const { from, to } = question.scenario.grid.box;
  const fromCentre: Vec3 = [
    at[0] - (from[0] + to[0]) / 2,
    at[1] - (from[1] + to[1]) / 2,
    at[2] - (from[2] + to[2]) / 2,
  ];
  const distance = distanceToSources(question.scenario.sources, at);
  const error = dispersionErrorAt(question, fromCentre, distance);
  return {
    name,
    at,
    snapped: nodeOf(given, places.outsideCells, p),
    sites: null,
    inside: false,
    distance,
    E: null,
    H: null,
    budget: null,
    extrapolated: {
      exactPeakE: peakOf(answers.outsideExact.history, 'E', p),
      exactPeakH: peakOf(answers.outsideExact.history, 'H', p),
      error: Number.isNaN(error) ? null : error,
    },
  };
}

function nodeOf({ question }: Case, cells: Int32Array, p: number): Vec3 {
  const { box, cellSize } = question.scenario.grid;
  const at = (a: 0 | 1 | 2) => box.from[a] + cells[3 * p + a]! * cellSize[a];
  return [at(0), at(1), at(2)];
}

function peakOf(history: FieldHistory, field: Field, point: number): number {
  let peak = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++)
    for (const v of samplesOf(history, point, c)) peak = Math.max(peak, Math.abs(v));
  return peak;
}
