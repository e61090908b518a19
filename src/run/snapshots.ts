import { memoryNeeded } from '../fdtd/layout.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Axis, Plane, Scenario, Vec3 } from '../scenario/model.ts';
import type { Side, Slab, SnapshotFrame, SnapshotRegion } from '../trace/snapshots.ts';
import { instantsOf, samplePoints } from '../trace/trace.ts';
import { CELL_RATE, GRID_RATE } from './answers.ts';
import { runGrid } from './gridRun.ts';
import { exactField } from './integrals.ts';
import { layerOf, ON_SOURCE } from './planes.ts';
import type { Team } from './pool.ts';
import { type Progress, ProgressMeter } from './progress.ts';
import { boxProblem, type Question } from './question.ts';

/** Which cells of a region of the box are kept. */
export interface KeptCells {
  /** of the first one */
  readonly first: Triple;
  /** from one to the next, in cells */
  readonly stride: number;
}

type Triple = readonly [number, number, number];
export type CellRegion = SnapshotRegion & KeptCells;

/** Cells kept along a side, at most, unless a stride is asked for: a plane's, and the box's. */
const ALONG_PLANE = 100;
const ALONG_BOX = 40;

const AXES: readonly Axis[] = [0, 1, 2];

/** A plane, on the layer of cells that pictures show too. @param stride in cells; absent: as fits `ALONG_PLANE` */
export function planeRegion({ grid }: Scenario, plane: Plane, stride?: number): CellRegion {
  const across = AXES.filter((a) => a !== plane.normal);
  const step = stride ?? Math.ceil(Math.max(...across.map((a) => grid.cells[a]!)) / ALONG_PLANE);
  return region(grid, plane.name, step, plane);
}

/** All of the box. @param stride in cells; absent: as fits `ALONG_BOX` */
export function boxRegion({ grid }: Scenario, stride?: number): CellRegion {
  return region(grid, 'box', stride ?? Math.ceil(Math.max(...grid.cells) / ALONG_BOX));
}

function region(grid: Scenario['grid'], name: string, stride: number, plane?: Plane): CellRegion {
  const each = (of: (a: Axis) => number): [number, number, number] => [of(0), of(1), of(2)];
  const first = each((a) => (a === plane?.normal ? layerOf(grid, plane) : 0));
  return {
    name,
    first,
    stride,
    counts: each((a) => (a === plane?.normal ? 1 : Math.ceil(grid.cells[a]! / stride))),
    origin: each((a) => grid.box.from[a]! + first[a]! * grid.cellSize[a]!),
    spacing: each((a) => stride * grid.cellSize[a]!),
    cellSize: grid.cellSize,
  };
}

/** Instants of snapshots: at most `count`, evenly over the run, its end among them. */
export function frameOf({ steps, timeStep, scenario }: Question, count: number): SnapshotFrame & { every: number } {
  const every = Math.max(1, Math.ceil(steps / count));
  return { every, instants: instantsOf(steps, timeStep, every), precision: scenario.grid.precision };
}

/** Bytes of samples that one march of the grid may leave, and that a slab may hold. */
export const MARCH_BYTES = 256 * 2 ** 20;
const SLAB_BYTES = 8 * 2 ** 20;

/**
 * Both solvers' fields in regions of the box, slab by slab, so that memory holds one march's samples (`MARCH_BYTES`; where
 * there are more the grid marches again) and one slab of the exact field, however large the regions are. Runs of their own:
 * keeping fields changes no number of the comparison.
 * @param take is given each slab, with the number of its region, in no promised order
 * @throws WorkerDied; what `take` throws
 */
