import { colourOf, type Neutrals, type SignedScale, type Theme } from './colour.ts';
import { contours } from './contour.ts';
import type { Box, Facet, Vec3 } from './projection.ts';
import type { Plane, Stroke } from './scene.ts';

/** The rim of a plane, so that a field near zero does not merge with the page. */
export function planeOutline(plane: Facet, { line }: Neutrals): Stroke {
  const rim = corners(plane);
  const points = [...rim, rim[0]!].flat();
  return { points, form: 'line', colour: line, width: 1 };
}

/**
 * Where planes cross one another: without a line two fields near zero would merge. For each pair, the rim of one is cut by
 * the other's plane in two points, and the segment between them by the other's rim.
 */
export function crossings(planes: readonly Plane[], { line }: Neutrals): Stroke {
  const points = planes.flatMap((one, n) => planes.slice(n + 1).flatMap((other) => crossing(one, other)));
  return { points, form: 'segments', colour: line, width: 1 };
}

function crossing(one: Facet, other: Facet): number[] {
  const normal = cross(one.u, one.v);
  const height = (p: readonly number[]) => dot(normal, subtract(p, one.origin));
  const rim = corners(other);
  const cuts = rim.flatMap((from, n) => {
    const to = rim[(n + 1) % 4]!;
    const [before, after] = [height(from), height(to)];
    return before < 0 !== after < 0 ? [between(from, to, before / (before - after))] : [];
  });
  const [p, q] = cuts;
  if (!p || !q) return [];
  // place along an edge of `one`: (p − origin)·(edge's dual), linear in p
  const duals = [cross(one.v, normal), cross(normal, one.u)].map(
    (d, k) => [d, dot(d, k === 0 ? one.u : one.v)] as const,
  );
  let [from, to] = [0, 1];
  for (const [dual, size] of duals) {
    const [atP, atQ] = [p, q].map((point) => dot(dual, subtract(point, one.origin)) / size) as [number, number];
    const ends = [0, 1].map((rimPlace) => (rimPlace - atP) / (atQ - atP)).sort((a, b) => a - b) as [number, number];
    if (atP === atQ) {
      if (atP < 0 || atP > 1) return [];
    } else [from, to] = [Math.max(from, ends[0]), Math.min(to, ends[1])];
  }
  return from < to ? [...between(p, q, from), ...between(p, q, to)] : [];
}

function corners({ origin, u, v }: Facet): number[][] {
  return [
    [0, 0],
    [1, 0],
    [1, 1],
    [0, 1],
  ].map(([a, b]) => origin.map((value, k) => value + a! * u[k]! + b! * v[k]!));
}

/** The working box. */
export function boxEdges(box: Box, { line }: Neutrals): Stroke {
  return { points: edgesOf(box), form: 'segments', colour: line, width: 1 };
}

/** The outside of the absorbing layers, dotted: a dash beside a length would read as its minus sign. */
export function absorberEdges(box: Box, { line }: Neutrals): Stroke {
  return { points: edgesOf(box), form: 'segments', colour: line, width: 1, dash: [1, 3] };
}

/** The twelve edges of a box, two points each. */
function edgesOf({ from, to }: Box): number[] {
  const points: number[] = [];
  for (let axis = 0; axis < 3; axis++)
    for (const corner of [0, 1, 2, 3]) {
      const ends = [from, to].map((end) => {
        const point = [0, 0, 0];
        point[axis] = end[axis]!;
        point[(axis + 1) % 3] = (corner & 1 ? to : from)[(axis + 1) % 3]!;
        point[(axis + 2) % 3] = (corner & 2 ? to : from)[(axis + 2) % 3]!;
        return point;
      });
      points.push(...ends.flat());
    }
  return points;
}

/**
 * A wire and the current on it: one stroke in the colours of the current over a wider one that sets it off.
 * @param points vertices, three coordinates each, m; close enough to show the current's shape
 * @param current at each vertex, positive from the first point to the last
 * @param scale of the current, in its unit
 */
export function wire(
  points: ArrayLike<number>,
  current: ArrayLike<number>,
  scale: SignedScale,
  theme: Theme,
  { ink }: Neutrals,
): Stroke[] {
  const colour = Uint32Array.from(current, (value) => colourOf(value, scale, theme));
  return [
    { points, form: 'line', colour: ink, width: 5.5 },
    { points, form: 'line', colour, width: 3 },
  ];
}

/**
 * Where a plane enters the mask: the outline, in the plane, of all points nearer than `mask` to a polyline.
 * @param polylines vertices of the sources, three coordinates each, m
 * @param mask m
 */
export function maskOutline(
  plane: Plane,
  polylines: readonly ArrayLike<number>[],
  mask: number,
  colour: number,
): Stroke {
  const { origin, u, v, nu, nv } = plane;
  const values = new Float32Array(nu * nv);
  for (let j = 0; j < nv; j++)
    for (let i = 0; i < nu; i++) {
      const at = (k: 0 | 1 | 2) => origin[k] + ((i + 0.5) / nu) * u[k] + ((j + 0.5) / nv) * v[k];
      values[j * nu + i] = Math.min(...polylines.map((points) => distanceTo(points, [at(0), at(1), at(2)])));
    }
  return { points: contours({ ...plane, values }, [mask]), form: 'segments', colour, width: 1 };
}

/** Distance of a point from a polyline, m. */
function distanceTo(points: ArrayLike<number>, p: Vec3): number {
  let least = Number.POSITIVE_INFINITY;
  for (let n = 0; n + 3 < points.length || n === 0; n += 3) {
    const vertex = [points[n]!, points[n + 1]!, points[n + 2]!];
    const next = [0, 1, 2].map((k) => points[n + 3 + k] ?? vertex[k]!);
    const from = subtract(p, vertex);
    const along = subtract(next, vertex);
    const squared = dot(along, along);
    const t = squared === 0 ? 0 : Math.min(1, Math.max(0, dot(from, along) / squared));
    const rest = from.map((value, k) => value - t * along[k]!);
    least = Math.min(least, Math.sqrt(dot(rest, rest)));
  }
  return least;
}

/**
 * The exact field's contour lines on a plane, to be drawn over the grid's colours: solid, in the colour of text.
 * @param levels in the unit of the values; both signs of each
 */
export function contourLines(exact: Plane, levels: readonly number[], { ink }: Neutrals): Stroke {
  const both = levels.flatMap((level) => [level, -level]);
  return { points: contours(exact, both), form: 'segments', colour: ink, width: 0.6, ghost: 0 };
}

function dot(a: readonly number[], b: readonly number[]): number {
  return a[0]! * b[0]! + a[1]! * b[1]! + a[2]! * b[2]!;
}

function cross(a: readonly number[], b: readonly number[]): number[] {
  return [a[1]! * b[2]! - a[2]! * b[1]!, a[2]! * b[0]! - a[0]! * b[2]!, a[0]! * b[1]! - a[1]! * b[0]!];
}

function subtract(a: readonly number[], b: readonly number[]): number[] {
  return a.map((value, k) => value - b[k]!);
}

function between(a: readonly number[], b: readonly number[], t: number): number[] {
  return a.map((value, k) => value + t * (b[k]! - value));
}
