import { expect } from 'vitest';
import { judgeTraces } from '../../src/run/judge/judgeTraces.ts';
import { CAUSES } from '../../src/run/judge/trial.ts';
import { EXAMPLES, type ExampleName } from '../../src/scenario/examples.ts';
import { COMPONENTS, type Trace } from '../../src/trace/trace.ts';
import { type Corrupted, corruptedCopies, type Original } from './corruptions.ts';
import { asked, solveHere } from './solveHere.ts';

/** Of each cause so many copies, drawn with this seed; both chosen before the first run. */
const EACH = 7;
const SEED = 20_261_201;

/** The grid's own traces of a scenario at its observers. */
function tracesOf(json: object): Trace[] {
  const question = asked(json);
  const { observers } = question.scenario;
  const history = solveHere(
    question,
    observers.map(({ at }) => at),
  ).grid();
  const { count, E, H } = history.instants;
  return observers.flatMap(({ name }, p) =>
    COMPONENTS.map((component, c): Trace => {
      const site = 3 * (6 * p + c);
      const [x, y, z] = history.points.position.subarray(site, site + 3);
      return {
        observer: name,
        component,
        at: [x!, y!, z!],
        time: (c < 3 ? E : H).slice(),
        values: history.values.slice((6 * p + c) * count, (6 * p + c + 1) * count),
      };
    }),
  );
}

type Json = { grid: { boundary: object }; medium?: object };

/** One original, with runs of the grid that have another wall or another medium. */
function originalOf(
  name: ExampleName,
  walls: readonly (readonly [string, string])[],
  media: readonly number[],
  traits: Pick<Original, 'isCharged' | 'isLopsided'>,
): Original {
  const json = EXAMPLES[name] as unknown as Json;
  const { timeStep, scenario } = asked(json);
  const spoilt: Original['spoilt'] = [
    ...walls.map(([face, type]) => {
      const faces = ['x-', 'x+', 'y-', 'y+', 'z-', 'z+'].map((f) => [f, f === face ? { type } : json.grid.boundary]);
      const other = { ...json, grid: { ...json.grid, boundary: Object.fromEntries(faces) } };
      return { cause: 'wall' as const, what: `${type} on ${face}`, traces: tracesOf(other) };
    }),
    ...media.map((relativePermittivity) => ({
      cause: 'medium' as const,
      what: `relative permittivity ${relativePermittivity}`,
      traces: tracesOf({ ...json, medium: { relativePermittivity } }),
    })),
  ];
  return {
    name,
    traces: tracesOf(json),
    timeStep,
    cellSize: scenario.grid.cellSize,
    impedance: scenario.medium.impedance,
    permeability: scenario.medium.permeability,
    spoilt,
    ...traits,
  };
}

const ORIGINALS = () => [
  originalOf(
    'bench-cable-pulse',
    [
      ['x+', 'pec'],
      ['y-', 'mur1'],
    ],
    [1.3, 2],
    { isCharged: true, isLopsided: false },
  ),
  originalOf(
    'tilted-wire',
    [
      ['z-', 'pec'],
      ['x+', 'mur1'],
    ],
    [1.5, 3],
    { isCharged: false, isLopsided: true },
  ),
  originalOf('small-loop', [['y+', 'pec']], [1, 3], { isCharged: false, isLopsided: false }),
  originalOf(
    'centre-fed-wire',
    [
      ['x-', 'mur1'],
      ['z+', 'pec'],
    ],
    [2.25],
    { isCharged: false, isLopsided: false },
  ),
];

function judged({ original, traces }: Pick<Corrupted, 'original' | 'traces'>) {
  const json = EXAMPLES[original.name as ExampleName];
  const { scenario } = asked(json);
  return judgeTraces(scenario, json, traces, 'traces.csv', [], () => {}).result;
}

/**
 * Judges every `step`-th of the seeded corrupted copies, prints which cause was taken for which, and expects the right one
 * to be named first in at least 90 % of them; the sound originals are to be called sound.
 */
export function judgeCopies(step: number): void {
  const originals = ORIGINALS();
  for (const original of originals) {
    const { causes, sentence } = judged({ original, traces: original.traces });
    console.log(`${original.name}: ${causes.status}; ${sentence}`);
    expect(causes.status, original.name).toBe('sound');
  }
  const all = corruptedCopies(originals, EACH, SEED);
  expect(all.length).toBeGreaterThanOrEqual(100);
  const copies = all.filter((_, n) => n % step === 0);
  expect(new Set(copies.map(({ cause }) => cause)).size).toBe(CAUSES.length);

  const confusion = new Map<string, Map<string, number>>();
  const wrong: string[] = [];
  let right = 0;
  for (const copy of copies) {
    const { causes } = judged(copy);
    const named = causes.status === 'likely' ? causes.tried[0]!.cause : causes.status;
    const row = confusion.get(copy.cause) ?? new Map<string, number>();
    confusion.set(copy.cause, row.set(named, (row.get(named) ?? 0) + 1));
    if (named === copy.cause) right++;
    else
      wrong.push(
        `${copy.original.name}, ${copy.cause} (${copy.what}): ${causes.status}, ${causes.tried
          .slice(0, 3)
          .map(({ words, explained }) => `${words} ${(100 * explained).toFixed(1)} %`)
          .join('; ')}`,
      );
  }
  console.log('cause           named');
  for (const [cause, row] of confusion)
    console.log(`${cause.padEnd(16)}${[...row].map(([named, count]) => `${named} ${count}`).join(', ')}`);
  console.log(wrong.join('\n'));
  console.log(`${right} of ${copies.length} right`);
  expect(right / copies.length).toBeGreaterThanOrEqual(0.9);
}
