import { type Axis, FACES } from '../scenario/model.ts';
import type { LinearWall, Wall } from './boundaries/boundary.ts';

/**
 * What the kernel is told about walls, and the memory that they need; the other half is assembly/fdtd/walls.ts, whose
 * record of a face these are. Numbers only, so that they can be sent to other threads.
 */
export interface WallLayout {
  /** faces with a linear wall, and mirrors: one bit each, in the order of FACES */
  readonly linear: number;
  readonly mirrored: number;
  /** address of the six records */
  readonly records: number;
  readonly faces: readonly (FaceTables | null)[];
  /** how far inward each face reads, cells: what must be marched together (./run.ts) */
  readonly reach: readonly number[];
  /** what is filled before a run: as if the start value had always been there */
  readonly fills: readonly { readonly from: number; readonly to: number; readonly value: number }[];
}

/** Addresses, 0 for what a wall does not need. */
interface FaceTables {
  readonly notes: number;
  readonly older: number;
  readonly sides: number;
  readonly deep: number;
}

const FACE_BYTES = 512;
const RIM_BYTES = 256;
/** Byte of the first coefficient in a record. */
const TERMS = 64;

/** Layers that the kernel reads at a time. */
const REACHES = [1, 2, 4];

/** How far inward a wall reads, cells. */
function reachOf(wall: Wall): number {
  if (wall.type === 'held') return 0;
  if (wall.type === 'mirror') return 2;
  const layers = Math.max(wall.older.length - 1, wall.old.length - 1, wall.now.length);
  return REACHES.find((reach) => reach >= layers)!;
}

/** Σ c_l in the kernel's arithmetic, from the innermost layer outwards, each times `value`. */
function summed(coefficients: readonly number[], value: number, round: (x: number) => number): number {
  let sum = 0;
  for (let l = coefficients.length - 1; l >= 0; l--) sum = round(sum + round(round(coefficients[l]!) * value));
  return sum;
}

/**
 * @param walls in the order of FACES
 * @param take hands out addresses of so many bytes
 */
export function wallLayout(
  walls: readonly Wall[],
  cells: readonly [number, number, number],
  real: number,
  bias: number,
  take: (bytes: number) => number,
): WallLayout {
  const round = real === 4 ? Math.fround : (x: number) => x;
  const bits = (type: Wall['type']) => walls.reduce((set, wall, face) => set | (wall.type === type ? 1 << face : 0), 0);
  const fills: { from: number; to: number; value: number }[] = [];
  const filled = (bytes: number, value: number) => {
    const whole = Math.ceil(bytes / 64) * 64;
    const from = take(whole);
    fills.push({ from, to: from + whole, value });
    return from;
  };
  const records = take(walls.length * FACE_BYTES);
  const faces = walls.map((wall, face) => {
    if (wall.type !== 'linear') return null;
    // Nodes along a line of the wall, and lines: y and z of an x face, x and z of a y face, x and y of a z face.
    const points = cells[face < 2 ? 1 : 0] + 1;
    const lines = cells[face < 4 ? 2 : 1] + 1;
    const layer = 2 * points * lines * real;
    return {
      notes: take(layer),
      older: wall.older.length ? filled(layer, summed(wall.older, bias, round)) : 0,
      // Two layers of even and of odd steps.
      sides: wall.sideways ? filled(4 * layer, bias) : 0,
      // Layers 2, 3 and 4 of four steps.
      deep: FACES[face] === 'z+' && reachOf(wall) > 1 ? filled(12 * layer, bias) : 0,
    };
  });
  return { linear: bits('linear'), mirrored: bits('mirror'), records, faces, reach: walls.map(reachOf), fills };
}

/** Writes the records of linear walls. */
export function writeWalls(
  walls: readonly Wall[],
  { records, faces }: WallLayout,
  reals: Float32Array | Float64Array,
): void {
  walls.forEach((wall, face) => {
    if (wall.type !== 'linear') return;
    const write = (at: number, { older, old, now }: LinearWall, tables: FaceTables, images: readonly number[]) => {
      const address = at + TERMS;
      const words = [reachOf(wall), now.length, tables.notes, tables.older, tables.sides, tables.deep, ...images];
      new Uint32Array(reals.buffer, at, words.length).set(words);
      const terms = [...padded(old, 5), ...padded(older, 5), ...padded(now, 2), ...alongFirst(wall, face)];
      reals.set(terms, address / reals.BYTES_PER_ELEMENT);
    };
    const at = records + face * FACE_BYTES;
    const tables = faces[face]!;
    write(at, wall, tables, imagesBeside(walls, face));
    if (wall.sideways) write(at + RIM_BYTES, wall.sideways.rim, { ...tables, older: 0, sides: 0 }, []);
  });
}

const padded = (terms: readonly number[], length: number): number[] => Array.from({ length }, (_, l) => terms[l] ?? 0);

/** The axes along a face: that of its lines first. */
export const axesOf = (face: number): readonly [Axis, Axis] =>
  (
    [
      [1, 2],
      [0, 2],
      [0, 1],
    ] as const
  )[face >> 1]!;

/** Weights of the neighbours along a line and across lines. */
function alongFirst({ sideways }: LinearWall, face: number): readonly number[] {
  if (!sideways) return [0, 0];
  const [next, after] = sideways.across;
  // The axes after y are z and x, those along a y face in the kernel x and z.
  return face >> 1 === 1 ? [after, next] : [next, after];
}

/** Whether the walls beside a face are conductors: low and high along its lines, then across them. */
export function imagesBeside(walls: readonly Wall[], face: number): number[] {
  return axesOf(face).flatMap((axis) => [0, 1].map((end) => (walls[2 * axis + end]!.type === 'held' ? 1 : 0)));
}
