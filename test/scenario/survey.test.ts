import { describe, expect, test } from 'vitest';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { expandSurvey, loadSurvey, MAX_CASES, surveyJsonSchema } from '../../src/scenario/survey.ts';

const scenario = EXAMPLES['tilted-wire'];
const none = (name: string): never => {
  throw new Error(`the scenario ${name} could not be read: there is no such file`);
};

const expanded = (file: object) => {
  const loaded = loadSurvey(file, none);
  if ('problems' in loaded) throw new Error(JSON.stringify(loaded.problems));
  return expandSurvey(loaded.survey);
};

const problemsOf = (file: unknown) => {
  const loaded = loadSurvey(file, none);
  if ('survey' in loaded) throw new Error('it was accepted');
  return loaded.problems;
};

describe('expansion', () => {
  test('"all": every value with every other, the last key fastest', () => {
    const cases = expanded({
      scenario,
      vary: { 'grid.cellSize': ['10 mm', '5 mm'], 'grid.courant': [0.5, 0.7, 0.9] },
    });
    expect(cases.map(({ settings }) => Object.values(settings))).toEqual([
      ['10 mm', 0.5],
      ['10 mm', 0.7],
      ['10 mm', 0.9],
      ['5 mm', 0.5],
      ['5 mm', 0.7],
      ['5 mm', 0.9],
    ]);
    expect(cases[4]!.scenario.grid).toEqual({ ...scenario.grid, cellSize: '5 mm', courant: 0.7 });
  });

  test('"paired": first with first, second with second', () => {
    const cases = expanded({
      scenario,
      vary: { 'grid.cellSize': ['10 mm', '5 mm'], 'grid.boundary.layers': [5, 10] },
      combine: 'paired',
    });
    expect(cases.map(({ scenario: file }) => file.grid)).toEqual([
      { ...scenario.grid, cellSize: '10 mm', boundary: { type: 'cpml', layers: 5 } },
      { ...scenario.grid, cellSize: '5 mm', boundary: { type: 'cpml', layers: 10 } },
    ]);
  });

  test('paths reach into lists; what is not there is made; the given scenario stays as it is', () => {
    const before = structuredClone(scenario);
    const [first] = expanded({
      scenario,
      vary: { 'sources.0.points.1.2': ['30 mm'], 'medium.relativePermittivity': [2], 'grid.gridding': ['nearest'] },
    });
    expect(first!.scenario).toMatchObject({ medium: { relativePermittivity: 2 }, grid: { gridding: 'nearest' } });
    expect((first!.scenario.sources as { points: string[][] }[])[0]!.points[1]![2]).toBe('30 mm');
    expect(scenario).toEqual(before);
  });

  test('layers are varied of the default walls too, and of whatever walls are varied beside them', () => {
    const { boundary: _, ...grid } = scenario.grid;
    const [bare] = expanded({ scenario: { ...scenario, grid }, vary: { 'grid.boundary.layers': [6] } });
    expect(bare!.scenario.grid).toMatchObject({ boundary: { type: 'cpml', layers: 6 } });
    const [both] = expanded({
      scenario,
      vary: { 'grid.boundary.layers': [6], 'grid.boundary': [{ type: 'cpml', grading: 4 }] },
    });
    expect(both!.scenario.grid).toMatchObject({ boundary: { type: 'cpml', grading: 4, layers: 6 } });
  });

  test('clearance sets the box, on the nodes of the scenario’s own, at least as wide as asked', () => {
    for (const [cellSize, clearance] of [
      [5e-3, 0.04],
      [5e-3, 0.043],
      [4e-3, 0.05],
    ] as const) {
      const [only] = expanded({ scenario, vary: { 'grid.clearance': [clearance], 'grid.cellSize': [cellSize] } });
      const loaded = loadScenario(only!.scenario);
      if ('problems' in loaded) throw new Error(JSON.stringify(loaded.problems));
      const { from, to } = loaded.scenario.grid.box;
      const ends = [
        [-0.0228, 0.0252],
        [-0.0201, 0.0159],
        [-0.0393, 0.0407],
      ];
      ends.forEach(([low, high], a) => {
        for (const room of [low! - from[a]!, to[a]! - high!]) {
          expect(room).toBeGreaterThan(clearance - 1e-9);
          expect(room).toBeLessThan(clearance + cellSize + 1e-9);
        }
        const cellsFromOwnBox = (from[a]! + 0.12) / cellSize;
        expect(Math.abs(cellsFromOwnBox - Math.round(cellsFromOwnBox))).toBeLessThan(1e-9);
      });
    }
  });

  test('without a box of its own, clearance puts nodes on the sources’ lower corner', () => {
    const { box: _, ...grid } = scenario.grid;
    const [only] = expanded({ scenario: { ...scenario, grid }, vary: { 'grid.clearance': ['40 mm'] } });
    const { from } = (only!.scenario.grid as { box: { from: number[] } }).box;
    expect(from.map((x) => Number(x.toFixed(9)))).toEqual([-0.0628, -0.0601, -0.0793]);
  });
});

