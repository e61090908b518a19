import { parse as parseWithLocations } from '@humanwhocodes/momoa';
import type { z } from 'zod';
import { exp } from '../elementary/elementary.ts';
import { formatNumber, formatQuantity } from '../elementary/quantity.ts';
import { mediumOf } from './constants.ts';
import { type Curve, circle, norm, polyline, scale, sub } from './curve.ts';
import { type Bounds, distanceToSources, firstArrival, sourceBounds } from './distance.ts';
import { HEIDLER_PRESETS } from './heidler.ts';
import { JUMP_NOTED, JUMP_REFUSED } from './jump.ts';
import {
  type Axis,
  type Boundary,
  FACES,
  type Face,
  type Grid,
  type Medium,
  type Observer,
  type Plane,
  type Scenario,
  type Source,
  type Vec3,
  type WaveTerm,
} from './model.ts';
import { combOf, endsOf, isNegligible, type PhasorSpec, phasorsAlone } from './phasors.ts';
import { decaying, hat, standing } from './profiles.ts';
import {
  CPML_DEFAULTS,
  gridSchema,
  HIGDON_DEFAULTS,
  LIAO_DEFAULTS,
  LIMITS,
  mediumSchema,
  observerSchema,
  planeSchema,
  SPLIT_PML_DEFAULTS,
  scenarioSchema,
  sourceSchema,
  TWO_FORMS,
} from './schema.ts';
import { SIGNIFICANT, shortestWavelength } from './shortest.ts';
import { CELL_SLACK, observerCell, stepsOf, timeStepOf } from './sites.ts';
import { resolved } from './table.ts';
import { printable, unseenIn } from './text.ts';
import { type Kind, parseQuantity, show } from './units.ts';
import { cellsBehind, cellsRead } from './walls.ts';
import type { Waveform, WaveformSpec } from './waveform.ts';
import { makeWaveform } from './waveforms.ts';

/** Why a scenario is refused. */
export interface Problem {
  /** keys from the root, `sources.0.current.waveform.sigma`; empty for the file as a whole */
  readonly path: string;
  /** what stands there; undefined where nothing does */
  readonly value: unknown;
  /** one sentence: quantity, value, limit, remedy */
  readonly message: string;
}

/** What a scenario is read for. */
export type Asked = 'time' | 'frequency';

export type Loaded = { readonly scenario: Scenario } | { readonly problems: readonly Problem[] };

/** Cells of the lattice, absorbing layers included, that a 32-bit kernel holds beside its arrays for norms: 440³ singles. */
export const MAX_CELLS = { single: 440 ** 3, double: 440 ** 3 / 2 } as const;

/** Beyond this a run takes days on a desktop machine. */
export const MAX_STEPS = 200_000;

/** Characters of a scenario file. */
const MAX_TEXT = 64 * 1024 * 1024;

/** Brackets within brackets: what is known of any file lies within ten. Deeper ones would be too deep for a call stack. */
const MAX_DEPTH = 100;

/** Fewer cells leave no room for a source beside the walls. */
const MIN_CELLS = 3;

/** Below this the grid's dispersion alone is some 3 %. */
const CELLS_PER_WAVELENGTH_NOTED = 10;

export type Path = readonly (string | number)[];
export type Report = (path: Path, predicate: string) => void;

/**
 * Reads and checks a scenario.
 * @param input the text of a scenario file, or what JSON.parse made of it
 * @param asked `frequency` where nothing but steady states will be asked for: currents given by frequency need not make a
 *   pulse then, and have no value in time
 * @returns the scenario in SI units with all defaults filled in, or every problem found, in the order of the file's
 *   sections. It throws nothing.
 */
export function loadScenario(input: unknown, asked: Asked = 'time'): Loaded {
  const read = readObject(input, 'The scenario', 'sources, grid and duration');
  if ('problems' in read) return read;
  const { file } = read;
  const problems: Problem[] = [];
  const report = reporter(file, 'The scenario', problems);
  for (const issue of scenarioSchema.safeParse(file).error?.issues ?? []) reportIssue(issue, [], file, report);
  const scenario = build(file, asked, report);
  return problems.length === 0 && scenario ? { scenario } : { problems };
}

/** A problem as one line of text, whatever the file holds. */
export function describeProblem({ path, message }: Problem): string {
  return printable(path === '' ? message : `${path}: ${message}`);
}

/**
 * The object that a file holds.
 * @param input the text of the file, or what JSON.parse made of it
 * @param whole names the object, "The scenario"; `keys` those it needs at least
 */
export function readObject(
  input: unknown,
  whole: string,
  keys: string,
): { readonly file: Record<string, unknown> } | { readonly problems: readonly Problem[] } {
  const refused = (value: unknown, message: string) => ({ problems: [{ path: '', value, message }] });
  let raw = input;
  if (typeof input === 'string') {
    if (input.length > MAX_TEXT)
      return refused(undefined, `The file has ${input.length} characters; the limit is ${MAX_TEXT}. Use fewer points.`);
    try {
      raw = JSON.parse(input);
    } catch {
      return refused(undefined, syntaxError(input));
    }
  }
  if (typeof raw !== 'object' || raw === null || Array.isArray(raw))
    return refused(raw, `${whole} is ${show(raw)}; it must be an object with at least ${keys}.`);
  const problems: Problem[] = [];
  seekUnfit(raw, [], reporter(raw, whole, problems));
  return problems.length > 0 ? { problems } : { file: raw as Record<string, unknown> };
}

/**
 * Reports what no file may hold, whatever its keys mean: brackets too deep for a call stack, and texts that do not show as
 * they are. Names and titles go into reports, tables, terminals and databases, and are to be told apart by looking.
 */
