/**
 * The survey file: a scenario, and what is to be varied in it. It is expanded into cases, each a scenario of its own.
 */
import { z } from 'zod';
import { type Bounds, sourceBounds } from './distance.ts';
import { readSources } from './load/sources.ts';
import type { Vec3 } from './model.ts';
import { type Path, type Problem, readObject, reporter, reportIssue } from './reading.ts';
import { choice, expected, gridSchema, LIMITS, record, scenarioSchema, text, unknownKey } from './schema.ts';
import { CELL_SLACK } from './sites.ts';
import { parseQuantity, show } from './units.ts';

/** A survey that takes longer than a life is a slip of the pen. */
export const MAX_CASES = 10_000;

/** The one key that is no path into the scenario. */
const CLEARANCE = 'grid.clearance';

/** Segments that reach an object's machinery instead of its keys. */
const FORBIDDEN = new Set(['__proto__', 'constructor', 'prototype']);

export interface Survey {
  readonly title: string;
  /** the file's JSON, not yet checked: every case is checked by itself */
  readonly scenario: Record<string, unknown>;
  readonly vary: readonly Axis[];
  readonly combine: 'all' | 'paired';
  /** the survey file as given */
  readonly json: unknown;
}

/** One key and the values it takes. */
export interface Axis {
  readonly key: string;
  readonly values: readonly unknown[];
}

/** One case: what the varied keys are, and the scenario that makes. */
export interface SurveyCase {
  readonly settings: Readonly<Record<string, unknown>>;
  readonly scenario: Record<string, unknown>;
}

export type LoadedSurvey = { readonly survey: Survey } | { readonly problems: readonly Problem[] };

export const surveySchema = record('the survey', {
  title: text(LIMITS.text, 'a text').optional().describe('Title of reports (default: that of the scenario).'),
  scenario: z
    .union([z.string(), z.record(z.string(), z.unknown())], { error: expected('a scenario, or the name of its file') })
    .describe('A scenario, or the name of its file, relative to the survey.'),
  vary: z
    .record(
      z.string(),
      z.array(z.unknown(), { error: expected('a list of values') }).min(1, { error: 'is empty; give it a value' }),
      {
        error: expected('an object of keys with lists of values, such as { "grid.cellSize": ["10 mm", "5 mm"] }'),
      },
    )
    .describe(
      'Keys of the scenario as paths (grid.cellSize, sources.0.at), each with the values it takes; or grid.clearance, the distance from the box around the sources to each wall, which sets grid.box.',
    ),
  combine: choice(['all', 'paired'])
    .optional()
    .describe(
      'all: every value with every other, the last key fastest (default); paired: first with first, and so on.',
    ),
});

/** The JSON Schema of survey files, as an editor reads it. */
export function surveyJsonSchema(): Record<string, unknown> {
  return { ...z.toJSONSchema(surveySchema, { io: 'input' }), title: 'Fieldassay survey' };
}

/**
 * Reads and checks a survey.
 * @param input the text of a survey file, or what JSON.parse made of it
 * @param readScenario gives the JSON of a scenario that is named; throws where there is none
 * @returns the survey, or every problem found in the survey itself. Cases may still be refused one by one.
 */
export function loadSurvey(input: unknown, readScenario: (name: string) => unknown): LoadedSurvey {
  const read = readObject(input, 'The survey', 'scenario and vary');
  if ('problems' in read) return read;
  const problems: Problem[] = [];
  const report = reporter(read.file, 'The survey', problems);
  const parsed = surveySchema.safeParse(read.file);
  for (const issue of parsed.error?.issues ?? []) reportIssue(issue, [], read.file, report);
  if (!parsed.success) return { problems };
  const { title, scenario: given, vary, combine = 'all' } = parsed.data;

  let scenario: unknown = given;
  if (typeof given === 'string') {
    try {
      scenario = readScenario(given);
    } catch (error) {
      report(['scenario'], `is ${show(given)}: ${(error as Error).message.replace(/\.$/, '')}`);
      return { problems };
    }
    const file = readObject(scenario, 'The scenario', 'sources, grid and duration');
    if ('problems' in file)
      return { problems: file.problems.map((problem) => ({ ...problem, path: 'scenario', value: given })) };
    scenario = file.file;
  }
  const axes = Object.entries(vary).map(([key, values]) => ({ key, values }));
  const base = scenario as Record<string, unknown>;
  checkAxes(axes, combine, base, report);
  if (problems.length > 0) return { problems };
  const name = title ?? (typeof base.title === 'string' ? base.title : '');
  return { survey: { title: name, scenario: base, vary: axes, combine, json: read.file } };
}

function checkAxes(
  axes: readonly Axis[],
  combine: Survey['combine'],
  scenario: Record<string, unknown>,
  report: (path: Path, predicate: string) => void,
): void {
  if (axes.length === 0)
    report(['vary'], 'is empty; it must name at least one key of the scenario, such as "grid.cellSize"');
  for (const { key, values } of axes) {
    const wrong = wrongKey(key, scenario);
    if (wrong) report(['vary', key], wrong);
    if (key === CLEARANCE)
      values.forEach((value, n) => {
        const parsed = clearanceOf(value);
        if ('reason' in parsed) report(['vary', key, n], parsed.reason);
      });
  }
  if (axes.some(({ key }) => key === CLEARANCE) && axes.some(({ key }) => key.startsWith('grid.box')))
    report(['vary', CLEARANCE], 'sets grid.box, which is varied too; vary one of the two');
  const lengths = axes.map(({ values }) => values.length);
  if (combine === 'paired' && new Set(lengths).size > 1)
    report(
      ['vary'],
      `has lists of ${lengths.join(', ')} values; "combine": "paired" needs them equally long; make them so, or combine "all"`,
    );
  const count = combine === 'paired' ? (lengths[0] ?? 0) : lengths.reduce((product, n) => product * n, 1);
  if (count > MAX_CASES)
    report(['vary'], `makes ${count} cases; the limit is ${MAX_CASES}; give fewer values, or combine "paired"`);
}

