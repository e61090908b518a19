import { describe, expect, test } from 'vitest';
import { planSchema } from '../../src/compare/planResult.ts';
import { planHtml, planJson, planText } from '../../src/report/plan.ts';
import { goalPlaces, placesAround } from '../../src/run/goal.ts';
import { planScenario } from '../../src/run/plan.ts';
import { gridded, searchPlan, WALLS } from '../../src/run/planSearch.ts';
import { boundaryErrors, isPredictable, predictFree, predictWalls } from '../../src/run/predict.ts';
import { Refusal } from '../../src/run/refusal.ts';
import { distanceToSources, sourceBounds } from '../../src/scenario/distance.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Scenario } from '../../src/scenario/model.ts';
import { observerCell } from '../../src/scenario/sites.ts';

const dipole = (more: object = {}) => ({
  title: 'A <b>dipole</b>',
  sources: [
    {
      type: 'dipole',
      at: ['1 mm', '-2 mm', '3 mm'],
      direction: [0.2, 0, 1],
      length: '10 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-88 mm', '-88 mm', '-88 mm'], to: ['88 mm', '88 mm', '88 mm'] } },
  duration: '3.4 ns',
  observers: [
    { name: 'A', at: ['70 mm', '20 mm', '10 mm'] },
    { name: 'far', at: ['0.12 m', 0, 0] },
  ],
  planes: [
    { name: 'kept', normal: 'z', at: '3 mm' },
    { name: 'left out', normal: 'z', at: '80 mm' },
  ],
  ...more,
});

function scenarioOf(json: object): Scenario {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Error(loaded.problems.map(({ message }) => message).join('\n'));
  return loaded.scenario;
}

describe('where a tolerance is to hold', () => {
  const scenario = scenarioOf(dipole());

  test('at the observers in the box, or at the one that is named, wherever it is', () => {
    expect(goalPlaces(scenario, undefined, undefined).places.map(({ name }) => name)).toEqual(['A']);
    expect(goalPlaces(scenario, 'far', undefined).places.map(({ name }) => name)).toEqual(['far']);
    expect(() => goalPlaces(scenario, 'B', undefined)).toThrow('There is no observer “B”; there are “A”, “far”.');
    expect(() => goalPlaces(scenario, 'A', 0.1)).toThrow('Leave one out');
    expect(() => goalPlaces(scenarioOf(dipole({ observers: [] })), undefined, undefined)).toThrow('no observer');
  });

  test('at a distance from the nearest source, where the field is strong', () => {
    const { places, notes } = placesAround(scenario, 0.06);
    // Along the dipole's axis, ±z, the far field is weak but the near field is not.
    expect(places.length).toBeGreaterThan(8);
    expect(notes.length).toBe(places.length < 14 ? 1 : 0);
    for (const { at } of places) expect(distanceToSources(scenario.sources, at)).toBeCloseTo(0.06, 12);
    expect(() => placesAround(scenario, 0)).toThrow('must be above 0');
    expect(() => placesAround(scenario, 3)).toThrow('No field arrives');
    // The pulse is over at the source 3 sigma or so after its middle, at 2.4 ns; 0.6 m are 2 ns more.
    expect(() => goalPlaces(scenario, undefined, 0.6)).toThrow('before the pulse has passed “−x−y−z” at 4.');
  });

  test('not where E vanishes by symmetry', () => {
    const loop = scenarioOf(
      dipole({
        sources: [
          {
            type: 'loop',
            centre: [0, 0, 0],
            normal: [0, 0, 1],
            radius: '10 mm',
            current: dipole().sources[0]!.current,
          },
        ],
        observers: [{ name: 'on axis', at: [0, 0, '50 mm'] }],
      }),
    );
    expect(() => goalPlaces(loop, undefined, undefined)).toThrow('E vanishes at “on axis”');
  });
});