function seekUnfit(value: unknown, path: (string | number)[], report: Report): void {
  if (typeof value === 'string') {
    const unseen = unseenIn(value);
    if (unseen !== undefined) report([...path], `holds ${unseen}, a character that does not show; leave it out`);
  } else if (typeof value === 'object' && value !== null) {
    if (path.length > MAX_DEPTH) {
      report(path.slice(0, 1), `has brackets more than ${MAX_DEPTH} deep; no key goes so deep`);
      return;
    }
    const list = Array.isArray(value);
    for (const [key, inner] of Object.entries(value)) {
      if (typeof inner === 'number') continue;
      path.push(list ? Number(key) : key);
      seekUnfit(inner, path, report);
      path.pop();
    }
  }
}

/** Gathers what is wrong with a file: predicates become sentences about the key at their path. */
export function reporter(file: unknown, whole: string, problems: Problem[]): Report {
  return (path, predicate) =>
    problems.push({
      path: path.join('.'),
      value: valueAt(file, path),
      message: `${path.length === 0 ? whole : subjectOf(path)} ${predicate}.`,
    });
}

/** Where a text stops being JSON. The host's own message differs from one to the next; this one does not. */
function syntaxError(text: string): string {
  try {
    parseWithLocations(text, { mode: 'json' });
  } catch (error) {
    const { line, column } = error as { line?: number; column?: number };
    if (line !== undefined)
      return `The file is not JSON: line ${line}, column ${column} is where it goes wrong; correct the text there.`;
    return 'The file is not JSON and is nested too deeply to say where; check its brackets.';
  }
  return 'The file is not JSON: a text in it holds a control character; write it as \\u followed by four digits.';
}

/** `points.1.2` of a path: from the last key on, so that a message can be read without its path. */
function subjectOf(path: Path): string {
  const last = path.findLastIndex((key) => typeof key === 'string');
  return path.slice(Math.max(0, last)).join('.');
}

export function valueAt(root: unknown, path: Path): unknown {
  let value = root;
  for (const key of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, key)) return undefined;
    value = (value as Record<string | number, unknown>)[key];
  }
  return value;
}

/** An issue of the schema as problems: one for each unknown key, and of two forms those of the one that was meant. */
export function reportIssue(issue: z.core.$ZodIssue, parent: Path, file: unknown, report: Report): void {
  const path = [...parent, ...(issue.path as Path)];
  if (issue.code === 'unrecognized_keys') {
    const lines = issue.message.split('\n');
    issue.keys.forEach((key, k) => {
      report([...path, key], lines[k]!);
    });
    return;
  }
  if (issue.code === 'invalid_union' && issue.message === TWO_FORMS) {
    const value = valueAt(file, path);
    const second = Array.isArray(value) || (isObject(value) && FACES.some((face) => Object.hasOwn(value, face)));
    for (const inner of issue.errors[second ? 1 : 0]!) reportIssue(inner, path, file, report);
    return;
  }
  report(path, issue.message);
}

const isObject = (value: unknown): value is object => typeof value === 'object' && value !== null;

/** What a part of the file means, or nothing where the schema has already refused it. */
function part<S extends z.ZodType>(schema: S, value: unknown): z.output<S> | undefined {
  const parsed = schema.safeParse(value);
  return parsed.success ? parsed.data : undefined;
}

/** A list of parts, those that are sound, with their places in the file. */
function parts<S extends z.ZodType>(schema: S, value: unknown, most: number): { index: number; given: z.output<S> }[] {
  if (!Array.isArray(value) || value.length > most) return [];
  return value.flatMap((item, index) => {
    const given = part(schema, item);
    return given === undefined ? [] : [{ index, given }];
  });
}

/**
 * The scenario of what is sound in the file, reporting what is wrong with values taken together. Undefined where a
 * part it needs is missing; the schema has then reported that.
 */
function build(file: Record<string, unknown>, asked: Asked, report: Report): Scenario | undefined {
  const notes: string[] = [];
  const shape = scenarioSchema.shape;
  const title = part(shape.title, file.title) ?? '';
  const duration = part(shape.duration, file.duration);
  const tolerance = part(shape.tolerance, file.tolerance) ?? 0.05;
  const allowJump = part(shape.allowJump, file.allowJump) ?? false;
  const medium = mediumFrom(part(mediumSchema.optional(), file.medium));
  const givenGrid = part(gridSchema, file.grid);
  const grid = givenGrid && buildGrid(givenGrid, medium, duration, notes, report);
  const sources = buildSources(file.sources, medium, { allowJump, duration, asked, notes }, report);
  if (grid)
    for (const [n, { index, source }] of sources.entries())
      if (sources[n - 1]?.index !== index) checkInside(index, source, grid, report);
  const all = sources.map(({ source }) => source);
  const observers = buildObservers(file.observers, grid, all, report);
  const planes = buildPlanes(file.planes, grid, report);
  if (!grid || duration === undefined || all.length === 0) return undefined;

  const scenario = { title, medium, sources: all, grid, duration, observers, planes, tolerance, notes };
  noteResolution(scenario, notes);
  for (const { name, at } of observers)
    if (!all.some((source) => firstArrival([source], medium, at) < duration))
      notes.push(
        `Observer “${name}” sees nothing: the first field arrives at ${formatQuantity(firstArrival(all, medium, at), 's')}, the run ends at ${formatQuantity(duration, 's')}.`,
      );
  return scenario;
}

function mediumFrom(given: z.output<typeof mediumSchema> | undefined): Medium {
  return mediumOf(given?.relativePermittivity ?? 1, given?.relativePermeability ?? 1);
}

// ---------------------------------------------------------------------------------------------------------------- grid

