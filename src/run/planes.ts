import { packProblem } from '../fdtd/pack.ts';
import { prepareGridRun } from '../fdtd/run.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Axis, Plane, Scenario, Vec3 } from '../scenario/model.ts';
import { type Instants, instantsOf, STAGGER, samplePoints } from '../trace/trace.ts';
import { withFollowers } from './gridRun.ts';
import type { Team } from './pool.ts';
import { boxProblem, type Question } from './question.ts';

/**
 * Fields on slice planes, for pictures: what both solvers say at every cell (or every n-th) of a plane, at some sixty to a
 * hundred instants. Recorded by runs of their own, so that looking at a field changes no number of the comparison.
 *
 * A slice is sampled on the layer of Yee cells whose nodes lie nearest to the plane. Six components are read there, and the
 * three that are staggered along the normal once more one layer below: with them all components can be averaged to
 * one point of the plane.
 */
export interface Slice {
  readonly name: string;
  readonly normal: Axis;
  /** axes of the first and the second index */
  readonly axes: readonly [Axis, Axis];
  /** node index along the normal */
  readonly layer: number;
  /** cells from one sample to the next */
  readonly stride: number;
  readonly nu: number;
  readonly nv: number;
  /** i, j, k of nu·nv cells, first axis fastest */
  readonly cells: Int32Array;
  /** 1 where a site lies on a source, so that there is no field to show */
  readonly hole: Uint8Array;
}

/** Samples of a cell: six components, and three of them one layer below. */
export const CHANNELS = 9;

/** Samples along a side of a slice, at most: more than a pane has pixels to show tells nothing. */
const MOST_SAMPLES = 100;

/** Instants of a film. */
const FRAMES = 100;

/** In cells. Nearer to a source than this a site's field is the source's own infinity. */
export const ON_SOURCE = 0.3;

/** Components that are staggered along an axis, ascending. */
export function staggeredAlong(axis: Axis): number[] {
  return [0, 1, 2, 3, 4, 5].filter((c) => STAGGER[c]![axis] > 0);
}

/** The layer of nodes nearest to a plane that has a layer of cells above and one below. */
export function layerOf({ box, cells, cellSize }: Scenario['grid'], { normal, at }: Plane): number {
  return Math.min(Math.max(Math.round((at - box.from[normal]) / cellSize[normal]), 1), cells[normal] - 1);
}

/** The slice that shows a plane of the scenario. */
export function sliceOf({ grid, sources }: Scenario, plane: Plane): Slice {
  const { cells, cellSize, box } = grid;
  const { name, normal } = plane;
  const [u, v] = ([0, 1, 2] as Axis[]).filter((a) => a !== normal) as [Axis, Axis];
  const layer = layerOf(grid, plane);
  const stride = Math.ceil(Math.max(cells[u], cells[v]) / MOST_SAMPLES);
  const nu = Math.ceil(cells[u] / stride);
  const nv = Math.ceil(cells[v] / stride);
  const list = new Int32Array(3 * nu * nv);
  for (let j = 0, n = 0; j < nv; j++)
    for (let i = 0; i < nu; i++, n += 3) {
      list[n + u] = i * stride;
      list[n + v] = j * stride;
      list[n + normal] = layer;
    }
  const slice = { name, normal, axes: [u, v], layer, stride, nu, nv, cells: list } as const;
  const sites = [samplePoints(list, box.from, cellSize), samplePoints(below(slice), box.from, cellSize)];
  const reach = ON_SOURCE * Math.min(...cellSize);
  const near = 2 * Math.max(...cellSize);
  const hole = Uint8Array.from({ length: nu * nv }, (_, p) => {
    const site = (of: number, c: number): Vec3 => {
      const { position } = sites[of]!;
      const n = (p * 6 + c) * 3;
      return [position[n]!, position[n + 1]!, position[n + 2]!];
    };
    if (distanceToSources(sources, site(0, 0)) > near) return 0;
    return [0, 1].some((of) => [0, 1, 2, 3, 4, 5].some((c) => distanceToSources(sources, site(of, c)) < reach)) ? 1 : 0;
  });
  return { ...slice, hole };
}

/** The same cells one layer below. */
function below({ cells, normal }: Pick<Slice, 'cells' | 'normal'>): Int32Array {
  return cells.map((index, n) => (n % 3 === normal ? index - 1 : index));
}

/** Steps between two pictures of a film, and their instants. */
export function filmOf({ steps, timeStep }: Question): { readonly every: number; readonly instants: Instants } {
  const every = Math.ceil(steps / FRAMES);
  return { every, instants: instantsOf(steps, timeStep, every) };
}

