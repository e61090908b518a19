import { type Axis, type Boundary, FACES, type Face } from '../scenario/model.ts';
import { cellsBehind, cellsRead } from '../scenario/walls.ts';
import { type FaceLattice, PLAIN, type Stretch, type Wall } from './boundaries/boundary.ts';
import { methodOf } from './boundaries/catalogue.ts';
import {
  ADDRESS_LIMIT,
  BUILDS,
  type BuildSize,
  FIELDS,
  type GridKernel,
  hasFusedMultiplyAdd,
  VECTOR,
  WINDOW_BYTES,
} from './kernel.ts';
import type { GridProblem } from './problem.ts';
import { type WallLayout, wallLayout, writeWalls } from './wallTables.ts';

/** Faces by axis: the low one and the high one. */
export const FACES_OF = [
  ['x-', 'x+'],
  ['y-', 'y+'],
  ['z-', 'z+'],
] as const satisfies readonly (readonly [Face, Face])[];

export const AXES = [0, 1, 2] as const;

/**
 * Where everything of one run lies in the kernel's memory: numbers only, so that it can be sent to other threads.
 * Addresses and sizes in bytes. Cells of the lattice are counted from its own corner: cell `offset` of the lattice is
 * cell (0, 0, 0) of the working box.
 */
export interface Layout {
  readonly precision: 'single' | 'double';
  /** multiply-add with one rounding */
  readonly fused: boolean;
  readonly build: BuildSize;
  readonly stride: number;
  readonly cells: readonly [number, number, number];
  readonly offset: readonly [number, number, number];
  readonly real: number;
  readonly rowVectors: number;
  readonly rowBytes: number;
  readonly planeBytes: number;
  readonly origin: number;
  /** bytes of one field, ghosts included */
  readonly fieldBytes: number;
  readonly coefficients: readonly [number, number, number];
  /** the uniform value that the fields start from, V: see `startValue` */
  readonly bias: number;
  /** vectors of the two ends of a row, see assembly/fdtd/rows.ts */
  readonly windowLow: number;
  readonly windowHigh: number;
  readonly windows: readonly [number, number];
  readonly memoryRowX: number;
  /** by axis: layers at the low and high face, profiles and ψ of the electric and the magnetic update */
  readonly layers: readonly [AxisLayers, AxisLayers, AxisLayers];
  /** where all ψ lies */
  readonly memory: readonly [number, number];
  readonly walls: WallLayout;
  /** first free byte */
  readonly end: number;
  /** bytes of memory that are really written to: fields, ψ and tables */
  readonly touched: number;
}

export interface AxisLayers {
  readonly low: number;
  readonly high: number;
  readonly profile: readonly [number, number];
  readonly memory: readonly [number, number];
}

/** Hands out addresses one after another, each at the start of a cache line. */
export class Bump {
  next: number;
  constructor(from: number) {
    this.next = from;
  }
  take(bytes: number): number {
    const at = Math.ceil(this.next / 64) * 64;
    this.next = at + bytes;
    return at;
  }
}

/** Cells of the whole lattice, pads included. */
export function latticeCells(problem: GridProblem): [number, number, number] {
  return AXES.map((a) => problem.boxCells[a] + problem.pad[FACES_OF[a][0]] + problem.pad[FACES_OF[a][1]]) as [
    number,
    number,
    number,
  ];
}

/**
 * c_x = vΔt·dx/(dy·dz) and cyclic: the coefficients of Yee's update of e_a = E_a·d_a and h_a = η·H_a·d_a, the same for
 * both (assembly/fdtd/rows.ts).
 */
export function updateCoefficients(problem: GridProblem): [number, number, number] {
  const [dx, dy, dz] = problem.cellSize;
  const path = problem.medium.speed * problem.timeStep;
  return [(path * dx) / (dy * dz), (path * dy) / (dz * dx), (path * dz) / (dx * dy)];
}