function buildGrid(
  given: z.output<typeof gridSchema>,
  medium: Medium,
  duration: number | undefined,
  notes: string[],
  report: Report,
): Grid | undefined {
  const { cellSize, box } = given;
  const courant = given.courant ?? 0.99;
  const precision = given.precision ?? 'single';
  if (courant > 1) {
    const wanted = formatExact(timeStepOf({ cellSize, courant }, medium));
    const limit = formatExact(timeStepOf({ cellSize, courant: 1 }, medium));
    report(
      ['grid', 'courant'],
      `is ${courant}, a time step of ${wanted} s; these cells need at most ${limit} s (the Courant limit, courant 1); lower courant`,
    );
  }

  const boxOfWholeCells = wholeCells(box, cellSize, notes, report);
  if (!boxOfWholeCells) return undefined;
  const { to, cells } = boxOfWholeCells;

  const boundary = boundaryOf(given.boundary, cellSize, medium);
  const across = [0, 1, 2].map((a) => {
    const [low, high] = [boundary[FACES[2 * a]!], boundary[FACES[2 * a + 1]!]];
    return cells[a]! + cellsBehind(low) + cellsBehind(high);
  });
  const total = across.reduce((product, n) => product * n, 1);
  if (!(total <= MAX_CELLS[precision])) {
    report(
      ['grid', 'cellSize'],
      `makes ${count(total)} cells with the absorber; the limit in ${precision} precision is ${count(MAX_CELLS[precision])}; use larger cells or a smaller box`,
    );
    return undefined;
  }

  const timeStep = timeStepOf({ cellSize, courant }, medium);
  checkWalls(boundary, across, given.boundary, { cellSize, timeStep }, medium, report);
  if (duration !== undefined) {
    const steps = stepsOf(duration, timeStep);
    if (!(steps <= MAX_STEPS))
      report(
        ['duration'],
        `makes ${count(steps)} steps of ${formatQuantity(timeStep, 's')}; the limit is ${count(MAX_STEPS)}; shorten it or use larger cells`,
      );
    if (duration < timeStep)
      report(
        ['duration'],
        `is ${formatQuantity(duration, 's')}, less than one time step, ${formatQuantity(timeStep, 's')}; lengthen it or use smaller cells`,
      );
  }
  const gridding = given.gridding ?? 'trilinear';
  const mask = given.mask ?? 8 * Math.max(...cellSize);
  return { cellSize, courant, box: { from: box.from, to }, cells, boundary, precision, gridding, mask };
}

/** The box with its upper corner rounded outwards to whole cells. */
function wholeCells(
  box: z.output<typeof gridSchema>['box'],
  cellSize: Vec3,
  notes: string[],
  report: Report,
): (Pick<Grid, 'cells'> & { to: Vec3 }) | undefined {
  const cells: [number, number, number] = [0, 0, 0];
  const to: [number, number, number] = [...box.to];
  let sound = true;
  for (const a of [0, 1, 2] as const) {
    const exact = (box.to[a] - box.from[a]) / cellSize[a];
    const corners = `its side from ${formatQuantity(box.from[a], 'm')} to ${formatQuantity(box.to[a], 'm')}`;
    if (!(exact > 0)) {
      report(
        ['grid', 'box', 'to', a],
        `must lie above box.from along ${'xyz'[a]}; ${corners} is empty; exchange or move the corners`,
      );
      sound = false;
      continue;
    }
    cells[a] = Math.ceil(exact - CELL_SLACK);
    to[a] = box.from[a] + cells[a] * cellSize[a];
    if (cells[a] < MIN_CELLS) {
      report(
        ['grid', 'cellSize'],
        `leaves ${cells[a]} cells of the box along ${'xyz'[a]}, ${corners}; at least ${MIN_CELLS} are needed; use smaller cells or a larger box`,
      );
      sound = false;
    } else if (cells[a] - exact > CELL_SLACK)
      notes.push(
        `The box ends at ${formatQuantity(to[a], 'm')} along ${'xyz'[a]}, rounded outwards from ${formatQuantity(box.to[a], 'm')} to ${cells[a]} whole cells.`,
      );
  }
  return sound ? { cells, to } : undefined;
}

type GivenBoundary = NonNullable<z.output<typeof gridSchema>['boundary']>;
type GivenWall = Extract<GivenBoundary, { type: string }>;

function boundaryOf(given: GivenBoundary | undefined, cellSize: Vec3, medium: Medium): Record<Face, Boundary> {
  const ofFace = (face: Face, normal: Axis): Boundary => {
    const wall: GivenWall = given === undefined ? { type: 'cpml' } : 'type' in given ? given : given[face];
    switch (wall.type) {
      case 'cpml':
        return {
          type: 'cpml',
          layers: wall.layers ?? CPML_DEFAULTS.layers,
          grading: wall.grading ?? CPML_DEFAULTS.grading,
          kappaMax: wall.kappaMax ?? CPML_DEFAULTS.kappaMax,
          alphaFrequency: wall.alphaFrequency ?? defaultAlphaFrequency(cellSize[normal], medium),
          sigmaFactor: wall.sigmaFactor ?? CPML_DEFAULTS.sigmaFactor,
        };
      case 'splitPml':
        return {
          type: 'splitPml',
          layers: wall.layers ?? SPLIT_PML_DEFAULTS.layers,
          grading: wall.grading ?? SPLIT_PML_DEFAULTS.grading,
          sigmaFactor: wall.sigmaFactor ?? SPLIT_PML_DEFAULTS.sigmaFactor,
        };
      case 'higdon2':
        return {
          type: 'higdon2',
          angles: wall.angles ?? HIGDON_DEFAULTS.angles,
          damping: wall.damping ?? HIGDON_DEFAULTS.damping,
        };
      case 'liao':
        return { type: 'liao', damping: wall.damping ?? LIAO_DEFAULTS.damping };
      default:
        return wall;
    }
  };
  return {
    'x-': ofFace('x-', 0),
    'x+': ofFace('x+', 0),
    'y-': ofFace('y-', 1),
    'y+': ofFace('y+', 1),
    'z-': ofFace('z-', 2),
    'z+': ofFace('z+', 2),
  };
}

/** Berenger's σmaxΔt/ε: above it e^(σΔt/ε) magnifies rounding (src/fdtd/boundaries/splitPml.ts). */
const MOST_LOST_A_STEP = 6;

