import { expect, test } from 'vitest';
import { marchAlone } from '../../src/fdtd/run.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import { type Foreseen, foresee } from '../../src/run/foresee.ts';
import { errorsAt } from '../../src/run/predict.ts';
import { boxProblem, questionOf } from '../../src/run/question.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { FACES, type Scenario } from '../../src/scenario/model.ts';
import { observerCell } from '../../src/scenario/sites.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';

function scenarioOf(json: unknown): Scenario {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  return loaded.scenario;
}

/** A box of 10 mm cells that is marched in a moment. */
const SMALL = {
  ...EXAMPLES['bench-cable-pulse'],
  grid: { ...EXAMPLES['bench-cable-pulse'].grid, cellSize: '10 mm' },
};
const changed = (grid: Record<string, unknown>, more: Record<string, unknown> = {}) =>
  scenarioOf({ ...SMALL, ...more, grid: { ...SMALL.grid, ...grid } });

/** Relative L2 of E at places, by a run. */
function measuredErrors(scenario: Scenario, places: readonly Foreseen[]): number[] {
  const question = questionOf(scenario);
  const { grid, sources, medium } = scenario;
  const cell = Int32Array.from(places.flatMap(({ at }) => observerCell(grid, at)));
  const points = samplePoints(cell, grid.box.from, grid.cellSize);
  const instants = instantsOf(question.steps, question.timeStep);
  const { samples } = marchAlone(boxProblem(question, [{ cell, every: 1 }]));
  const { values } = exactHistory(sources, medium, points, instants);
  return places.map(
    (_, p) => errorsAt({ points, instants, values: samples[0]! }, { points, instants, values }, p, null)[0]!,
  );
}

test('what is foreseen of a scenario as it stands is what a run of it shows', () => {
  for (const [name, scenario, allowed] of [
    ['as it is', changed({}), 1.05],
    ['unequal cells', changed({ cellSize: ['10 mm', '7.5 mm', '12 mm'] }), 1.05],
    // Mur's wall is predicted within a factor of two (test/stress/plan.test.ts) and is nearly all of the error
    ['Mur', changed({ boundary: { type: 'mur1' } }), 2],
  ] as const) {
    const foresight = foresee(scenario);
    if ('reason' in foresight) throw new Error(foresight.reason);
    const { worst } = foresight;
    const measured = Math.max(...measuredErrors(scenario, foresight.places));
    console.log(`${name}: predicted ${worst.total.toFixed(5)}, measured ${measured.toFixed(5)}`);
    expect(worst.total / measured).toBeGreaterThan(1 / allowed);
    expect(worst.total / measured).toBeLessThan(allowed);
  }
});

test('where predictions do not hold it says why, and where walls are not predicted it leaves them out and says so', () => {
  const reasons = [
    [changed({ cellSize: '25 mm' }), /4 cells per shortest wavelength/],
    [changed({}, { observers: [] }), /no observer/],
    [changed({}, { observers: [{ name: 'near', at: ['20 mm', '0 mm', '0 mm'] }] }), /near is nearer to a source/],
    [changed({}, { duration: '0.5 ns' }), /before the pulse has passed/],
  ] as const;
  for (const [scenario, wanted] of reasons) {
    const foresight = foresee(scenario);
    expect('reason' in foresight ? foresight.reason : '').toMatch(wanted);
  }
  for (const boundary of [
    { type: 'cpml', layers: 5 },
    { type: 'cpml', layers: 10, kappaMax: 5 },
    Object.fromEntries(FACES.map((face) => [face, { type: face === 'x-' ? 'pec' : 'mur1' }])),
  ]) {
    const foresight = foresee(changed({ boundary }));
    if ('reason' in foresight) throw new Error(foresight.reason);
    expect(foresight.worst.boundary).toBeNull();
    expect(foresight.worst.total).toBe(foresight.worst.free);
    expect(foresight.notes.join(' ')).toMatch(/What the walls send back is not in it/);
  }
});