/**
 * The bias: all six fields start at 1e-20 of the expected peak instead of zero, because WebAssembly cannot flush
 * denormals and a pulse's flanks are full of them. A uniform field has no curl, so it stays; samples are told without it.
 */
export function startValue(problem: GridProblem): number {
  const bias = 1e-20 * problem.scale;
  return problem.precision === 'single' ? Math.fround(bias) : bias;
}

/** The lattice as the boundary of a face sees it. */
function across(problem: GridProblem, axis: Axis): FaceLattice {
  const { cellSize, timeStep, medium } = problem;
  return { cell: cellSize[axis], across: [cellSize[(axis + 1) % 3]!, cellSize[(axis + 2) % 3]!], timeStep, medium };
}

/** Cells in which a boundary stretches coordinates. */
function layersOf(boundary: Boundary): number {
  return methodOf(boundary).stretch ? cellsBehind(boundary) : 0;
}

/**
 * The stretch of the difference along `axis` that drives E (which lies on nodes) or H (half a cell on), at cell `index`.
 */
export function stretchAt(problem: GridProblem, axis: Axis, drives: 'E' | 'H', index: number): Stretch {
  const cells = latticeCells(problem)[axis];
  const position = drives === 'E' ? index : index + 0.5;
  const [low, high] = FACES_OF[axis].map((face) => problem.boundary[face]) as [Boundary, Boundary];
  const lowLayers = layersOf(low);
  const highLayers = layersOf(high);
  // On the wall itself tangential E is not updated, so its difference needs no memory.
  if (position <= 0 || position >= cells) return PLAIN;
  if (position < lowLayers)
    return methodOf(low).stretch!(low, (lowLayers - position) / lowLayers, across(problem, axis));
  const above = position - (cells - highLayers);
  if (above > 0) return methodOf(high).stretch!(high, above / highLayers, across(problem, axis));
  return PLAIN;
}

/** What is done on the wall of a face. */
export function wallOf(problem: GridProblem, face: Face): Wall {
  const axis = AXES.find((a) => (FACES_OF[a] as readonly Face[]).includes(face))!;
  return methodOf(problem.boundary[face]).wall(problem.boundary[face], across(problem, axis));
}

/** The same of all faces. */
export function wallsOf(problem: GridProblem): Wall[] {
  return FACES.map((face) => wallOf(problem, face));
}

/**
 * Lays a problem out.
 * @throws RangeError where the lattice is too large to be addressed or too small to be a lattice
 */
