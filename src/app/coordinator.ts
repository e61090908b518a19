/**
 * One run, off the page's own thread: films of the planes first, so that something moves at once, then the comparison,
 * then what the planes still lack. It shares the work out to a team of further workers.
 */
import { memoryLimit, threadsAvailable } from '#platform';
import type { Result } from '../compare/result.ts';
import { observerTraces } from '../files/traces.ts';
import { type Findings, tracesOf } from '../report/folder.ts';
import { compareSolvers, Refusal } from '../run/compare.ts';
import { planFreeSpace } from '../run/freeSpace.ts';
import { exactField } from '../run/integrals.ts';
import { CHANNELS, filmExact, filmGrid, filmOf, type GridFrames } from '../run/planes.ts';
import { Team } from '../run/pool.ts';
import { boxProblem, type Question, questionOf } from '../run/question.ts';
import { lastArrival } from '../scenario/distance.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Plane, Scenario } from '../scenario/model.ts';
import { cellCentre, observerCell } from '../scenario/sites.ts';
import type { TrustMap } from '../scene/film.ts';
import { type ShownSlice, shownSlice } from '../scene/slices.ts';
import { type Instants, instantsOf } from '../trace/trace.ts';
import { heed } from './heed.ts';
import { type Report, type Request, requestSchema } from './messages.ts';
import { potentialsOn } from './potentials.ts';

const tell = (report: Report, transfer: Transferable[] = []) => postMessage(report, { transfer });

/** What the run knows that later requests need. */
interface Run {
  readonly json: unknown;
  readonly scenario: Scenario;
  readonly question: Question;
  readonly team: Team;
  films: readonly Film[];
  findings?: Findings;
}

/** The films of one slice: data[(frame·CHANNELS + channel)·cells + cell]. */
interface Film {
  readonly slice: ShownSlice;
  readonly instants: Instants;
  readonly grid: Float32Array;
  readonly exact: Float32Array;
}

let current: Run | undefined;
let queue: Promise<void> = Promise.resolve();
/** the planes that were asked for last, until their turn comes: earlier ones are not begun */
let wanted: Request | undefined;

heed(
  requestSchema,
  (request) => {
    if (request.kind === 'planes') wanted = request;
    queue = queue.then(() => answer(request)).catch(fail);
  },
  fail,
);

function fail(error: unknown): void {
  if (error instanceof Refusal) tell({ kind: 'refused', problems: error.problems });
  else tell({ kind: 'failed', message: (error as Error)?.message ?? String(error) });
}

async function answer(request: Request): Promise<void> {
  switch (request.kind) {
    case 'run':
      return await run(request.scenario, request.planes);
    case 'planes': {
      if (request !== wanted) return;
      wanted = undefined;
      const started = performance.now();
      if (current) await planes(current, request.planes, (stage, fraction) => progress(started, stage, fraction));
      return done();
    }
    case 'potentials': {
      const film = current?.films[request.slice];
      if (!current || !film || request.frame >= film.instants.count) return;
      const { slice, frame } = request;
      const values = potentialsOn(current.scenario, film.slice, film.instants.E[frame]!);
      tell({ kind: 'potentials', slice, frame, values }, [values.buffer]);
    }
  }
}

/** How far the whole is, with the time it still takes if it goes on as it has. */
function progress(started: number, stage: string, fraction: number): void {
  const elapsed = (performance.now() - started) / 1000;
  const known = fraction > 0.05 && elapsed > 0.5;
  tell({ kind: 'progress', stage, fraction, ...(known ? { secondsLeft: (elapsed / fraction) * (1 - fraction) } : {}) });
}

/** Parts of the whole, as the progress bar shows them. */
const SHARES = { films: 0.12, comparison: 0.68, planes: 0.2 } as const;

async function run(json: unknown, planesShown: readonly Plane[]): Promise<void> {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { scenario } = loaded;
  const question = questionOf(scenario);
  await current?.team.end();
  const team = new Team(threadsAvailable());
  current = { json, scenario, question, team, films: [] };
  const started = performance.now();
  const stage = (from: number, share: number) => (name: string, fraction: number) =>
    progress(started, name, from + share * fraction);

  await firstLook(current, planesShown, stage(0, SHARES.films));
  const comparing = stage(SHARES.films, SHARES.comparison);
  const { result, signals, outside, spectra } = await compareSolvers(json, {
    onProgress: ({ stage: name, fraction }) => comparing(name, fraction),
  });
  current.findings = { result, signals, outside, spectra };
  tell({ kind: 'result', result, traces: tracesOf(current.findings), spectra });
  await finishPlanes(current, stage(1 - SHARES.planes, SHARES.planes));
  done();
}

/** Everything that was asked for is there. */
function done(): void {
  if (!wanted) tell({ kind: 'done' });
}

