import { cos, sin } from '../elementary/elementary.ts';
import { gaussLegendre } from '../retarded/quadrature.ts';
import type { Vec3 } from '../scenario/model.ts';

/** An integral over directions, its error (what a rule of fewer directions differs by), and how many were looked at. */
export interface SphereIntegral {
  readonly value: number;
  readonly error: number;
  readonly directions: number;
}

/** Each rule has this many times the rows of the one before. */
const GROWTH = 1.5;

/** Rows of the largest rule: 2 · 96² directions. */
const MOST_ROWS = 96;

/**
 * ∮ f dΩ by Gauss's rule in cos θ and the trapezoidal rule in φ, exact for spherical harmonics below twice the number of
 * rows; more rows until two rules agree. The pattern |rE|² of sources within a sphere of diameter d has harmonics up to
 * about kd.
 * @param harmonics where to begin: kd, 0 for what is small against the wavelength
 * @param tolerance relative
 */
export function overSphere(f: (direction: Vec3) => number, harmonics: number, tolerance: number): SphereIntegral {
  let directions = 0;
  const rule = (rows: number) => {
    const { nodes, weights } = gaussLegendre(rows);
    let sum = 0;
    for (let p = 0; p < rows; p++) {
      const sine = Math.sqrt((1 - nodes[p]!) * (1 + nodes[p]!));
      for (let m = 0; m < 2 * rows; m++) {
        const phi = (Math.PI * (m + 0.5)) / rows;
        sum += weights[p]! * (Math.PI / rows) * f([sine * cos(phi), sine * sin(phi), nodes[p]!]);
      }
    }
    directions += 2 * rows * rows;
    return sum;
  };
  let rows = Math.min(MOST_ROWS, Math.ceil(harmonics / 2) + 3);
  let previous = rule(rows);
  for (;;) {
    rows = Math.min(MOST_ROWS, Math.ceil(GROWTH * rows));
    const value = rule(rows);
    const error = Math.abs(value - previous);
    if (error <= tolerance * Math.abs(value) || rows === MOST_ROWS) return { value, error, directions };
    previous = value;
  }
}

/** The direction of polar angle θ (from z) and azimuth φ (from x towards y), rad. */
export function directionOf(theta: number, phi: number): Vec3 {
  return [sin(theta) * cos(phi), sin(theta) * sin(phi), cos(theta)];
}

/** Unit vectors of growing θ and φ at a direction; on the axis those of φ = 0. */
export function tangentsOf([x, y, z]: Vec3): { readonly theta: Vec3; readonly phi: Vec3 } {
  const sine = Math.sqrt(x * x + y * y);
  const [c, s] = sine > 0 ? [x / sine, y / sine] : [1, 0];
  return { theta: [c * z, s * z, -sine], phi: [-s, c, 0] };
}

/** Steps of the search for a maximum end here, rad: the value there is flat to rounding. */
const FINEST = 1e-8;

/** ±x, ±y, ±z, where lobes of symmetric sources lie. */
export const AXES: readonly Vec3[] = [
  [1, 0, 0],
  [-1, 0, 0],
  [0, 1, 0],
  [0, -1, 0],
  [0, 0, 1],
  [0, 0, -1],
];

/** Directions spread nearly evenly: a golden-angle spiral (common practice, no source). */
export function evenDirections(count: number): Vec3[] {
  const golden = Math.PI * (3 - Math.sqrt(5));
  return Array.from({ length: count }, (_, m) => {
    const z = 1 - (2 * m + 1) / count;
    const r = Math.sqrt(1 - z * z);
    return [r * cos(golden * m), r * sin(golden * m), z] as Vec3;
  });
}

/**
 * The direction in which f is largest: the best of the axes and of directions spread evenly, then by steps along θ and φ
 * that are halved where none of them leads up.
 * @param harmonics as in `overSphere`: lobes are about π/kd wide
 */
export function largestDirection(
  f: (direction: Vec3) => number,
  harmonics: number,
): { readonly direction: Vec3; readonly value: number } {
  const count = Math.min(4000, Math.ceil(64 + 4 * harmonics * harmonics));
  let best = { direction: AXES[0]!, value: Number.NEGATIVE_INFINITY };
  const look = (direction: Vec3): boolean => {
    const value = f(direction);
    if (!(value > best.value)) return false;
    best = { direction, value };
    return true;
  };
  for (const direction of [...AXES, ...evenDirections(count)]) look(direction);
  for (let step = 2 / Math.sqrt(count); step > FINEST; ) {
    const { direction } = best;
    const { theta, phi } = tangentsOf(direction);
    const up = [theta, phi]
      .flatMap((t) => [1, -1].map((sign) => turned(direction, t, sign * step)))
      .some((to) => look(to));
    if (!up) step /= 2;
  }
  return best;
}

/** n cos a + t sin a */
function turned(n: Vec3, t: Vec3, angle: number): Vec3 {
  const [c, s] = [cos(angle), sin(angle)];
  return [c * n[0] + s * t[0], c * n[1] + s * t[1], c * n[2] + s * t[2]];
}