export function layoutOf(problem: GridProblem): Layout {
  const cells = latticeCells(problem);
  const [nx, ny, nz] = cells;
  const real = problem.precision === 'single' ? 4 : 8;
  const lanes = VECTOR / real;
  const layerCounts = AXES.map((a) => FACES_OF[a].map((face) => layersOf(problem.boundary[face]))) as [
    number,
    number,
  ][];
  refuseBadLattice(problem, cells);

  const rowVectors = Math.ceil(nx / lanes);
  const rowBytes = (rowVectors + 1) * VECTOR;
  const planeBytes = rowBytes * (ny + 2);
  const fieldBytes = planeBytes * (nz + 2) + VECTOR;
  const build = BUILDS.find((b) => b.stride >= fieldBytes);
  if (!build) throw tooLarge(problem, cells, fieldBytes);

  const [lowX, highX] = layerCounts[0]!;
  const absorbsX = lowX + highX > 0;
  // Whole vectors that hold the layers and the lanes beyond the walls.
  const highStart = highX > 0 ? Math.floor((nx - highX) / lanes) : nx % lanes === 0 ? rowVectors : rowVectors - 1;
  const windowLow = Math.min(Math.max(1, Math.ceil(lowX / lanes)), rowVectors);
  const windowHigh = Math.max(windowLow, highStart);
  const windowVectors = windowLow + rowVectors - windowHigh;

  const bump = new Bump(FIELDS + 6 * build.stride);
  const windows = [bump.take(windowVectors * WINDOW_BYTES), bump.take(windowVectors * WINDOW_BYTES)] as const;
  const memoryRowX = absorbsX ? windowVectors * 2 * VECTOR : 0;
  const memoryRow = rowVectors * 2 * VECTOR;
  const profiles = AXES.map((a) => {
    const bytes = a === 0 ? 0 : (layerCounts[a]![0] + layerCounts[a]![1]) * 4 * real;
    return [bump.take(bytes), bump.take(bytes)] as const;
  });
  const memoryFrom = bump.take(0);
  const layers = AXES.map((a) => {
    const [low, high] = layerCounts[a]!;
    const rows = a === 0 ? ny * nz : (low + high) * (a === 1 ? nz : ny);
    const bytes = rows * (a === 0 ? memoryRowX : memoryRow);
    return { low, high, profile: profiles[a]!, memory: [bump.take(bytes), bump.take(bytes)] };
  }) as unknown as [AxisLayers, AxisLayers, AxisLayers];
  const memoryTo = bump.take(0);

  const bias = startValue(problem);
  const walls = wallLayout(wallsOf(problem), cells, real, bias, (bytes) => bump.take(bytes));
  if (bump.next > ADDRESS_LIMIT) throw tooLarge(problem, cells, fieldBytes);

  return {
    precision: problem.precision,
    fused: problem.fusedMultiplyAdd === true,
    build: build.size,
    stride: build.stride,
    cells,
    offset: [problem.pad['x-'], problem.pad['y-'], problem.pad['z-']],
    real,
    rowVectors,
    rowBytes,
    planeBytes,
    origin: planeBytes + rowBytes + VECTOR,
    fieldBytes,
    coefficients: updateCoefficients(problem),
    bias,
    windowLow,
    windowHigh,
    windows,
    memoryRowX,
    layers,
    memory: [memoryFrom, memoryTo],
    walls,
    end: bump.next,
    touched: 6 * fieldBytes + bump.next - (FIELDS + 6 * build.stride),
  };
}

function refuseBadLattice(problem: GridProblem, cells: readonly number[]) {
  for (const a of AXES) {
    const name = 'xyz'[a];
    if (cells[a]! < 2)
      throw new RangeError(
        `the lattice has ${cells[a]} cell along ${name}; it needs at least 2. Lower grid.cellSize or enlarge grid.box.`,
      );
    for (const face of FACES_OF[a]) {
      const boundary = problem.boundary[face];
      if (cellsBehind(boundary) > problem.pad[face])
        throw new RangeError(
          `the boundary of face ${face} has ${cellsBehind(boundary)} layers; the pad outside the working box is ${problem.pad[face]} cells and must hold them.`,
        );
      if (cellsRead(boundary) >= cells[a]!)
        throw new RangeError(
          `the boundary of face ${face} reads ${cellsRead(boundary)} cells inward; the lattice has ${cells[a]} cells along ${name} and needs more than that. Lower grid.cellSize or enlarge grid.box.`,
        );
    }
  }
  if (problem.fusedMultiplyAdd && problem.precision === 'double')
    throw new RangeError('fused multiply-add is there in single precision only. Set grid.precision to "single".');
  if (problem.fusedMultiplyAdd && !hasFusedMultiplyAdd())
    throw new RangeError('this runtime has no relaxed SIMD, so no fused multiply-add. Leave the option out.');
  if (!(problem.scale > 0 && Number.isFinite(problem.scale)))
    throw new RangeError(`the expected peak voltage of an edge is ${problem.scale} V; it must be positive and finite.`);
  const tiny = problem.precision === 'single' ? 1e-17 : 1e-280;
  if (problem.scale < tiny)
    throw new RangeError(
      `the expected peak voltage of an edge is ${problem.scale} V; below ${tiny} V ${problem.precision} precision runs into denormal numbers. Raise the sources' amplitude.`,
    );
}