describe('the search', () => {
  const scenario = scenarioOf(dipole());
  const places = [{ name: 'A', at: [0.07, 0.02, 0.01] as const }];
  const frame = {
    holds: { from: [0.001, -0.002, 0.003] as const, to: [0.07, 0.02, 0.01] as const },
    anchor: sourceBounds(scenario.sources[0]!).from,
    clearances: [4, 8],
    walls: WALLS,
    keepsCells: false,
  };

  test('lays the smallest box round what it must hold, the anchor on a node', () => {
    const { grid } = gridded(scenario, 0.5, frame, 4);
    expect(grid.cellSize).toEqual([0.004, 0.004, 0.004]);
    for (const a of [0, 1, 2] as const) {
      const below = (frame.anchor[a] - grid.box.from[a]) / 0.004;
      expect(below).toBeCloseTo(Math.round(below), 9);
      const room = [frame.holds.from[a] - grid.box.from[a], grid.box.to[a] - frame.holds.to[a]];
      for (const side of room) {
        expect(side).toBeGreaterThanOrEqual(4 * 0.004 - 1e-12);
        expect(side).toBeLessThan(5 * 0.004);
      }
      expect((grid.box.to[a] - grid.box.from[a]) / grid.cells[a]).toBeCloseTo(0.004, 12);
    }
  });

  test('finds cells of which coarser ones do not do, and cheaper walls neither', () => {
    const found = searchPlan(scenario, { tolerance: 0.01, places, band: null }, frame);
    expect(found.met).toBe(true);
    expect(found.chosen!.predicted).toBeLessThanOrEqual(0.01);
    const coarser = found.curve.filter(({ cellSize }) => cellSize[0] > 1.5 * found.chosen!.cellSize[0]);
    expect(coarser.length).toBeGreaterThan(0);
    for (const { predicted } of coarser) expect(predicted).toBeGreaterThan(0.01);
    const works = found.alternatives.map(({ work }) => work);
    expect(works[0]).toBe(found.chosen!.work);
    expect(works).toEqual(works.toSorted((a, b) => a - b));
    const [a] = found.places;
    expect(a!.total).toBeCloseTo(a!.free + a!.boundary, 15);
    // Signals add, sizes do not.
    expect(a!.free).toBeLessThanOrEqual(a!.lattice + a!.gridding);
    expect(a!.free).toBeGreaterThanOrEqual(Math.abs(a!.lattice - a!.gridding));
  });

  test('says what is best where nothing meets the tolerance', () => {
    const found = searchPlan(
      scenario,
      { tolerance: 0.01, places, band: null },
      { ...frame, walls: [{ type: 'mur1' }] },
    );
    expect(found.met).toBe(false);
    expect(found.chosen!.predicted).toBeGreaterThan(0.01);
  });

  test('keeps the cells where they need not change', () => {
    const kept = searchPlan(
      scenario,
      { tolerance: 0.2, places, band: null },
      { ...frame, holds: scenario.grid.box, anchor: scenario.grid.box.from, clearances: [0], keepsCells: true },
    );
    expect(kept.chosen!.cellSize).toEqual(scenario.grid.cellSize);
    expect(kept.chosen!.box).toEqual(scenario.grid.box);
  });
});

describe('predictions', () => {
  const scenario = scenarioOf(dipole());
  const cells = Int32Array.from(observerCell(scenario.grid, [0.07, 0.02, 0.01]));

  test('by bands: those that begin below the limit, each about as large as that of the whole signal', () => {
    const [whole] = predictFree(scenario, { cells, band: null }, 'time');
    const [bands] = predictFree(scenario, { cells, band: 1e12 }, 'time');
    const [low] = predictFree(scenario, { cells, band: 1.5e9 }, 'time');
    expect(whole!.free).toHaveLength(1);
    expect(low!.free.length).toBeGreaterThan(0);
    expect(low!.free.length).toBeLessThan(bands!.free.length);
    expect([...low!.free]).toEqual([...bands!.free.slice(0, low!.free.length)]);
    for (const e of bands!.free) expect(Math.abs(Math.log(e / whole!.free[0]!))).toBeLessThan(Math.log(5));
  });

  test('of walls: conductors send back most, absorbers the less the thicker', () => {
    const [walls] = predictWalls(scenario, { cells, band: null });
    const errors = [{ type: 'pec' } as const, { type: 'mur1' } as const, ...WALLS.slice(0, 4)].map(
      (wall) => boundaryErrors(walls!, wall)[0]!,
    );
    expect(errors).toEqual(errors.toSorted((a, b) => b - a));
    expect(isPredictable({ type: 'cpml', layers: 7 })).toBe(false);
    expect(() => boundaryErrors(walls!, { type: 'cpml', layers: 7 })).toThrow('CPML, 7 layers');
  });
});

test('a plan is checked by a run, is told in text, JSON and HTML, and its scenario loads', async () => {
  const plan = await planScenario(dipole(), { tolerance: 0.02, at: 'far', ownRate: 1e8, threads: 1 });
  expect(plan.met).toBe(true);
  expect(plan.check!.measured).toBeLessThanOrEqual(0.02);
  expect(plan.places[0]!.measured).toBe(plan.check!.measured);
  expect(plan.own!.seconds).toBeCloseTo(plan.chosen!.work / 1e8, 12);
  const planned = scenarioOf(plan.scenario as object);
  expect(planned.grid.cells).toEqual(plan.chosen!.shape);
  expect(planned.observers.find(({ name }) => name === 'far')!.inside).toBe(true);
  expect(planned.planes.map(({ name }) => name)).toEqual(['kept']);
  expect(planned.tolerance).toBe(0.02);
  expect(planSchema.parse(JSON.parse(planJson(plan)))).toEqual(plan);
  const text = planText(plan, { colour: false });
  expect(text).toContain('Within 2 %: cells of');
  expect(text).toContain('Trade-off');
  const html = planHtml(plan, 'npx fieldassay plan x');
  expect(html).toContain('&lt;b&gt;dipole');
  expect(html).not.toContain('<b>dipole');
  expect(html).toContain('<svg class="chart"');
});

test('a waveform with a kink is planned by its rise time, in the form that serves it', async () => {
  const [source] = dipole().sources;
  const kinked = dipole({
    sources: [
      { ...source, current: { waveform: { type: 'doubleExponential', amplitude: 1, alpha: 1e9, beta: 1e10 } } },
    ],
  });
  const plan = await planScenario(kinked, { tolerance: 0.2, threads: 1 });
  expect(plan.met).toBe(true);
  // A third of what its wave passes in 0.1 ns is 10 mm.
  expect(plan.chosen!.cellSize[0]).toBeGreaterThan(0.002);
  expect(plan.check!.measured).toBeLessThanOrEqual(0.2);
});

test('refuses what is no scenario', async () => {
  await expect(planScenario('{', {})).rejects.toThrow(Refusal);
});