async function planes(run: Run, shown: readonly Plane[], onStage: Stage): Promise<void> {
  await firstLook(run, shown, (name, fraction) => onStage(name, 0.4 * fraction));
  await finishPlanes(run, (name, fraction) => onStage(name, 0.4 + 0.6 * fraction));
}

type Stage = (name: string, fraction: number) => void;

/** The grid's film, the observers' traces, and a coarse view of the exact field. */
async function firstLook(run: Run, shown: readonly Plane[], onStage: Stage): Promise<void> {
  const { json, scenario, question, team } = run;
  const { every, instants } = filmOf(question);
  const slices = shown.map((plane) => shownSlice(scenario, plane));
  run.films = slices.map((slice) => {
    const size = instants.count * CHANNELS * slice.nu * slice.nv;
    return {
      slice,
      instants,
      grid: new Float32Array(size).fill(Number.NaN),
      exact: new Float32Array(size).fill(Number.NaN),
    };
  });
  tell({ kind: 'film', slices, instants, every });

  const stage = 'the grid, for the pictures';
  onStage(stage, 0);
  const inside = scenario.observers.filter((observer) => observer.inside);
  const cells = Int32Array.from(inside.flatMap(({ at }) => observerCell(scenario.grid, at)));
  const traced = await filmGrid(team, question, slices, cells, (frames) => {
    keep(run.films, frames);
    onStage(stage, (0.7 * (frames.first + frames.count)) / instants.count);
    tell(
      { kind: 'grid', ...frames },
      frames.slices.map((data) => data.buffer as ArrayBuffer),
    );
  });
  if (inside.length > 0) {
    const times = instantsOf(question.steps, question.timeStep);
    const { history } = await exactField(team, scenario, json, cells, times, 'best', () => {});
    const grid = { ...history, values: traced };
    tell({
      kind: 'traces',
      traces: inside.flatMap(({ name }, p) => observerTraces(name, { grid, exact: history }, p)),
    });
  }
  onStage('the exact field, coarsely', 0.75);
  await Promise.all(run.films.map((film, n) => exact(run, film, n, coarseCells(film.slice), COARSE)));
}

function keep(films: readonly Film[], { first, slices }: GridFrames): void {
  slices.forEach((data, n) => {
    const { grid, slice } = films[n]!;
    grid.set(data, first * CHANNELS * slice.nu * slice.nv);
  });
}

/** Along both axes of a slice the first look shows every so many-th cell. */
const COARSE = 4;

function coarseCells({ nu, nv }: ShownSlice): number[] {
  const cells: number[] = [];
  for (let j = COARSE >> 1; j < nv + (COARSE >> 1); j += COARSE)
    for (let i = COARSE >> 1; i < nu + (COARSE >> 1); i += COARSE)
      cells.push(Math.min(j, nv - 1) * nu + Math.min(i, nu - 1));
  return [...new Set(cells)];
}

async function exact(
  run: Run,
  film: Film,
  index: number,
  cells: readonly number[],
  coarse: number,
  onCells: (cells: number) => void = () => {},
): Promise<void> {
  await filmExact(run.team, run.json, film.slice, film.instants, cells, 'designed', (part, data) => {
    if (coarse === 1) scatter(film.exact, film.slice, film.instants.count, part, data);
    onCells(part.length);
    tell({ kind: 'exact', slice: index, cells: part, coarse, data }, [data.buffer as ArrayBuffer]);
  });
}

function scatter(
  to: Float32Array,
  { nu, nv }: ShownSlice,
  frames: number,
  cells: readonly number[],
  data: Float32Array,
): void {
  const all = nu * nv;
  for (let line = 0; line < frames * CHANNELS; line++)
    for (let n = 0; n < cells.length; n++) to[line * all + cells[n]!] = data[line * cells.length + n]!;
}

/** The exact field at every cell, from the middle outwards; then what the planes' errors are, and what makes them. */
async function finishPlanes(run: Run, onStage: Stage): Promise<void> {
  const stage = 'the exact field on the planes';
  const total = run.films.reduce((sum, { slice }) => sum + slice.nu * slice.nv, 0);
  let done = 0;
  await Promise.all(
    run.films.map((film, n) => {
      const { nu, nv } = film.slice;
      const cells = Array.from({ length: nu * nv }, (_, p) => p);
      return exact(run, film, n, cells, 1, (count) => {
        done += count;
        onStage(stage, (0.6 * done) / total);
      });
    }),
  );
  tell({ kind: 'exactKnown' });
  await trust(run, onStage);
}