/** Why a key is no path into the scenario, as a predicate; undefined where it may be one. */
function wrongKey(key: string, scenario: Record<string, unknown>): string | undefined {
  const segments = key.split('.');
  if (segments.some((segment) => segment === '' || FORBIDDEN.has(segment)))
    return 'is no path of keys with points between, such as "grid.cellSize"';
  const [first, second] = segments as [string, string | undefined];
  const known = Object.keys(scenarioSchema.shape);
  if (!known.includes(first)) return unknownKey(first, 'the scenario', known);
  const gridKeys = [...Object.keys(gridSchema.shape), 'clearance'];
  if (first === 'grid' && second !== undefined && !gridKeys.includes(second))
    return unknownKey(second, 'the grid', gridKeys);
  let value: unknown = scenario;
  for (const [n, segment] of segments.entries()) {
    if (Array.isArray(value) && !(/^\d+$/.test(segment) && Number(segment) < value.length))
      return `asks for ${segment} of ${segments.slice(0, n).join('.')}, a list of ${value.length}; it may be 0 to ${value.length - 1}`;
    if (value === undefined && /^\d+$/.test(segment))
      return `asks for ${segment} of ${segments.slice(0, n).join('.')}, which the scenario does not have; add it there`;
    if (typeof value !== 'object' || value === null) return undefined;
    value = Object.hasOwn(value, segment) ? (value as Record<string, unknown>)[segment] : undefined;
  }
  return undefined;
}

function clearanceOf(value: unknown): { readonly value: number } | { readonly reason: string } {
  const wanted = 'it must be a length above 0, such as "50 mm"';
  if (typeof value !== 'number' && typeof value !== 'string') return { reason: `is ${show(value)}; ${wanted}` };
  const parsed = parseQuantity(value, 'length');
  if ('value' in parsed && !(parsed.value > 0)) return { reason: `is ${show(value)}; ${wanted}` };
  return parsed;
}

/**
 * The cases of a survey, in order: with "all" the last key varies fastest. Keys are set from the shortest path to the
 * longest, so that `grid.boundary.layers` holds whatever `grid.boundary` was set to; `grid.clearance` comes last.
 */
export function expandSurvey({ scenario, vary, combine }: Survey): SurveyCase[] {
  const depth = ({ key }: Axis) => (key === CLEARANCE ? Number.POSITIVE_INFINITY : key.split('.').length);
  const order = [...vary.keys()].sort((a, b) => depth(vary[a]!) - depth(vary[b]!) || a - b);
  return combinations(vary, combine).map((values) => {
    const file = structuredClone(scenario);
    for (const m of order) {
      const { key } = vary[m]!;
      if (key === CLEARANCE) setClearance(file, values[m]);
      else setPath(file, key.split('.'), values[m]);
    }
    return { settings: Object.fromEntries(vary.map(({ key }, m) => [key, values[m]])), scenario: file };
  });
}

function combinations(vary: readonly Axis[], combine: Survey['combine']): unknown[][] {
  if (combine === 'paired') return vary[0]!.values.map((_, n) => vary.map(({ values }) => values[n]));
  return vary.reduce<unknown[][]>(
    (sofar, { values }) => sofar.flatMap((head) => values.map((value) => [...head, value])),
    [[]],
  );
}

function setPath(file: Record<string, unknown>, path: readonly string[], value: unknown): void {
  let place = file;
  path.slice(0, -1).forEach((segment, n) => {
    const held = Object.hasOwn(place, segment) ? place[segment] : undefined;
    if (typeof held !== 'object' || held === null)
      // The boundary that a scenario has without saying so.
      place[segment] = path.slice(0, n + 1).join('.') === 'grid.boundary' ? { type: 'cpml' } : {};
    place = place[segment] as Record<string, unknown>;
  });
  place[path[path.length - 1]!] = structuredClone(value);
}

/**
 * The box with a clearance around the sources. Its nodes stay those of the scenario's own box, or else go through the
 * sources' lower corner, so that how the sources lie in the cells does not change with the clearance: it is rounded
 * outwards to whole cells.
 */
function setClearance(file: Record<string, unknown>, value: unknown): void {
  const parsed = clearanceOf(value);
  const bounds = boundsOf(file);
  const grid = file.grid as Record<string, unknown> | undefined;
  if ('reason' in parsed || !bounds || typeof grid !== 'object' || grid === null) return;
  const cell = gridSchema.shape.cellSize.safeParse(grid.cellSize);
  const box = gridSchema.shape.box.safeParse(grid.box);
  const corner = (a: 0 | 1 | 2): number => {
    const exact = bounds.from[a] - parsed.value;
    if (!cell.success) return exact;
    const origin = box.success ? box.data.from[a] : bounds.from[a];
    return origin + Math.floor((exact - origin) / cell.data[a] + CELL_SLACK) * cell.data[a];
  };
  grid.box = {
    from: [corner(0), corner(1), corner(2)],
    to: bounds.to.map((x) => x + parsed.value),
  };
}

/** The box around all sound sources of a scenario file. */
function boundsOf({ sources }: Record<string, unknown>): Bounds | undefined {
  const all = readSources(sources).map(sourceBounds);
  if (all.length === 0) return undefined;
  const extreme = (end: 'from' | 'to', of: (...x: number[]) => number) =>
    [0, 1, 2].map((a) => of(...all.map((bounds) => bounds[end][a]!))) as unknown as Vec3;
  return { from: extreme('from', Math.min), to: extreme('to', Math.max) };
}