/**
 * What may stand beside a wall of Mur's second order: next to conditions with other rims, or within layers that stretch what
 * it reads along itself, it grows (test/stress/stability.test.ts).
 */
const GOES_WITH_MUR_2: ReadonlySet<Boundary['type']> = new Set(['pec', 'mur1', 'mur2']);

/** What walls ask of the lattice as a whole. */
function checkWalls(
  boundary: Record<Face, Boundary>,
  across: readonly number[],
  given: GivenBoundary | undefined,
  { cellSize, timeStep }: { readonly cellSize: Vec3; readonly timeStep: number },
  medium: Medium,
  report: Report,
): void {
  const oneForAll = given === undefined || 'type' in given;
  const told = new Set<string>();
  FACES.forEach((face, f) => {
    const wall = boundary[face];
    const path = ['grid', 'boundary', ...(oneForAll ? [] : [face])];
    const a = f >> 1;
    const tell = (key: string | null, what: string) => {
      const full = key === null ? path : [...path, key];
      if (!told.has(full.join('.'))) report(full, what);
      told.add(full.join('.'));
    };
    if (cellsRead(wall) >= across[a]!)
      tell(
        null,
        `is ${wall.type}, which reads ${cellsRead(wall)} cells inward; there are ${across[a]} cells along ${'xyz'[a]}; use smaller cells, a larger box or another boundary`,
      );
    const beside = FACES.filter((other, o) => o >> 1 !== a && !GOES_WITH_MUR_2.has(boundary[other].type));
    if (wall.type === 'mur2' && beside.length > 0)
      tell(
        null,
        `is mur2, which is unstable beside ${boundary[beside[0]!].type} (${beside.join(', ')}); it goes with ${[...GOES_WITH_MUR_2].join(', ')}; use mur1 here, or one of these there`,
      );
    if (wall.type !== 'splitPml') return;
    const each = (0.8 * (wall.grading + 1) * medium.speed * timeStep) / cellSize[a]!;
    if (wall.sigmaFactor * each > MOST_LOST_A_STEP)
      tell(
        'sigmaFactor',
        `is ${wall.sigmaFactor}, with grading ${wall.grading} a loss σmaxΔt/ε of ${formatNumber(wall.sigmaFactor * each, 3)} a step; the limit is ${MOST_LOST_A_STEP}; use ${Math.floor((10 * MOST_LOST_A_STEP) / each) / 10} or less, or a lower grading`,
      );
  });
}

/** f_α = αmax/(2πε) of αmax = 0.05/(ηh), Hz; h (m) the cell along the normal. */
function defaultAlphaFrequency(h: number, medium: Medium): number {
  return 0.05 / (medium.impedance * h) / (2 * Math.PI * medium.permittivity);
}

// ------------------------------------------------------------------------------------------------------------- sources

type GivenSource = z.output<typeof sourceSchema>;
type GivenWire = Extract<GivenSource, { type: 'wire' }>;
type GivenWaveform = NonNullable<GivenSource['current']['waveform']>;

/** What currents are held against. */
interface CurrentRules {
  readonly allowJump: boolean;
  /** s; undefined where the file's own is refused */
  readonly duration: number | undefined;
  readonly asked: Asked;
  readonly notes: string[];
}

function buildSources(
  value: unknown,
  medium: Medium,
  rules: CurrentRules,
  report: Report,
): { index: number; source: Source }[] {
  const { allowJump, notes } = rules;
  const given = parts(sourceSchema, value, LIMITS.sources);
  const names = uniqueNames(given, ({ type }) => type, 'sources', report);
  return given.flatMap(({ index, given: source }, k) => {
    const path = ['sources', index];
    const name = names[k]!;
    if (source.type === 'wire' && source.current.profile === 'sampled')
      return buildSampled(source, name, rules, path, report).map((built) => ({ index, source: built }));
    const givenWaveform = source.current.waveform;
    if (!givenWaveform) return [];
    const waveform = buildWaveform(givenWaveform, allowJump, name, [...path, 'current', 'waveform'], notes, report);
    if (!waveform) return [];
    const built = buildSource(source, name, waveform, medium, path, report);
    return built ? [{ index, source: built }] : [];
  });
}

/** The sound sources of a scenario file that need not be sound itself: where they lie. */
export function readSources(value: unknown): Source[] {
  const rules: CurrentRules = { allowJump: true, duration: undefined, asked: 'frequency', notes: [] };
  return buildSources(value, mediumOf(1, 1), rules, () => {}).map(({ source }) => source);
}

function buildSource(
  given: GivenSource,
  name: string,
  waveform: Waveform,
  medium: Medium,
  path: Path,
  report: Report,
): Source | undefined {
  if (given.type === 'dipole') {
    const { at, length } = given;
    return { type: 'dipole', name, at, direction: unit(given.direction), length, waveform };
  }
  if (given.type === 'loop') {
    const curve = circle(given.centre, unit(given.normal), given.radius);
    return { type: 'loop', name, curve, terms: [{ factor: 1, delay: 0, slowness: 0 }], waveform };
  }
  const curve = curveOf(given, path, report);
  return curve && { type: 'wire', name, curve, terms: termsOf(given.current, curve.length, medium.speed), waveform };
}

function curveOf(given: GivenWire, path: Path, report: Report): Curve | undefined {
  let sound = true;
  for (let k = 1; k < given.points.length; k++) {
    if (norm(sub(given.points[k]!, given.points[k - 1]!)) > 0) continue;
    report(
      [...path, 'points', k],
      `is the same place as point ${k - 1}; consecutive points of a wire must differ; remove one of them`,
    );
    sound = false;
  }
  return sound ? polyline(given.points) : undefined;
}

/** Of the wire's length: how far the first and last position of a sampled current may be off its ends. */
const END_SLACK = 1e-6;

/**
 * A wire whose current is given at arc lengths, straight lines between them: I(s, t) = Σ hat_m(s) w_m(t), one filament for
 * each position at which current flows, all along the same curve.
 */