describe('refusals name the place, the value and the remedy', () => {
  const vary = { 'grid.cellSize': ['5 mm'] };
  test.each([
    ['no object', [], '', 'must be an object with at least scenario and vary'],
    ['broken JSON', '{ "vary": [', '', 'line 1'],
    ['an unknown key', { scenario, vary, combin: 'all' }, 'combin', 'did you mean “combine”?'],
    ['no scenario', { vary }, 'scenario', 'is missing; it must be a scenario, or the name of its file'],
    ['a scenario that is not there', { scenario: 'a.json', vary }, 'scenario', 'a.json could not be read'],
    ['nothing to vary', { scenario, vary: {} }, 'vary', 'must name at least one key'],
    ['no values', { scenario, vary: { duration: [] } }, 'vary.duration', 'is empty; give it a value'],
    ['a value that is no list', { scenario, vary: { duration: '3 ns' } }, 'vary.duration', 'a list of values'],
    ['an unknown section', { scenario, vary: { 'gird.cellSize': [1] } }, 'vary.gird.cellSize', 'did you mean “grid”?'],
    ['an unknown grid key', { scenario, vary: { 'grid.celSize': [1] } }, 'vary.grid.celSize', '“cellSize”'],
    [
      'a source that is not there',
      { scenario, vary: { 'sources.1.name': ['b'] } },
      'vary.sources.1.name',
      'a list of 1',
    ],
    ['a path to machinery', { scenario, vary: { 'grid.constructor.x': [1] } }, 'vary.grid.constructor.x', 'no path'],
    ['an unknown way', { scenario, vary, combine: 'some' }, 'combine', 'must be one of all, paired'],
    ['a clearance without a unit', { scenario, vary: { 'grid.clearance': ['5'] } }, 'vary.grid.clearance.0', 'unit'],
    ['a clearance below 0', { scenario, vary: { 'grid.clearance': [-1] } }, 'vary.grid.clearance.0', 'above 0'],
    [
      'unequal pairs',
      { scenario, vary: { duration: [1, 2], 'grid.courant': [1] }, combine: 'paired' },
      'vary',
      'equally long',
    ],
    [
      'too many cases',
      { scenario, vary: { duration: Array(200).fill(1), 'grid.courant': Array(100).fill(1) } },
      'vary',
      `20000 cases; the limit is ${MAX_CASES}`,
    ],
    [
      'a box and a clearance',
      { scenario, vary: { 'grid.clearance': ['5 mm'], 'grid.box': [{}] } },
      'vary.grid.clearance',
      'vary one of the two',
    ],
  ])('%s', (_, file, path, said) => {
    const problems = problemsOf(file);
    expect(problems.map((problem) => problem.path)).toContain(path);
    expect(problems.find((problem) => problem.path === path)!.message).toContain(said);
  });
});

test('a named scenario is read, and the survey takes its title', () => {
  const loaded = loadSurvey({ scenario: 'tilted', vary: { duration: ['2 ns'] } }, () => scenario);
  expect('survey' in loaded && loaded.survey.title).toBe(scenario.title);
});

test('the schema names its keys', () => {
  expect(Object.keys(surveyJsonSchema().properties as object)).toEqual(['title', 'scenario', 'vary', 'combine']);
});
