import type { Facet } from './projection.ts';
import type { Plane } from './scene.ts';

/**
 * Contour lines of a plane's values, as separate segments in space (X0, Y0, Z0, X1, Y1, Z1, m): marching squares between
 * the sample centres, linear along the edges (Lorensen & Cline 1987 in two dimensions, from memory). A saddle is
 * joined through its middle, whose value is the mean of the four. One pass for all levels, since an animation draws
 * them anew for every picture. Cells with a NaN have no contour.
 * @param levels in the unit of the values
 */
export function contours(plane: Plane, levels: readonly number[]): Float64Array {
  const { nu, nv, values } = plane;
  const segments: number[] = [];
  const place = placer(plane, nu, nv);
  const crossing = (i: number, j: number, edge: number, level: number) => {
    const [i0, j0, i1, j1] = EDGES[edge]!;
    const from = values[(j + j0) * nu + i + i0]!;
    const to = values[(j + j1) * nu + i + i1]!;
    const s = (level - from) / (to - from);
    place(segments, i + i0 + s * (i1 - i0), j + j0 + s * (j1 - j0));
  };
  for (let j = 0; j < nv - 1; j++)
    for (let i = 0; i < nu - 1; i++) {
      const n = j * nu + i;
      const [v00, v10, v11, v01] = [values[n]!, values[n + 1]!, values[n + nu + 1]!, values[n + nu]!];
      const low = Math.min(v00, v10, v11, v01);
      const high = Math.max(v00, v10, v11, v01);
      for (const level of levels) {
        // false for NaN
        if (!(low < level && level <= high)) continue;
        const above = +(v00 >= level) | (+(v10 >= level) << 1) | (+(v11 >= level) << 2) | (+(v01 >= level) << 3);
        const middleAbove = (v00 + v10 + v11 + v01) / 4 >= level;
        for (const edge of joins(above, middleAbove)) crossing(i, j, edge, level);
      }
    }
  return Float64Array.from(segments);
}

/** Edges of a cell, by corners (i, j): bottom, right, top, left. */
const EDGES: readonly (readonly [number, number, number, number])[] = [
  [0, 0, 1, 0],
  [1, 0, 1, 1],
  [1, 1, 0, 1],
  [0, 1, 0, 0],
];

/** Pairs of edges to join, by which corners (1: 00, 2: 10, 4: 11, 8: 01) lie above the level. */
const JOINS: readonly (readonly number[])[] = [
  [],
  [3, 0],
  [0, 1],
  [3, 1],
  [1, 2],
  [3, 0, 1, 2],
  [0, 2],
  [3, 2],
  [2, 3],
  [2, 0],
  [0, 1, 2, 3],
  [2, 1],
  [1, 3],
  [1, 0],
  [0, 3],
  [],
];

/** In a saddle the two corners that agree with the middle are one region, and the other two are cut off. */
function joins(above: number, middleAbove: boolean): readonly number[] {
  if (middleAbove && above === 5) return JOINS[10]!;
  if (middleAbove && above === 10) return JOINS[5]!;
  return JOINS[above]!;
}

/** Appends the place in space of sample coordinates (i, j); sample centres are half a step inside the plane's rim. */
function placer({ origin, u, v }: Facet, nu: number, nv: number) {
  return (out: number[], i: number, j: number) => {
    const a = (i + 0.5) / nu;
    const b = (j + 0.5) / nv;
    for (let axis = 0; axis < 3; axis++) out.push(origin[axis]! + a * u[axis]! + b * v[axis]!);
  };
}