function buildSampled(given: GivenWire, name: string, rules: CurrentRules, path: Path, report: Report): Source[] {
  const curve = curveOf(given, path, report);
  const stations = curve && stationsOf(given, curve, path, report);
  if (!stations) return [];
  const waveforms = given.current.phasors
    ? byFrequency(given.current.phasors, stations, name, rules, path, report)
    : byTime(given.current.samples, stations, name, rules, path, report);
  return stations.flatMap((s, m): Source[] => {
    const waveform = waveforms[m];
    const terms = [{ factor: 1, delay: 0, slowness: 0, profile: hat(stations, m) }];
    return waveform ? [{ type: 'wire', name: labelOf(name, s), curve, terms, waveform }] : [];
  });
}

const labelOf = (name: string, s: number): string => `${name}, s = ${formatQuantity(s, 'm')}`;

/** The arc lengths of a sampled current, from 0 to the wire's length; undefined where they are refused. */
function stationsOf(given: GivenWire, { length }: Curve, path: Path, report: Report): number[] | undefined {
  const { positions } = given.current;
  if (!positions) return undefined;
  const where = [...path, 'current', 'positions'];
  const slack = END_SLACK * length;
  if (Math.abs(positions[0]!) > slack || Math.abs(positions.at(-1)! - length) > slack) {
    report(
      where,
      `run from ${formatQuantity(positions[0]!, 'm')} to ${formatQuantity(positions.at(-1)!, 'm')}; they must begin at 0 and end at the wire’s length, ${formatQuantity(length, 'm')}; add the ends (with 0 A where no current flows)`,
    );
    return undefined;
  }
  const falling = positions.findIndex((s, m) => m > 0 && !(s > positions[m - 1]!));
  if (falling > 0) {
    report(
      [...where, falling],
      `is ${formatQuantity(positions[falling]!, 'm')}, not beyond the one before it; positions must rise; sort the columns`,
    );
    return undefined;
  }
  return positions.map((s, m) => (m === 0 ? 0 : m === positions.length - 1 ? length : s));
}

type GivenRows = GivenWire['current']['samples'];

/** The waveform of each station from samples in time; undefined where no current flows or one is refused. */
function byTime(
  samples: GivenRows,
  stations: readonly number[],
  name: string,
  { allowJump, notes }: CurrentRules,
  path: Path,
  report: Report,
): (Waveform | undefined)[] {
  const where = [...path, 'current', 'samples'];
  const table = rowsOf(samples, SAMPLE_ROW, stations.length, where, report);
  if (!table) return [];
  return stations.map((s, m) => {
    if (table.every((row) => row[m + 1] === 0)) return undefined;
    const column = { type: 'table' as const, samples: table.map((row): [number, number] => [row[0]!, row[m + 1]!]) };
    return buildWaveform(column, allowJump, labelOf(name, s), where, notes, report);
  });
}

/** The waveform of each station from peak phasors; undefined where no current flows or all are refused. */
function byFrequency(
  phasors: GivenRows,
  stations: readonly number[],
  name: string,
  rules: CurrentRules,
  path: Path,
  report: Report,
): (Waveform | undefined)[] {
  const where = [...path, 'current', 'phasors'];
  const table = rowsOf(phasors, PHASOR_ROW, stations.length, where, report);
  if (!table) return [];
  const frequencies = table.map(([f]) => f!);
  const falling = frequencies.findIndex((f, n) => f < 0 || (n > 0 && !(f - frequencies[n - 1]! > LEAST)));
  if (falling >= 0) {
    report(
      [...where, falling, 0],
      `is ${formatQuantity(frequencies[falling]!, 'Hz')}; frequencies must be 0 or more and rise from row to row; sort the rows`,
    );
    return [];
  }
  const turned = frequencies[0] === 0 ? stations.findIndex((_, m) => table[0]![2 * m + 2] !== 0) : -1;
  if (turned >= 0) {
    report(
      [...where, 0, 2 * turned + 2],
      `is ${table[0]![2 * turned + 2]} A, an imaginary part at 0 Hz, where a current is real; set it to 0`,
    );
    return [];
  }
  const specs = stations.map((_, m): PhasorSpec => {
    const column = (part: 0 | 1) => table.map((row) => row[1 + 2 * m + part]!);
    return { type: 'phasors', frequencies, re: column(0), im: column(1), scale: 0 };
  });
  const flows = ({ re, im }: PhasorSpec) => [...re, ...im].some((x) => Math.abs(x) > LEAST);
  if (!specs.some(flows)) {
    report(where, 'are 0 everywhere; a source needs a current; give phasors that are not 0');
    return [];
  }
  if (rules.asked === 'frequency') return specs.map((spec) => (flows(spec) ? phasorsAlone(spec) : undefined));
  const scale = pulseScale(specs.filter(flows), frequencies, name, rules, where, report);
  return specs.map((spec) => (scale !== undefined && flows(spec) ? makeWaveform({ ...spec, scale }) : undefined));
}

/** A (or Hz): less is nothing. */
const LEAST = 1 / LIMITS.magnitude;

/** Who takes phasors that make no pulse. */
const WITHOUT_PULSE = 'ask with `exact --frequencies` or `derive --steady`, which take them as they are';

/**
 * The largest current in time of a wire whose phasors make a pulse, A; undefined where they do not, which is reported: a
 * pulse needs multiples of one step, a period that holds the duration, a band that ends, and silence before t = 0.
 */