function tooLarge(problem: GridProblem, cells: readonly number[], fieldBytes: number): RangeError {
  const limit = BUILDS[BUILDS.length - 1]!.stride;
  return new RangeError(
    `grid.cellSize ${problem.cellSize.map((d) => `${d} m`).join(' × ')} makes a lattice of ${cells.join(' × ')} cells, ` +
      `${(fieldBytes / 1e6).toFixed(0)} MB a field component; one component may have ${(limit / 1e6).toFixed(0)} MB ` +
      `and the whole run 4 GiB. Raise grid.cellSize, shrink grid.box${problem.precision === 'double' ? ' or use single precision' : ''}.`,
  );
}

/** Memory that a run would take (fields, memory variables and tables, without samples), and cells of its lattice. */
export function memoryNeeded(problem: GridProblem): { bytes: number; cells: number } {
  const { touched, cells } = layoutOf(problem);
  return { bytes: touched, cells: cells[0] * cells[1] * cells[2] };
}

/** Makes a kernel instance ready: the same calls on every thread. */
export function configure(kernel: GridKernel, layout: Layout): void {
  const [x, y, z] = layout.layers;
  kernel.lattice(...layout.cells);
  kernel.coefficients(...layout.coefficients);
  kernel.windows(layout.windowLow, layout.windowHigh, ...layout.windows);
  kernel.layersX(layout.memoryRowX, ...x.memory);
  kernel.layersY(y.low, y.high, ...y.profile, ...y.memory);
  kernel.layersZ(z.low, z.high, ...z.profile, ...z.memory);
  kernel.walls(layout.walls.linear, layout.walls.mirrored, layout.walls.records, layout.bias);
}

/** Writes the tables of the stencil (windows of the rows, profiles of the layers across y and z) and of the walls. */
export function writeTables(problem: GridProblem, layout: Layout, memory: WebAssembly.Memory): void {
  const reals = realsOf(layout, memory);
  const lanes = VECTOR / layout.real;
  const nx = layout.cells[0];
  writeWalls(wallsOf(problem), layout.walls, reals);
  for (const [set, drives] of (['E', 'H'] as const).entries()) {
    for (let entry = 0; entry < layout.windowLow + layout.rowVectors - layout.windowHigh; entry++) {
      const vector = entry < layout.windowLow ? entry : entry - layout.windowLow + layout.windowHigh;
      const at = (layout.windows[set]! + entry * WINDOW_BYTES) / layout.real;
      for (let lane = 0; lane < lanes; lane++) {
        const i = vector * lanes + lane;
        const { b, a, inverseKappa } = i < nx ? stretchAt(problem, 0, drives, i) : PLAIN;
        // e_y and e_z of cell 0 lie on the wall.
        const inside = i < nx && !(drives === 'E' && i === 0) ? 1 : 0;
        [inside, b, a, inverseKappa].forEach((value, row) => {
          reals[at + row * lanes + lane] = value;
        });
      }
    }
    for (const a of [1, 2] as const) {
      const { low, high, profile } = layout.layers[a];
      for (let layer = 0; layer < low + high; layer++) {
        const index = layer < low ? layer : layer - low + layout.cells[a] - high;
        const s = stretchAt(problem, a, drives, index);
        reals.set([s.b, s.a, s.inverseKappa], profile[set]! / layout.real + 4 * layer);
      }
    }
  }
}

/** The whole memory as an array of the run's numbers. */
export function realsOf(layout: Layout, memory: WebAssembly.Memory): Float32Array | Float64Array {
  return layout.precision === 'single' ? new Float32Array(memory.buffer) : new Float64Array(memory.buffer);
}

/** Offset of a lattice cell, the same in every field. */
export function cellOffset(layout: Layout, i: number, j: number, k: number): number {
  return layout.origin + k * layout.planeBytes + j * layout.rowBytes + i * layout.real;
}

/** Address of a field (0 … 5: ex ey ez hx hy hz) at a lattice cell. */
export function fieldAddress(layout: Layout, field: number, i: number, j: number, k: number): number {
  return FIELDS + field * layout.stride + cellOffset(layout, i, j, k);
}