export async function takeSnapshots(
  team: Team,
  question: Question,
  json: unknown,
  regions: readonly CellRegion[],
  { every, instants }: ReturnType<typeof frameOf>,
  take: (region: number, slab: Slab) => void,
  onProgress: (progress: Progress) => void,
  marchBytes = MARCH_BYTES,
): Promise<void> {
  const { scenario, steps } = question;
  const cellBytes = 6 * 8 * instants.count;
  const slabs = regions.flatMap((each, n) => slabsOf(each, n, Math.max(1, Math.floor(SLAB_BYTES / cellBytes))));
  const marches = grouped(slabs, marchBytes / cellBytes);
  const cells = slabs.reduce((sum, slab) => sum + slab.cells.length / 3, 0);
  const march = (memoryNeeded(boxProblem(question, [])).cells * steps) / GRID_RATE;
  const meter = new ProgressMeter(onProgress, [
    ['the grid, for the snapshots', marches.length * march],
    ['the exact field, for the snapshots', cells / CELL_RATE],
  ]);
  meter.enter(0);
  for (const [n, group] of marches.entries()) {
    const joined = new Int32Array(group.reduce((sum, slab) => sum + slab.cells.length, 0));
    let end = 0;
    for (const { cells: own } of group) {
      joined.set(own, end);
      end += own.length;
    }
    const problem = boxProblem(question, [{ cell: joined, every }]);
    const { samples } = await runGrid(team, problem, null, (done) => meter.at((n + done / steps) / marches.length));
    let from = 0;
    for (const slab of group) {
      const to = from + (slab.cells.length / 3) * 6 * instants.count;
      take(slab.region, placed(slab, 'grid', samples[0]!.subarray(from, to)));
      from = to;
    }
  }
  meter.enter(1);
  let done = 0;
  for (const slab of slabs) {
    const values = await exactSlab(team, scenario, json, slab, instants, (count) => {
      done += count;
      meter.at(done / cells);
    });
    take(slab.region, placed(slab, 'exact', values));
  }
}

interface CellSlab extends Pick<Slab, 'layer' | 'row' | 'rows'> {
  readonly region: number;
  /** i, j, k of its cells */
  readonly cells: Int32Array;
}

const placed = ({ layer, row, rows }: CellSlab, side: Side, values: Float64Array): Slab => ({
  side,
  layer,
  row,
  rows,
  values,
});

/** Whole rows of at most `most` cells, at least one row. */
function slabsOf({ first, stride, counts }: CellRegion, region: number, most: number): CellSlab[] {
  const [nx, ny, nz] = counts;
  const rows = Math.min(ny, Math.max(1, Math.floor(most / nx)));
  const slabs: CellSlab[] = [];
  for (let layer = 0; layer < nz; layer++)
    for (let row = 0; row < ny; row += rows) {
      const here = Math.min(rows, ny - row);
      const cells = new Int32Array(3 * here * nx);
      for (let j = 0, n = 0; j < here; j++)
        for (let i = 0; i < nx; i++, n += 3) {
          cells[n] = first[0] + i * stride;
          cells[n + 1] = first[1] + (row + j) * stride;
          cells[n + 2] = first[2] + layer * stride;
        }
      slabs.push({ region, layer, row, rows: here, cells });
    }
  return slabs;
}

/** Consecutive slabs of at most `most` cells together, at least one. */
function grouped(slabs: readonly CellSlab[], most: number): CellSlab[][] {
  const groups: CellSlab[][] = [];
  let size = Infinity;
  for (const slab of slabs) {
    const count = slab.cells.length / 3;
    if (size + count > most) {
      groups.push([]);
      size = 0;
    }
    groups.at(-1)!.push(slab);
    size += count;
  }
  return groups;
}

/** The exact field in a slab; NaN in cells on a source. */
async function exactSlab(
  team: Team,
  scenario: Scenario,
  json: unknown,
  { cells }: CellSlab,
  instants: SnapshotFrame['instants'],
  onCells: (count: number) => void,
): Promise<Float64Array> {
  const count = cells.length / 3;
  const sound = Array.from({ length: count }, (_, p) => p).filter((p) => !onSource(scenario, cells, p));
  onCells(count - sound.length);
  const part = Int32Array.from(sound.flatMap((p) => [...cells.subarray(3 * p, 3 * p + 3)]));
  const { history } = await exactField(team, scenario, json, part, instants, 'best', onCells);
  const width = 6 * instants.count;
  const values = new Float64Array(count * width).fill(Number.NaN);
  sound.forEach((p, n) => {
    values.set(history.values.subarray(n * width, (n + 1) * width), p * width);
  });
  return values;
}

/** Whether a site of a cell lies on a source. */
function onSource({ grid, sources }: Scenario, cells: Int32Array, p: number): boolean {
  const { position } = samplePoints(cells.subarray(3 * p, 3 * p + 3), grid.box.from, grid.cellSize);
  const site = (c: number): Vec3 => [position[3 * c]!, position[3 * c + 1]!, position[3 * c + 2]!];
  if (distanceToSources(sources, site(0)) > 2 * Math.max(...grid.cellSize)) return false;
  const reach = ON_SOURCE * Math.min(...grid.cellSize);
  return COMPONENT_INDICES.some((c) => distanceToSources(sources, site(c)) < reach);
}

const COMPONENT_INDICES = [0, 1, 2, 3, 4, 5];