/** The trust map: point errors at every cell, and at every few the parts they are made of. */
async function trust(run: Run, onStage: Stage): Promise<void> {
  const { scenario, question, findings } = run;
  if (!findings) return;
  const maps = run.films.map((film) => pointErrors(scenario, film, floorOf(findings.result)));
  maps.forEach((map, slice) => {
    tell({ kind: 'trust', slice, map });
  });
  // Where the comparison had no room for it there is none here, and the parts are not told apart.
  if (!findings.signals?.free) return;
  const stage = 'which part of the error is the largest, on the planes';
  onStage(stage, 0.65);
  const freeFilms = run.films.map(({ grid }) => new Float32Array(grid.length));
  await filmGrid(
    run.team,
    question,
    run.films.map(({ slice }) => slice),
    new Int32Array(0),
    ({ first, count, slices }) => {
      slices.forEach((data, n) => {
        freeFilms[n]!.set(data, (first * data.length) / count);
      });
    },
    freeProblem,
  );
  onStage(stage, 0.85);
  await Promise.all(
    run.films.map(async (film, n) => {
      const map = maps[n]!;
      // Beside a source a site may lie on an edge that carries its current.
      const clear = 2 * Math.max(...scenario.grid.cellSize);
      const cells = coarseCells(film.slice).filter((p) => film.slice.distance[p]! > clear);
      await filmExact(run.team, run.json, film.slice, film.instants, cells, 'gridded', (part, data) => {
        largestParts(film, freeFilms[n]!, part, data, map);
        tell({ kind: 'trust', slice: n, map });
      });
    }),
  );
}

/** The lattice without walls, for a film of it. */
const freeProblem: typeof boxProblem = (question, samples) => {
  const plan = planFreeSpace(boxProblem(question, samples), memoryLimit());
  if (!plan) throw new Error('The grid without walls does not fit beside the films of the planes: show fewer planes.');
  return plan.problem;
};

/** What rounding leaves of E anywhere, V/m: the total's floor, which is relative to the exact field. */
function floorOf({ budget, norms }: Result): number {
  return (budget.total.floor ?? 0) * (norms.E.scale?.L2 ?? 0) * Math.sqrt(3);
}

/** Still radiating: 1 % of the peak, as in the comparison. */
const ACTIVE = 0.01;

/** e_F(p) = √(Σ |grid − exact|²)/√(Σ |exact|²) at every cell, over the film's instants; NaN where it does not count. */
function pointErrors(scenario: Scenario, { slice, instants, grid, exact: x }: Film, floor: number): TrustMap {
  const { sources, medium } = scenario;
  const all = slice.nu * slice.nv;
  const frames = instants.count;
  const sums = [0, 3].map(() => ({ difference: new Float64Array(all), energy: new Float64Array(all) }));
  for (let frame = 0; frame < frames; frame++)
    for (let channel = 0; channel < 6; channel++) {
      const { difference, energy } = sums[channel < 3 ? 0 : 1]!;
      const line = (frame * CHANNELS + channel) * all;
      for (let p = 0; p < all; p++) {
        const e = x[line + p]!;
        const d = grid[line + p]! - e;
        difference[p]! += d * d;
        energy[p]! += e * e;
      }
    }
  const late = Uint8Array.from({ length: all }, (_, p) =>
    instants.E[frames - 1]! >= lastArrival(sources, medium, cellCentre(scenario.grid, slice.cells, p), ACTIVE) ? 0 : 1,
  );
  const [E, H] = sums.map(({ difference, energy }, field) =>
    Float32Array.from({ length: all }, (_, p) => {
      const least = (10 * floor) / (field === 0 ? 1 : medium.impedance);
      if (late[p] || !(energy[p]! > frames * least * least)) return Number.NaN;
      return Math.sqrt(difference[p]! / energy[p]!);
    }),
  );
  return { E: E!, H: H!, largest: new Float32Array(all).fill(Number.NaN) };
}

/** ⟨part, total⟩ of E for boundary, lattice and gridding; the largest of them at each of the cells and around it. */
function largestParts(
  { slice, instants, grid, exact: x }: Film,
  free: Float32Array,
  cells: readonly number[],
  gridded: Float32Array,
  map: TrustMap,
): void {
  const { nu, nv } = slice;
  const all = nu * nv;
  cells.forEach((p, n) => {
    if (Number.isNaN(map.E[p]!)) return;
    const shares = [0, 0, 0];
    for (let frame = 0; frame < instants.count; frame++)
      for (let channel = 0; channel < 3; channel++) {
        const line = frame * CHANNELS + channel;
        const at = line * all + p;
        const ofEdges = gridded[line * cells.length + n]!;
        const total = grid[at]! - x[at]!;
        shares[0]! += (grid[at]! - free[at]!) * total;
        shares[1]! += (free[at]! - ofEdges) * total;
        shares[2]! += (ofEdges - x[at]!) * total;
      }
    const largest = shares.indexOf(Math.max(...shares));
    const [i0, j0] = [Math.floor((p % nu) / COARSE) * COARSE, Math.floor(p / nu / COARSE) * COARSE];
    for (let j = j0; j < Math.min(nv, j0 + COARSE); j++)
      for (let i = i0; i < Math.min(nu, i0 + COARSE); i++)
        if (!Number.isNaN(map.E[j * nu + i]!)) map.largest[j * nu + i] = largest;
  });
}