function pulseScale(
  specs: readonly PhasorSpec[],
  frequencies: readonly number[],
  name: string,
  { allowJump, duration, notes }: CurrentRules,
  where: Path,
  report: Report,
): number | undefined {
  const comb = combOf(frequencies);
  if ('reason' in comb) {
    report(
      where,
      `${comb.reason}, so no pulse is made of them; give them at equal steps from 0 Hz, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const { step, first, count } = comb;
  const spacing = formatQuantity(step, 'Hz', 4);
  if (duration !== undefined && duration * step > 1 + COMB_SLACK) {
    report(
      where,
      `are ${spacing} apart and repeat after ${formatQuantity(1 / step, 's', 4)}; the duration is ${formatQuantity(duration, 's', 4)}; give them at steps of at most ${formatQuantity(1 / duration, 'Hz', 4)}, shorten duration, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const { top, bottom, peak, jump, bend, missing } = endsOf(specs, comb);
  const [low, high] = [formatQuantity(first * step, 'Hz', 4), formatQuantity(frequencies.at(-1)!, 'Hz', 4)];
  const share = (part: number) => Number(part.toPrecision(2));
  if (top > JUMP_REFUSED) {
    report(
      where,
      `end at ${high} with ${share(top)} of the largest |f·I|; the limit is ${JUMP_REFUSED}; give higher frequencies, multiply them by the spectrum of a pulse that ends below, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  if (first > 1 && bottom > JUMP_REFUSED) {
    report(
      where,
      `begin at ${low}, ${first} times their step, with ${share(bottom)} of the largest |f·I|; the limit is ${JUMP_REFUSED}; give the frequencies below, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const direct = frequencies[0] === 0;
  if (Math.max(jump, bend) > JUMP_REFUSED && !allowJump) {
    const what =
      jump > JUMP_REFUSED
        ? `start at t = 0 with ${share(jump)} of the peak`
        : `start at t = 0 with a slope of ${share(bend)} of the steepest`;
    const remedy =
      !direct && jump > JUMP_REFUSED
        ? `give 0 Hz too, taken as 0 A now (${formatQuantity(missing, 'A', 4)} there starts one of the stations with 0)`
        : 'delay the pulse (phasors times e^(−j2πf·delay)), give finer steps where it has not ended within their period';
    report(
      where,
      `${what}; the limit is ${JUMP_REFUSED}, for nothing flows before; ${remedy}, set "allowJump": true, or ${WITHOUT_PULSE}`,
    );
    return undefined;
  }
  const parts = [
    `The current of “${name}” is the sum of ${count} lines ${spacing} apart, ${low} to ${high}, over one period, ${formatQuantity(1 / step, 's', 4)}`,
    ...(direct ? [] : ['0 Hz is not given and taken as 0 A: no charge is left behind']),
    ...(isNegligible(top) ? [] : [`its highest lines still have ${share(top)} of the largest |f·I|`]),
    ...(isNegligible(jump) ? [] : [`it starts at t = 0 with ${share(jump)} of its peak`]),
  ];
  notes.push(`${parts.join('; ')}.`);
  return peak;
}

/** Of the period: how much longer the duration may be, for what files round away. */
const COMB_SLACK = 1e-4;

/** What a row holds: its first number, how many for each station, in words. */
interface RowForm {
  readonly first: Kind;
  readonly each: number;
  readonly words: (stations: number) => string;
}

const SAMPLE_ROW: RowForm = {
  first: 'time',
  each: 1,
  words: (stations) => `an instant and ${stations} currents, one for each position`,
};

const PHASOR_ROW: RowForm = {
  first: 'frequency',
  each: 2,
  words: (stations) => `a frequency and ${2 * stations} currents, real and imaginary part for each position`,
};

/** Rows of a sampled current in SI units; undefined where one is refused. */
function rowsOf(rows: GivenRows, form: RowForm, stations: number, path: Path, report: Report): number[][] | undefined {
  const table = rows?.map((row, n) => rowOf(row, form, stations, [...path, n], report));
  return table?.some((row) => row === undefined) ? undefined : (table as number[][] | undefined);
}

/** An instant or a frequency, and the currents of one row, in SI units. */
function rowOf(
  row: readonly (number | string)[],
  { first, each, words }: RowForm,
  stations: number,
  path: Path,
  report: Report,
): number[] | undefined {
  if (row.length !== each * stations + 1) {
    report(path, `has ${row.length} numbers; it must have ${words(stations)}`);
    return undefined;
  }
  const parsed = row.map((value, n) => parseQuantity(value, n === 0 ? first : 'current'));
  const wrong = parsed.findIndex((each) => 'reason' in each || Math.abs(each.value) > LIMITS.magnitude);
  if (wrong < 0) return parsed.map((each) => (each as { value: number }).value);
  const found = parsed[wrong]!;
  const tooLarge = `is ${show(row[wrong])}; it must be at most ${LIMITS.magnitude} in SI units`;
  report([...path, wrong], 'reason' in found ? found.reason : tooLarge);
  return undefined;
}

/**
 * The current's terms factor · a(s) · w(t − delay − slowness·s): forward waves have slowness 1/v; backward ones,
 * w(t − delay − (L − s)/v), slowness −1/v and the delay L/v more.
 */
function termsOf(current: GivenWire['current'], length: number, mediumSpeed: number): WaveTerm[] {
  const profile = current.profile ?? (current.waves ? 'waves' : 'uniform');
  if (profile === 'sinusoidal')
    return [{ factor: 1, delay: 0, slowness: 0, profile: standing(length, current.wavenumber!) }];
  if (profile === 'uniform') return [{ factor: 1, delay: 0, slowness: 0 }];
  const waves = current.waves ?? [{ direction: 'forward' as const, speed: current.speed }];
  return waves
    .flatMap((wave) => bounced(wave, current.reflection, length, mediumSpeed))
    .map((wave) => termOf(wave, length));
}

/** A wave with its speed in m/s. */
interface GoingWave {
  readonly direction: 'forward' | 'backward';
  readonly speed: number;
  readonly delay: number;
  readonly factor: number;
  readonly decayLength: number | undefined;
}

function termOf({ direction, speed, delay, factor, decayLength }: GoingWave, length: number): WaveTerm {
  const slowness = 1 / speed;
  const profile = decayLength === undefined ? {} : { profile: decaying(length, decayLength, direction) };
  return direction === 'forward'
    ? { factor, delay, slowness, ...profile }
    : { factor, delay: delay + length * slowness, slowness: -slowness, ...profile };
}

/** A wave and its reflections: what arrives at an end, a way L/v later and decayed, goes back with the coefficient there. */
function bounced(
  given: NonNullable<GivenWire['current']['waves']>[number],
  reflection: GivenWire['current']['reflection'],
  length: number,
  mediumSpeed: number,
): GoingWave[] {
  const { direction, speed = 1, delay = 0, factor = 1, decayLength } = given;
  const waves: GoingWave[] = [{ direction, speed: speed * mediumSpeed, delay, factor, decayLength }];
  const left = decayLength === undefined ? 1 : exp(-length / decayLength);
  for (let n = reflection?.count ?? (reflection ? 1 : 0); n > 0; n--) {
    const last = waves.at(-1)!;
    const forward = last.direction === 'forward';
    const back = last.factor * left * ((forward ? reflection?.end : reflection?.start) ?? 0);
    if (back === 0) break;
    waves.push({
      ...last,
      direction: forward ? 'backward' : 'forward',
      delay: last.delay + length / last.speed,
      factor: back,
    });
  }
  return waves;
}

/** A vector of length 1, without overflow on the way. */
function unit(v: Vec3): Vec3 {
  const scaled = scale(v, 1 / Math.max(...v.map(Math.abs)));
  return scale(scaled, 1 / norm(scaled));
}

function buildWaveform(
  given: GivenWaveform,
  allowJumpAnywhere: boolean,
  source: string,
  path: Path,
  notes: string[],
  report: Report,
): Waveform | undefined {
  const { allowJump = allowJumpAnywhere } = given;
  let waveform: Waveform;
  try {
    const spec = specOf(given, source, notes);
    if (!spec) return undefined;
    waveform = makeWaveform(spec);
  } catch (error) {
    // What the schema lets through and no waveform can be made of: a pulse that is over before t = 0, a broken table.
    const key = given.type === 'table' ? [] : ['delay'];
    report([...path, ...key], `leaves no current: ${(error as Error).message.replace(/\.$/, '')}`);
    return undefined;
  }
  if (waveform.spec.type === 'table') noteBand(waveform, waveform.spec.times, source, notes);
  const jump = Number(waveform.jump.toPrecision(2));
  if (waveform.jump > JUMP_REFUSED && !allowJump) {
    const [key, remedy] =
      given.type === 'table'
        ? [[], 'begin the table with 0 A']
        : [['delay'], 'raise delay (8.6 sigma suffice for a Gaussian)'];
    report(
      [...path, ...key],
      `makes the current jump at t = 0 by ${jump} of its peak; the limit is ${JUMP_REFUSED}; ${remedy} or set "allowJump": true`,
    );
    return undefined;
  }
  if (waveform.jump > JUMP_NOTED)
    notes.push(
      `The current of “${source}” jumps at t = 0 by ${jump} of its peak and radiates a front that no grid resolves; raise its delay to be rid of it.`,
    );
  return waveform;
}

/** The specification in SI units with presets and defaults filled in; nothing where the schema has refused it. */
function specOf(given: GivenWaveform, source: string, notes: string[]): WaveformSpec | undefined {
  if (given.type === 'heidler') {
    if (given.terms) return { type: 'heidler', terms: given.terms };
    const { amplitude, terms } = HEIDLER_PRESETS[given.preset!];
    const gain = (given.amplitude ?? amplitude) / amplitude;
    return { type: 'heidler', terms: terms.map((term) => ({ ...term, amplitude: gain * term.amplitude })) };
  }
  if (given.type === 'rampedSine') {
    const { type, amplitude, frequency, ramp = 3, hold } = given;
    return { type, amplitude, frequency, ramp, hold };
  }
  if (given.type === 'table') return given.samples && tableSpec(given.samples, given.delay ?? 0, source, notes);
  const { allowJump: _, ...spec } = given;
  return spec;
}

/**
 * A table whose first and last current, where they are not 0 but small, are set to 0: the spline has no jumps then. One
 * that starts at t = 0 keeps its jump, as other waveforms do.
 */
function tableSpec(
  samples: readonly (readonly [number, number])[],
  delay: number,
  source: string,
  notes: string[],
): WaveformSpec {
  const times = samples.map(([t]) => t + delay);
  const currents = samples.map(([, i]) => i);
  const peak = currents.reduce((most, i) => Math.max(most, Math.abs(i)), 0);
  for (const m of times[0]! > 0 ? [0, times.length - 1] : [times.length - 1]) {
    const part = Math.abs(currents[m]!) / peak;
    if (!(part > 0 && part <= JUMP_REFUSED)) continue;
    if (part > JUMP_NOTED)
      notes.push(
        `The table of “${source}” ${m === 0 ? 'begins' : 'ends'} with ${Number(part.toPrecision(2))} of its peak, which is taken as 0.`,
      );
    currents[m] = 0;
  }
  return { type: 'table', times, currents };
}

/** What a table does between its samples is a guess where its spectrum reaches beyond what they resolve. */
function noteBand(waveform: Waveform, times: readonly number[], source: string, notes: string[]): void {
  const limit = resolved(times);
  if (waveform.highestFrequency(SIGNIFICANT) > limit)
    notes.push(
      `The samples of “${source}” resolve frequencies up to ${formatQuantity(limit, 'Hz')}, where what radiates is still above −40 dB: between them the current is a guess of the spline; sample it more finely.`,
    );
}

function checkInside(index: number, source: Source, grid: Grid, report: Report): void {
  const { from, to } = sourceBounds(source);
  const wrong = ([0, 1, 2] as const).filter(
    (a) =>
      from[a] < grid.box.from[a] + grid.cellSize[a] * (1 - CELL_SLACK) ||
      to[a] > grid.box.to[a] - grid.cellSize[a] * (1 - CELL_SLACK),
  );
  if (wrong.length === 0) return;
  const key = source.type === 'dipole' ? 'at' : source.type === 'wire' ? 'points' : 'centre';
  const reach = wrong
    .map(
      (a) =>
        `reaches from ${formatQuantity(from[a], 'm')} to ${formatQuantity(to[a], 'm')} along ${'xyz'[a]}, where the box spans ${formatQuantity(grid.box.from[a], 'm')} to ${formatQuantity(grid.box.to[a], 'm')}`,
    )
    .join(' and ');
  report(
    ['sources', index, key],
    `puts “${source.name}” outside the box or within a cell of its walls: it ${reach}; move the source or enlarge grid.box`,
  );
}

// ------------------------------------------------------------------------------------------------ observers and planes

function buildObservers(value: unknown, grid: Grid | undefined, all: readonly Source[], report: Report): Observer[] {
  const given = parts(observerSchema, value, LIMITS.observers);
  const names = uniqueNames(given, () => 'observer', 'observers', report);
  const sources = all.map((source) => ({ source, bounds: sourceBounds(source) }));
  return given.map(({ index, given: { at } }, k) => {
    const inside = grid !== undefined && at.every((x, a) => x >= grid.box.from[a]! && x <= grid.box.to[a]!);
    if (grid) {
      const places = inside ? yeeSites(grid, observerCell(grid, at)) : [at];
      if (places.some((p) => isOnSource(p, sources, CELL_SLACK * Math.max(...grid.cellSize))))
        report(
          ['observers', index, 'at'],
          `puts “${names[k]}” on a source${inside ? ' (at least one component of its Yee cell)' : ''}, where the field is infinite; move it a cell away`,
        );
    }
    return { name: names[k]!, at, inside };
  });
}

function isOnSource(p: Vec3, sources: readonly { source: Source; bounds: Bounds }[], slack: number): boolean {
  return sources.some(
    ({ source, bounds: { from, to } }) =>
      p.every((x, a) => x > from[a]! - slack && x < to[a]! + slack) && distanceToSources([source], p) < slack,
  );
}

/** Where the six components of a cell live. */
function yeeSites(grid: Grid, cell: readonly [number, number, number]): Vec3[] {
  const along = (a: Axis, offset: number) => grid.box.from[a] + (cell[a] + offset) * grid.cellSize[a];
  return (
    [
      [1, 0, 0],
      [0, 1, 0],
      [0, 0, 1],
      [0, 1, 1],
      [1, 0, 1],
      [1, 1, 0],
    ] as const
  ).map(([x, y, z]): Vec3 => [along(0, x / 2), along(1, y / 2), along(2, z / 2)]);
}

function buildPlanes(value: unknown, grid: Grid | undefined, report: Report): Plane[] {
  const given = parts(planeSchema, value, LIMITS.planes);
  const names = uniqueNames(given, () => 'plane', 'planes', report);
  return given.map(({ index, given: { normal: letter, at } }, k) => {
    const normal = 'xyz'.indexOf(letter) as Axis;
    const [from, to] = [grid?.box.from[normal] ?? at, grid?.box.to[normal] ?? at];
    if (at < from || at > to)
      report(
        ['planes', index, 'at'],
        `is ${formatQuantity(at, 'm')}; a plane must lie in the box, here ${letter} from ${formatQuantity(from, 'm')} to ${formatQuantity(to, 'm')}; move it or enlarge grid.box`,
      );
    return { name: names[k]!, normal, at };
  });
}

/** The names of things, those without one numbered by their sort: “wire 1”, “wire 2”. Names given twice are reported. */
function uniqueNames<T extends { name?: string | undefined }>(
  things: readonly { index: number; given: T }[],
  sort: (thing: T) => string,
  section: string,
  report: Report,
): string[] {
  const taken = new Map<string, number>();
  for (const { index, given } of things) {
    if (given.name === undefined) continue;
    const first = taken.get(given.name);
    if (first === undefined) taken.set(given.name, index);
    else
      report(
        [section, index, 'name'],
        `is ${show(given.name)}, the name of ${section}.${first} too; names must be unique; choose another`,
      );
  }
  const counts = new Map<string, number>();
  return things.map(({ given }) => {
    if (given.name !== undefined) return given.name;
    const word = sort(given);
    let n = counts.get(word) ?? 0;
    let name: string;
    do name = `${word} ${++n}`;
    while (taken.has(name));
    counts.set(word, n);
    return name;
  });
}

// --------------------------------------------------------------------------------------------------------------- notes

function noteResolution(scenario: Omit<Scenario, 'notes'>, notes: string[]): void {
  const coarsest = Math.max(...scenario.grid.cellSize);
  for (const source of scenario.sources) {
    const size = source.type === 'dipole' ? source.length : source.curve.length;
    if (source.type !== 'dipole' && size < coarsest)
      notes.push(
        `Source “${source.name}” is ${formatQuantity(size, 'm')} long, less than one cell of ${formatQuantity(coarsest, 'm')}: the grid sees it as a blur.`,
      );
  }
  const { frequency, wavelength, cells } = shortestWavelength(scenario);
  if (cells < CELLS_PER_WAVELENGTH_NOTED)
    notes.push(
      `The shortest significant wavelength, ${formatQuantity(wavelength, 'm')} at ${formatQuantity(frequency, 'Hz')} (−40 dB of what radiates), is ${Number(cells.toPrecision(2))} cells; ${CELLS_PER_WAVELENGTH_NOTED} or more are usual.`,
    );
}

/** A number of cells or steps for people. */
function count(n: number): string {
  return n < 1e6 ? String(n) : Number.isFinite(n) ? `${Number((n / 1e6).toPrecision(3))} million` : 'too many';
}

/** A number with the four digits that tell a value from its limit. */
function formatExact(x: number): string {
  return String(Number(x.toPrecision(4)));
}
