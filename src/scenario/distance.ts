import { type ArcPiece, type Curve, dot, type LinePiece, norm, sub } from './curve.ts';
import type { Medium, Source, Vec3 } from './model.ts';

/** A box parallel to the axes, m. */
export interface Bounds {
  readonly from: Vec3;
  readonly to: Vec3;
}

/** The box around a source. */
export function sourceBounds(source: Source): Bounds {
  if (source.type === 'dipole') return { from: source.at, to: source.at };
  return curveBounds(source.curve);
}

function curveBounds(curve: Curve): Bounds {
  const from: [number, number, number] = [Infinity, Infinity, Infinity];
  const to: [number, number, number] = [-Infinity, -Infinity, -Infinity];
  for (const piece of curve.pieces)
    for (const a of [0, 1, 2] as const) {
      // a full circle reaches centre ± radius √(u² + v²) along each axis
      const ends =
        piece.kind === 'line'
          ? [piece.from[a], piece.to[a]]
          : [-1, 1].map((sign) => piece.centre[a] + sign * piece.radius * Math.sqrt(piece.u[a] ** 2 + piece.v[a] ** 2));
      from[a] = Math.min(from[a], ...ends);
      to[a] = Math.max(to[a], ...ends);
    }
  return { from, to };
}

/** Distance from p to the nearest point of any source, m. */
export function distanceToSources(sources: readonly Source[], p: Vec3): number {
  let least = Infinity;
  for (const source of sources)
    if (source.type === 'dipole') least = Math.min(least, norm(sub(p, source.at)));
    else for (const piece of source.curve.pieces) least = Math.min(least, piece.distance(p));
  return least;
}

/**
 * The earliest instant at which anything of any source reaches p, s: the least over all sources, wave terms and points
 * of delay + slowness·s + R/v. Before it the field at p is zero exactly.
 */
export function firstArrival(sources: readonly Source[], medium: Medium, p: Vec3): number {
  return extremeArrival(sources, medium, p, () => 0, Math.min, firstOfPiece);
}

/**
 * The latest instant at which the activity of any part of any source reaches p, s: the largest over all sources, wave
 * terms and points of (last activity at `level`) + delay + slowness·s + R/v. After it the field at p is static but for
 * `level` of the radiated peak.
 */
export function lastArrival(sources: readonly Source[], medium: Medium, p: Vec3, level: number): number {
  return extremeArrival(sources, medium, p, (source) => source.waveform.lastActivity(level), Math.max, lastOfPiece);
}

function extremeArrival(
  sources: readonly Source[],
  medium: Medium,
  p: Vec3,
  emission: (source: Source) => number,
  extreme: (...values: number[]) => number,
  ofPiece: (piece: LinePiece | ArcPiece, slowness: number, speed: number, p: Vec3) => number,
): number {
  let result = extreme();
  for (const source of sources) {
    const start = emission(source);
    if (source.type === 'dipole') {
      result = extreme(result, start + norm(sub(p, source.at)) / medium.speed);
      continue;
    }
    for (const { delay, slowness } of source.terms)
      for (const piece of source.curve.pieces)
        result = extreme(result, start + delay + ofPiece(piece, slowness, medium.speed, p));
  }
  return result;
}

/** slowness·s + R/v at both ends of a piece. */
function atEnds(piece: LinePiece | ArcPiece, slowness: number, speed: number, p: Vec3): [number, number] {
  const x = new Float64Array(3);
  const at = (s: number) => {
    piece.point(s, x);
    return slowness * s + norm([p[0] - x[0]!, p[1] - x[1]!, p[2] - x[2]!]) / speed;
  };
  return [at(piece.s0), at(piece.s0 + piece.length)];
}

/**
 * The least of slowness·s + R/v on a piece. R changes by at most ds, so with |slowness| ≥ 1/v (no wave outruns the
 * medium) it is monotone in s; a uniform current (slowness 0) is nearest where the piece is.
 */
function firstOfPiece(piece: LinePiece | ArcPiece, slowness: number, speed: number, p: Vec3): number {
  if (slowness === 0) return piece.distance(p) / speed;
  return Math.min(...atEnds(piece, slowness, speed, p));
}

/** The largest of slowness·s + R/v on a piece: at an end, R being convex on a line, or the far side of a circle. */
function lastOfPiece(piece: LinePiece | ArcPiece, slowness: number, speed: number, p: Vec3): number {
  if (slowness === 0 && piece.kind === 'arc') {
    const r = sub(p, piece.centre);
    const height = dot(r, piece.normal);
    const inPlane = Math.sqrt(Math.max(0, dot(r, r) - height * height));
    return Math.sqrt(height * height + (inPlane + piece.radius) ** 2) / speed;
  }
  return Math.max(...atEnds(piece, slowness, speed, p));
}
