import { asin, atan2, cos, sin } from '../elementary/elementary.ts';
import type { Axis, Vec3 } from './model.ts';

/**
 * The line a thin filament follows, parametrised by arc length s (m) from its first point: straight pieces for wires,
 * one full circle for a loop. Geometry only; how a current on it is integrated or gridded is each solver's own affair.
 */
export interface Piece {
  readonly kind: 'line' | 'arc';
  /** arc length at which the piece starts, m */
  readonly s0: number;
  readonly length: number;
  /** the point at arc length s (from the curve's start), written into `out` */
  point(s: number, out: Float64Array): void;
  /** the unit tangent at s, towards growing s */
  tangent(s: number, out: Float64Array): void;
  /** arc lengths strictly inside the piece where coordinate `axis` equals `value`, ascending */
  crossings(axis: Axis, value: number): number[];
  /** the least distance from p to the piece, m */
  distance(p: Vec3): number;
}

export interface LinePiece extends Piece {
  readonly kind: 'line';
  readonly from: Vec3;
  readonly to: Vec3;
  /** unit vector from → to */
  readonly direction: Vec3;
}

export interface ArcPiece extends Piece {
  readonly kind: 'arc';
  readonly centre: Vec3;
  readonly radius: number;
  /** unit vectors in the circle's plane: point = centre + radius (u cos θ + v sin θ), θ = (s − s0)/radius */
  readonly u: Vec3;
  readonly v: Vec3;
  readonly normal: Vec3;
}

export interface Curve {
  readonly pieces: readonly (LinePiece | ArcPiece)[];
  readonly length: number;
  /** first point = last point: no end charges */
  readonly closed: boolean;
}

export const sub = (a: Vec3, b: Vec3): Vec3 => [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
export const dot = (a: Vec3, b: Vec3): number => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
export const norm = (a: Vec3): number => Math.sqrt(dot(a, a));
export const scale = (a: Vec3, f: number): Vec3 => [a[0] * f, a[1] * f, a[2] * f];
export const cross = (a: Vec3, b: Vec3): Vec3 => [
  a[1] * b[2] - a[2] * b[1],
  a[2] * b[0] - a[0] * b[2],
  a[0] * b[1] - a[1] * b[0],
];

/** The straight piece between two distinct points, starting at arc length s0. */
export function linePiece(from: Vec3, to: Vec3, s0: number): LinePiece {
  const d = sub(to, from);
  const length = norm(d);
  const direction = scale(d, 1 / length);
  return {
    kind: 'line',
    from,
    to,
    direction,
    s0,
    length,
    point(s, out) {
      const f = (s - s0) / length;
      for (let a = 0; a < 3; a++) out[a] = from[a]! + f * d[a]!;
    },
    tangent(_s, out) {
      out.set(direction);
    },
    crossings(axis, value) {
      const slope = d[axis];
      if (slope === 0) return [];
      const f = (value - from[axis]) / slope;
      return f > 0 && f < 1 ? [s0 + f * length] : [];
    },
    distance(p) {
      const r = sub(p, from);
      const f = Math.min(1, Math.max(0, dot(r, d) / (length * length)));
      return norm(sub(r, scale(d, f)));
    },
  };
}

/** A full circle, right-handed about the unit vector `normal`. */
export function circlePiece(centre: Vec3, normal: Vec3, radius: number): ArcPiece {
  // The axis least aligned with the normal gives the best-conditioned pair of in-plane directions.
  const least = ([0, 1, 2] as const).reduce((m, a) => (Math.abs(normal[a]) < Math.abs(normal[m]) ? a : m), 0 as Axis);
  const seed: Vec3 = [least === 0 ? 1 : 0, least === 1 ? 1 : 0, least === 2 ? 1 : 0];
  const w = cross(normal, seed);
  const v = scale(w, 1 / norm(w));
  const u = cross(v, normal);
  const length = 2 * Math.PI * radius;
  return {
    kind: 'arc',
    centre,
    radius,
    u,
    v,
    normal,
    s0: 0,
    length,
    point(s, out) {
      const c = radius * cos(s / radius);
      const d = radius * sin(s / radius);
      for (let a = 0; a < 3; a++) out[a] = centre[a]! + c * u[a]! + d * v[a]!;
    },
    tangent(s, out) {
      const c = cos(s / radius);
      const d = sin(s / radius);
      for (let a = 0; a < 3; a++) out[a] = c * v[a]! - d * u[a]!;
    },
    crossings(axis, value) {
      // radius (u cos θ + v sin θ) = value − centre, that is A cos(θ − θ0) = B
      const amplitude = radius * Math.sqrt(u[axis] ** 2 + v[axis] ** 2);
      const ratio = (value - centre[axis]) / amplitude;
      if (!(Math.abs(ratio) < 1)) return [];
      const theta0 = atan2(v[axis], u[axis]);
      const half = Math.PI / 2 - asin(ratio);
      const turn = 2 * Math.PI;
      return [theta0 - half, theta0 + half]
        .map((t) => (((t % turn) + turn) % turn) * radius)
        .filter((s) => s > 0 && s < length)
        .sort((a, b) => a - b);
    },
    distance(p) {
      const r = sub(p, centre);
      const height = dot(r, normal);
      const inPlane = norm(sub(r, scale(normal, height)));
      return Math.sqrt(height * height + (inPlane - radius) ** 2);
    },
  };
}

/** A polyline through two or more points; closed when the first equals the last. */
export function polyline(points: readonly Vec3[]): Curve {
  const pieces: LinePiece[] = [];
  let s = 0;
  for (let i = 1; i < points.length; i++) {
    const piece = linePiece(points[i - 1]!, points[i]!, s);
    pieces.push(piece);
    s += piece.length;
  }
  const first = points[0]!;
  const last = points[points.length - 1]!;
  return { pieces, length: s, closed: first.every((x, a) => x === last[a]) };
}

/** A circle as a closed curve. */
export function circle(centre: Vec3, normal: Vec3, radius: number): Curve {
  const piece = circlePiece(centre, normal, radius);
  return { pieces: [piece], length: piece.length, closed: true };
}
