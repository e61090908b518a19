/**
 * The shape of an answer: field components sampled at places and instants. Both solvers answer in this shape, at the
 * very same places and instants, so that a comparison never interpolates.
 */
export const COMPONENTS = ['Ex', 'Ey', 'Ez', 'Hx', 'Hy', 'Hz'] as const;
export type Component = (typeof COMPONENTS)[number];

/**
 * Sample points on a Yee grid. Each point is one Yee cell (i, j, k) and stands for six sites, one for each component,
 * each at its own place: Ex(i+½,j,k) Ey(i,j+½,k) Ez(i,j,k+½) Hx(i,j+½,k+½) Hy(i+½,j,k+½) Hz(i+½,j+½,k).
 */
export interface SamplePoints {
  readonly count: number;
  /** cell indices, 3 a point; node (0, 0, 0) is the lower corner of the working box */
  readonly cell: Int32Array;
  /** positions of the six sites of each point, m: position[(point·6 + component)·3 + axis] */
  readonly position: Float64Array;
}

/** Instants of a Yee run: E at E[n], H half a step later at H[n], s. */
export interface Instants {
  readonly count: number;
  readonly E: Float64Array;
  readonly H: Float64Array;
}

/** Field values at sample points: values[(point·6 + component)·instants.count + n]; V/m for E, A/m for H. */
export interface FieldHistory {
  readonly points: SamplePoints;
  readonly instants: Instants;
  readonly values: Float64Array;
}

/** Offsets of the six components' sites from the cell's node, in cells. */
export const STAGGER: readonly (readonly [number, number, number])[] = [
  [0.5, 0, 0],
  [0, 0.5, 0],
  [0, 0, 0.5],
  [0, 0.5, 0.5],
  [0.5, 0, 0.5],
  [0.5, 0.5, 0],
];

/**
 * The sample points of the given cells.
 * @param cell indices, 3 a point
 * @param origin position of node (0, 0, 0), m
 * @param cellSize dx, dy, dz, m
 */
export function samplePoints(
  cell: Int32Array,
  origin: readonly [number, number, number],
  cellSize: readonly [number, number, number],
): SamplePoints {
  const count = cell.length / 3;
  const position = new Float64Array(count * 18);
  for (let p = 0; p < count; p++)
    for (let c = 0; c < 6; c++)
      for (let a = 0; a < 3; a++)
        position[(p * 6 + c) * 3 + a] = origin[a]! + (cell[p * 3 + a]! + STAGGER[c]![a]!) * cellSize[a]!;
  return { count, cell, position };
}

/**
 * Every `every`-th instant of a run of `steps` steps, the last one included: E at (n+1)Δt, H at (n+3/2)Δt for
 * n = first, first + every, …, steps − 1.
 */
export function instantsOf(steps: number, timeStep: number, every = 1): Instants {
  const count = Math.floor((steps - 1) / every) + 1;
  const first = steps - 1 - (count - 1) * every;
  const E = new Float64Array(count);
  const H = new Float64Array(count);
  for (let m = 0; m < count; m++) {
    const n = first + m * every;
    E[m] = (n + 1) * timeStep;
    H[m] = (n + 1.5) * timeStep;
  }
  return { count, E, H };
}

/** Fewer samples than this make no trace. */
export const FEWEST_SAMPLES = 8;

/** One component at one place, as any solver may give it: sampled at instants of its own. */
export interface Trace {
  readonly observer: string;
  readonly component: Component;
  /** m */
  readonly at: readonly [number, number, number];
  /** s, ascending, no two alike */
  readonly time: Float64Array;
  /** V/m or A/m, one value an instant */
  readonly values: Float64Array;
}