/** New pictures of all slices: data[slice][(frame·CHANNELS + channel)·cells + cell], V/m and A/m, frames from `first`. */
export interface GridFrames {
  readonly first: number;
  readonly count: number;
  readonly slices: readonly Float32Array[];
}

/**
 * Marches the box once and hands over pictures of the slices as they come.
 * @param cells further cells to be traced at every step: the observers'
 * @param problemOf the lattice to march: the box with its walls, unless another is given
 * @returns the traced cells' samples: values[(point·6 + component)·steps + n]
 */
export async function filmGrid(
  team: Team,
  question: Question,
  slices: readonly Slice[],
  cells: Int32Array,
  onFrames: (frames: GridFrames) => void,
  problemOf: typeof boxProblem = boxProblem,
): Promise<Float64Array> {
  const { every } = filmOf(question);
  const all = slices.flatMap((slice) => [slice.cells, below(slice)]);
  const joined = new Int32Array(all.reduce((sum, list) => sum + list.length, 0));
  let at = 0;
  for (const list of all) {
    joined.set(list, at);
    at += list.length;
  }
  const problem = problemOf(question, [
    { cell: joined, every },
    ...(cells.length > 0 ? [{ cell: cells, every: 1 }] : []),
  ]);
  const shapes = slices.map(({ nu, nv, normal }) => ({ cells: nu * nv, normal }));
  const packed = packProblem(problem);
  const onEvent = (event: unknown) => onFrames(event as GridFrames);
  if (team.threads === 1) return await team.run('filmAlone', [packed, shapes], onEvent);
  const { problem: _, region: __, ...prepared } = prepareGridRun(problem, { threads: team.threads });
  const leader = team.run('leadFilm', [packed, prepared, shapes], onEvent);
  return await withFollowers(team, prepared.setup, leader);
}

/** A slice as the worker that leads knows it. */
export interface SliceShape {
  readonly cells: number;
  readonly normal: Axis;
}

/** Turns samples of a film, cell by cell, into pictures: the frames from `first` to `taken`. */
export function framesOf(
  values: Float64Array,
  count: number,
  first: number,
  taken: number,
  shapes: readonly SliceShape[],
): GridFrames {
  let point = 0;
  const slices = shapes.map(({ cells, normal }) => {
    const data = new Float32Array((taken - first) * CHANNELS * cells);
    const lower = staggeredAlong(normal);
    for (let channel = 0; channel < CHANNELS; channel++) {
      const component = channel < 6 ? channel : lower[channel - 6]!;
      const from = point + (channel < 6 ? 0 : cells);
      for (let cell = 0; cell < cells; cell++) {
        const line = ((from + cell) * 6 + component) * count;
        for (let frame = first; frame < taken; frame++)
          data[((frame - first) * CHANNELS + channel) * cells + cell] = values[line + frame]!;
      }
    }
    point += 2 * cells;
    return data;
  });
  return { first, count: taken - first, slices };
}

/** Cells of a slice that a worker evaluates at a time. */
const CELLS_A_TASK = 60;

/**
 * The exact field (or, with `gridded`, that of the gridded currents) at cells of a slice, piece by piece as they come.
 * @param chosen indices into the slice's cells, in the order in which they are wanted
 * @param onPiece is given the cells of a piece and data[(frame·CHANNELS + channel)·cells + cell]
 */
export async function filmExact(
  team: Team,
  json: unknown,
  slice: Slice,
  instants: Instants,
  chosen: readonly number[],
  of: 'designed' | 'gridded',
  onPiece: (cells: readonly number[], data: Float32Array) => void,
): Promise<void> {
  const sound = chosen.filter((cell) => slice.hole[cell] === 0);
  const starts = Array.from({ length: Math.ceil(sound.length / CELLS_A_TASK) }, (_, n) => n * CELLS_A_TASK);
  await Promise.all(
    starts.map(async (start) => {
      const part = sound.slice(start, start + CELLS_A_TASK);
      const cells = Int32Array.from(part.flatMap((p) => [...slice.cells.subarray(3 * p, 3 * p + 3)]));
      onPiece(part, await team.run('filmExact', [json, cells, slice.normal, instants, of]));
    }),
  );
}

/** The cells of a piece and those below them, as sample points are counted by `framesOf`. */
export function withBelow(cells: Int32Array, normal: Axis): Int32Array {
  const both = new Int32Array(2 * cells.length);
  both.set(cells);
  both.set(below({ cells, normal }), cells.length);
  return both;
}
