import { type FieldValue, fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { KRONROD_POINTS, kronrod } from '../retarded/quadrature.ts';
import { norm, sub } from '../scenario/curve.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';

/** An integral along a path at one instant, a bound on its error, and how many fields it took. */
export interface PathIntegral {
  readonly value: number;
  readonly error: number;
  readonly evaluations: number;
}

export interface PathOptions {
  /** relative to the integral of the field's modulus; default 1e-9 */
  readonly tolerance?: number;
  /** fields looked at, at most; default 20 000 */
  readonly maxEvaluations?: number;
}

/**
 * Voltage along a polyline, ∫ E·dl from its first point to its last, V: what a voltmeter would show whose leads lie along
 * the path. It depends on the path; where nothing changes in time it is φ(first) − φ(last).
 * @param path two or more points, m
 * @throws RangeError where the path crosses a source, naming where, or has no length
 */
export function voltageAlong(
  sources: readonly Source[],
  medium: Medium,
  path: readonly Vec3[],
  options: PathOptions = {},
): (t: number) => PathIntegral {
  return pathIntegral(sources, medium, path, ({ E, errorE }) => ({ vector: E, error: errorE }), false, options);
}

/**
 * Magnetic flux through any surface that a closed polyline bounds, Φ = ∮ A·dl (Stokes), Wb; positive right-handed about the
 * way round. Where a current passes through the loop the flux still is that of the path.
 * @param loop three or more corners, m; it is closed from the last to the first
 * @throws RangeError where the loop crosses a source, naming where, or has no length
 */
export function fluxThrough(
  sources: readonly Source[],
  medium: Medium,
  loop: readonly Vec3[],
  options: PathOptions = {},
): (t: number) => PathIntegral {
  return pathIntegral(sources, medium, closed(loop), ({ A, errorA }) => ({ vector: A, error: errorA }), true, options);
}

/**
 * What is induced round a closed polyline, ∮ E·dl, V. By Faraday's law it is −dΦ/dt, whatever the surface: the two are
 * computed from different parts of the exact field, so that their difference is a check of it.
 * @throws RangeError as `fluxThrough`
 */
export function inducedVoltage(
  sources: readonly Source[],
  medium: Medium,
  loop: readonly Vec3[],
  options: PathOptions = {},
): (t: number) => PathIntegral {
  return voltageAlong(sources, medium, closed(loop), options);
}

const closed = (loop: readonly Vec3[]): readonly Vec3[] => {
  const last = loop.at(-1)!;
  return loop[0]!.every((x, a) => x === last[a]) ? loop : [...loop, loop[0]!];
};

/** −(1/12, −8/12, 8/12, −1/12)/h: the central difference of fourth order. */
const DIFFERENCE = [
  [2, -1 / 12],
  [1, 8 / 12],
  [-1, -8 / 12],
  [-2, 1 / 12],
] as const;

/**
 * Faraday's law at one instant: |∮E·dl + dΦ/dt|, V, and the larger of the two terms. dΦ/dt is a difference of fourth order
 * over steps of a fiftieth of the shortest time scale of the currents, which leaves about 1e-7 of its own for smooth ones.
 * @throws RangeError as `fluxThrough`
 */
export function faradayResidual(
  sources: readonly Source[],
  medium: Medium,
  loop: readonly Vec3[],
  options: PathOptions = {},
): (t: number) => { readonly residual: number; readonly scale: number } {
  const flux = fluxThrough(sources, medium, loop, options);
  const induced = inducedVoltage(sources, medium, loop, options);
  const step = Math.min(...sources.map(({ waveform }) => waveform.timeScale)) / 50;
  return (t) => {
    const change = DIFFERENCE.reduce((sum, [m, weight]) => sum + (weight * flux(t + m * step).value) / step, 0);
    const { value } = induced(t);
    return { residual: Math.abs(value + change), scale: Math.max(Math.abs(value), Math.abs(change)) };
  };
}

/** One part of a path: from one place to another along a straight segment. */
interface Stretch {
  readonly from: Vec3;
  readonly to: Vec3;
  readonly value: number;
  /** of the quadrature, and of the fields themselves */
  readonly error: number;
  readonly own: number;
  readonly modulus: number;
}

/** Adaptive Gauss–Kronrod along a polyline, the worst stretch halved until the sum is good enough. */
function pathIntegral(
  sources: readonly Source[],
  medium: Medium,
  path: readonly Vec3[],
  read: (value: FieldValue) => { readonly vector: Vec3; readonly error: number },
  potentials: boolean,
  { tolerance = 1e-9, maxEvaluations = 20_000 }: PathOptions,
): (t: number) => PathIntegral {
  const corners = path.slice(1).flatMap((to, m) => {
    const from = path[m]!;
    return norm(sub(to, from)) > 0 ? [{ from, to }] : [];
  });
  if (corners.length === 0)
    throw new RangeError(`the path has ${path.length} points and no length; give two or more different ones.`);
  for (const { from, to } of corners) refuseCrossing(sources, from, to);
  const field = fieldOf(prepareSources(sources, medium, 'best'), { tolerance: tolerance / 10, potentials });

  const stretch = (from: Vec3, to: Vec3, t: number): Stretch => {
    const d = sub(to, from);
    let value = 0;
    let difference = 0;
    let modulus = 0;
    let own = 0;
    for (let m = 0; m < KRONROD_POINTS; m++) {
      const f = (1 + kronrod.nodes[m]!) / 2;
      const { vector, error } = read(field([from[0] + f * d[0], from[1] + f * d[1], from[2] + f * d[2]], t));
      const along = vector[0] * d[0] + vector[1] * d[1] + vector[2] * d[2];
      value += (kronrod.weights[m]! / 2) * along;
      difference += (kronrod.differences[m]! / 2) * along;
      modulus += (kronrod.weights[m]! / 2) * norm(vector) * norm(d);
      own += (kronrod.weights[m]! / 2) * error * norm(d);
    }
    return { from, to, value, error: Math.abs(difference), own, modulus };
  };

  return (t) => {
    const parts = corners.map(({ from, to }) => stretch(from, to, t));
    let evaluations = parts.length * KRONROD_POINTS;
    for (;;) {
      const total = (key: 'value' | 'error' | 'own' | 'modulus') => parts.reduce((sum, part) => sum + part[key], 0);
      const [error, own] = [total('error'), total('own')];
      const enough = error <= Math.max(tolerance * total('modulus'), own);
      if (enough || evaluations + 2 * KRONROD_POINTS > maxEvaluations)
        return { value: total('value'), error: error + own, evaluations };
      const worst = parts.reduce((w, part, m) => (part.error > parts[w]!.error ? m : w), 0);
      const { from, to } = parts[worst]!;
      const middle = from.map((x, a) => (x + to[a]!) / 2) as unknown as Vec3;
      parts.splice(worst, 1, stretch(from, middle, t), stretch(middle, to, t));
      evaluations += 2 * KRONROD_POINTS;
    }
  };
}

/** A path that comes nearer to a source than this share of its segment's length crosses it. */
const TOUCHING = 1e-9;

/**
 * Distances change by no more than one walks: a stretch whose middle is farther from all sources than half its length
 * cannot meet one; others are halved until they are too short to tell.
 */
function refuseCrossing(sources: readonly Source[], first: Vec3, last: Vec3): void {
  const least = TOUCHING * norm(sub(last, first));
  const shown = (x: number) => Number((Math.round(x / (1e3 * least)) * 1e3 * least).toPrecision(6));
  const visit = (from: Vec3, to: Vec3): void => {
    const half = norm(sub(to, from)) / 2;
    const middle = from.map((x, a) => (x + to[a]!) / 2) as unknown as Vec3;
    if (distanceToSources(sources, middle) > half + least) return;
    if (half <= least) {
      const [name] = sources
        .map((source) => [source.name, distanceToSources([source], middle)] as const)
        .reduce((nearest, next) => (next[1] < nearest[1] ? next : nearest));
      throw new RangeError(
        `the path crosses source “${name}” at (${middle.map(shown).join(', ')}) m, where the ` +
          'field of a filament is infinite. Lead it round.',
      );
    }
    visit(from, middle);
    visit(middle, to);
  };
  visit(first, last);
}
