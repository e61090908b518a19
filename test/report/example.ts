import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { bandOf } from '../../src/compare/band.ts';
import {
  boundaryLevel,
  budgetAt,
  budgetOf,
  difference,
  type Histories,
  partSignals,
} from '../../src/compare/budget.ts';
import { closestDistance } from '../../src/compare/closest.ts';
import { farthestDistance } from '../../src/compare/farthest.ts';
import { relativeL1, relativeL2, relativeLinf } from '../../src/compare/norms.ts';
import { observerErrors } from '../../src/compare/observer.ts';
import { pointStatus } from '../../src/compare/pointError.ts';
import {
  budgetResult,
  normsResult,
  type ObserverResult,
  observerFieldResult,
  type Result,
} from '../../src/compare/result.ts';
import { spectraOf } from '../../src/compare/spectrum.ts';
import { verdictOf } from '../../src/compare/verdict.ts';
import { wallClearance } from '../../src/compare/wall.ts';
import { exp, log } from '../../src/elementary/elementary.ts';
import { observerTraces } from '../../src/files/traces.ts';
import type { Report } from '../../src/report/report.ts';
import { COMPONENTS, type Component, type FieldHistory, instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { levelsOf } from '../compare/synthetic.ts';

/**
 * A report of an invented comparison: a pulse with a charge left behind at three observers, fields and errors of
 * plausible size, everything else by the functions of `compare/`.
 */
const SIGMA = 0.1e-9;
const TIME_STEP = 9.53e-12;
const CELL = 0.005;
const OBSERVERS = [
  { name: 'A', cell: [50, 34, 37], distance: 0.102 },
  { name: 'near the wall', cell: [58, 34, 36], distance: 0.142 },
  { name: 'corner', cell: [56, 56, 54], distance: 0.197 },
] as const;

const points = samplePoints(
  Int32Array.from(OBSERVERS.flatMap(({ cell }) => cell)),
  [-0.15, -0.15, -0.15],
  [CELL, CELL, CELL],
);
const instants = instantsOf(315, TIME_STEP);

/** A pulse derivative and, for E, a static remainder, at each observer with its own delay and strength. */
function pulse(lateSteps: number, factor: number): FieldHistory {
  const values = new Float64Array(points.count * 6 * instants.count);
  OBSERVERS.forEach(({ distance }, p) => {
    for (let c = 0; c < 6; c++) {
      const strength = [0.2, 0.05, 1, 0.03, 1, 0.01][c]! * (c < 3 ? 60 : 0.16) * (0.1 / distance);
      const times = c < 3 ? instants.E : instants.H;
      times.forEach((t, n) => {
        const u = (t - lateSteps * TIME_STEP - 0.9e-9 - distance / 299_792_458) / SIGMA;
        const remainder = c < 3 ? 0.12 / (1 + exp(-u)) : 0;
        values[(p * 6 + c) * instants.count + n] = factor * strength * (-u * exp(-(u * u) / 2) + remainder);
      });
    }
  });
  return { points, instants, values };
}

const plus = (a: FieldHistory, b: FieldHistory): FieldHistory => ({
  ...a,
  values: a.values.map((v, i) => v + b.values[i]!),
});

/** What the parts do: the lattice delays, gridding weakens, walls send back a later, weaker copy. */
export function historiesWith({ walls = 3e-4, lag = 0.3 } = {}): Histories {
  const exact = pulse(0, 1);
  const computed = pulse(0, 1 + 1e-8);
  const gridded = pulse(0, 0.994);
  const free = plus(gridded, difference(pulse(lag, 1.004), exact));
  const grid = plus(free, pulse(70, walls));
  return { grid, free, gridded, computed, exact };
}

function errorSamples(count: number, error: (r: number) => number, seed: number) {
  const random = xoroshiro128plus(seed);
  const [from, to] = [0.006, 0.24];
  const distance = Float64Array.from({ length: count }, (_, i) => from * exp(((i + 0.5) / count) * log(to / from)));
  return { distance, error: distance.map((r) => error(r) * (0.6 + 0.4 * uniformFloat64(random))) };
}

export interface ExampleOptions {
  readonly walls?: number;
  readonly lag?: number;
  readonly title?: string;
  readonly observer?: string;
  readonly free?: boolean;
}

export function exampleReport({
  title = 'Bench cable pulse',
  observer = 'A',
  free = true,
  ...parts
}: ExampleOptions = {}): Report {
  const { free: withoutWalls, ...others } = historiesWith(parts);
  const histories: Histories = { ...others, ...(free ? { free: withoutWalls! } : {}) };
  const { grid, exact } = histories;
  const levels = levelsOf({ rounding: 2e-5, truncation: 1e-6, gridded: 1e-6, computed: 1e-6, exact: 1e-7 });
  const tolerance = 0.05;
  const names = OBSERVERS.map(({ name }, p) => (p === 0 ? observer : name));

  const samplesE = errorSamples(1100, (r) => 0.05 * (0.028 / r) ** 2 + 0.07 * r, 1);
  const samplesH = errorSamples(1100, (r) => 0.05 * (0.02 / r) ** 2 + 0.06 * r, 2);
  const closest = {
    E: closestDistance(samplesE, tolerance, 1),
    H: closestDistance(samplesH, tolerance, 1),
  };
  const model = {
    directions: [
      { name: 'along x', level: 1, distance: 0.54 },
      { name: 'along the diagonal', level: 0.8, distance: 2.1 },
    ],
    percentile95: (r: number) => 0.075 * r,
  };
  const farthest = {
    E: farthestDistance(closest.E.bins, tolerance, model),
    H: farthestDistance(closest.H.bins, tolerance, model),
  };
  const far = samplesE.distance.map(() => 1);
  const wall = errorSamples(700, (d) => 0.02 + 0.03 * (0.012 / d) ** 1.5, 3);
  const clearance = { E: wallClearance(wall, far, 0, tolerance), H: wallClearance(wall, far, 0, tolerance) };

  const lastArrival = (p: number) => 1.8e-9 + OBSERVERS[p]!.distance / 299_792_458;
  const fields = names.map((_, p) => ({
    E: observerErrors(grid, exact, 'E', p, lastArrival(p)),
    H: observerErrors(grid, exact, 'H', p, lastArrival(p)),
  }));
  const bands = names.map((name, p) => ({
    observer: name,
    distance: OBSERVERS[p]!.distance,
    E: bandOf(grid, exact, 'E', p, 2e-5, tolerance),
    H: bandOf(grid, exact, 'H', p, 5e-8, tolerance),
  }));
  const budget = budgetOf(histories, levels, 'E');
  const verdict = verdictOf({
    tolerance,
    closest,
    farthest,
    wall: clearance,
    bands,
    budget,
    boundary: 'CPML, 10 layers',
    boundaryLevel: boundaryLevel(histories, levels, 'E', [0, 1, 2]),
    integralError: 1.3e-8,
  });

  const observers: ObserverResult[] = names.map((name, p) => {
    const site = (c: number): [number, number, number] => {
      const [x, y, z] = points.position.subarray((p * 6 + c) * 3, (p * 6 + c) * 3 + 3);
      return [x!, y!, z!];
    };
    const snapped = OBSERVERS[p]!.cell.map((i) => -0.15 + i * CELL) as unknown as [number, number, number];
    const status = (field: 'E' | 'H') => pointStatus(exact, field, p, lastArrival(p), levelsOf());
    return {
      name,
      at: snapped,
      snapped,
      sites: Object.fromEntries(COMPONENTS.map((component, c) => [component, site(c)])) as Record<
        Component,
        [number, number, number]
      >,
      inside: true,
      distance: OBSERVERS[p]!.distance,
      E: observerFieldResult(fields[p]!.E, status('E'), bands[p]!.E),
      H: observerFieldResult(fields[p]!.H, status('H'), bands[p]!.H),
      budget: budgetResult(budgetAt(histories, levels, 'E', p)),
      extrapolated: null,
    };
  });
  observers.push({
    name: 'antenna mast',
    at: [3, 0, 0],
    snapped: [3, 0, 0],
    sites: null,
    inside: false,
    distance: 2.95,
    E: null,
    H: null,
    budget: null,
    extrapolated: { exactPeakE: 2.1, exactPeakH: 0.0056, error: 0.27 },
  });

  const norms = (field: 'E' | 'H') =>
    normsResult(relativeL1(grid, exact, field), relativeL2(grid, exact, field), relativeLinf(grid, exact, field), 412);
  const result: Result = {
    title,
    version: '0.1.0',
    tolerance,
    norms: { E: norms('E'), H: norms('H') },
    budget: budgetResult(budget),
    observers,
    verdict,
    checks: [
      {
        name: 'lattice part agrees with its prediction',
        status: 'agrees',
        reason: null,
        points: 3,
        of: 3,
        observer,
        field: 'E',
        mismatch: 4e-5,
        limit: 1e-3,
        sentence: `The lattice part agrees with its closed-form prediction: at most 0.004 % of the field apart (E at observer ${observer}, limit 0.1 %).`,
      },
    ],
    integral: {
      errorEstimate: 1.3e-8,
      gaugeResidual: 4e-9,
      waveResidual: 3e-8,
      potentialResidual: 5e-9,
      continuityResidual: 2e-16,
      routes: {
        status: 'agree',
        reason: null,
        places: 3,
        instants: 4,
        largest: 3e-12,
        quantity: 'E',
        observer,
        limit: 1.1e-8,
      },
    },
    grid: { cells: 216_000, shape: [60, 60, 60], steps: 315, timeStep: TIME_STEP, memoryBytes: 2.31e7 },
    timings: {
      box: { seconds: 0.41, cellUpdates: 1.6e8 },
      rounding: { seconds: 0.4, cellUpdates: 1.6e8 },
      free: free ? { seconds: 0.93, cellUpdates: 4.9e8 } : null,
      exact: { seconds: 0.62, evaluations: 5.1e7 },
      comparison: { seconds: 0.08 },
    },
    environment: { node: '20.19.5', platform: 'linux x64', processors: 2 },
    notes: ['`grid.box.to` was rounded outwards from 149 mm to 150 mm along x.'],
    scenario: {
      title,
      sources: [
        {
          type: 'wire',
          name: 'cable',
          points: [
            ['0 mm', '0 mm', '-50 mm'],
            ['0 mm', '0 mm', '50 mm'],
          ],
        },
      ],
      grid: { cellSize: '5 mm', boundary: { type: 'cpml', layers: 10 } },
      duration: '3 ns',
      observers: [{ name: observer, at: ['100 mm', '20 mm', '35 mm'] }],
    },
  };

  const signals = { grid, exact, ...partSignals(histories) };
  return {
    result,
    traces: names.flatMap((name, p) => observerTraces(name, signals, p)),
    spectra: names.flatMap((name, p) => [
      { observer: name, field: 'E' as const, spectra: spectraOf(grid, exact, 'E', p) },
      { observer: name, field: 'H' as const, spectra: spectraOf(grid, exact, 'H', p) },
    ]),
    command: 'npx fieldassay compare scenario.json --out out',
  };
}
