import { atan2 } from '../elementary/elementary.ts';
import { type ArcPiece, dot, type LinePiece } from '../scenario/curve.ts';
import type { Dipole, Filament, Medium, Source, Vec3, WaveTerm } from '../scenario/model.ts';
import { carrying } from '../scenario/profiles.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { SMALL_GAP } from './field.ts';
import { fronts, gradedCuts, longestPart } from './panels.ts';
import type { PieceView } from './pieceView.ts';
import { gaussLegendre, KRONROD_POINTS, kronrod } from './quadrature.ts';

export interface FarField {
  /** r·E across the direction: values[axis·count + n], V */
  readonly values: Float64Array;
  /** bound on every value's error, V */
  readonly error: number;
  readonly evaluations: number;
}

/**
 * What a source radiates along a direction n, where r → ∞ and t′ = t − r/v (r from the origin):
 *   r E = −μ/(4π) (1 − n n·) ∫ ŝ İ(s, t′ + n·x(s)/v) ds
 * (the 1/R part of Jefimenko's equations; the charges' part is along n). On a straight piece the integral
 * of a term without profile is (w(t′ − τ₀) − w(t′ − τ₁))/(dτ/ds), τ = delay + slowness s − n·x(s)/v; others are taken by
 * Gauss–Kronrod.
 * @param direction unit vector
 * @param times values of t′, s; they may be negative, and parts of the source towards n are felt before t′ = 0
 */
export function farField(sources: readonly Source[], medium: Medium, direction: Vec3, times: Float64Array): FarField {
  const sum: FarSum = {
    direction,
    speed: medium.speed,
    times,
    values: new Float64Array(3 * times.length),
    error: 0,
    evaluations: 0,
  };
  for (const source of sources)
    if (source.type === 'dipole') addDipole(source, sum);
    else
      for (const [piece] of carrying(source))
        for (const term of source.terms)
          if (piece.kind === 'line' && !term.profile) addLine(source, piece, term, sum);
          else addByQuadrature(source, piece, term, sum);
  const gain = -medium.permeability / (4 * Math.PI);
  for (let m = 0; m < sum.values.length; m++) sum.values[m]! *= gain;
  return { values: sum.values, error: sum.error * Math.abs(gain), evaluations: sum.evaluations };
}

/** Adds up ∫ ŝ İ ds across the direction. */
interface FarSum {
  readonly direction: Vec3;
  readonly speed: number;
  readonly times: Float64Array;
  readonly values: Float64Array;
  error: number;
  evaluations: number;
}

/** d − n(n·d) */
const across = (d: Vec3, n: Vec3): Vec3 => {
  const along = dot(d, n);
  return [d[0] - along * n[0], d[1] - along * n[1], d[2] - along * n[2]];
};

function addTo(sum: FarSum, n: number, vector: Vec3, amount: number): void {
  for (let a = 0; a < 3; a++) sum.values[a * sum.times.length + n]! += vector[a]! * amount;
}

/** Roundings of an instant that a waveform feels, besides a few of its own. */
const rounding = (waveform: Waveform, times: Float64Array): number =>
  Number.EPSILON * (8 + (2 * Math.abs(times.at(-1) ?? 0)) / waveform.timeScale);

function addDipole({ at, direction, length, waveform }: Dipole, sum: FarSum): void {
  const lead = dot(at, sum.direction) / sum.speed;
  const moment = across([length * direction[0], length * direction[1], length * direction[2]], sum.direction);
  let peak = 0;
  sum.times.forEach((t, n) => {
    const slope = waveform.slope(t + lead);
    peak = Math.max(peak, Math.abs(slope));
    addTo(sum, n, moment, slope);
  });
  sum.error += rounding(waveform, sum.times) * length * peak;
  sum.evaluations += sum.times.length;
}

function addLine(source: Filament, piece: LinePiece, term: WaveTerm, sum: FarSum): void {
  const { waveform } = source;
  const { s0, length, from, to } = piece;
  const vector = across(piece.direction, sum.direction);
  const first = term.delay + term.slowness * s0 - dot(from, sum.direction) / sum.speed;
  const rate = term.slowness - dot(piece.direction, sum.direction) / sum.speed;
  const last = term.delay + term.slowness * (s0 + length) - dot(to, sum.direction) / sum.speed;
  const gap = Math.abs(last - first);
  const small = gap < SMALL_GAP * waveform.timeScale;
  const { nodes, weights } = gaussLegendre(GAP_POINTS);
  let peak = 0;
  sum.times.forEach((t, n) => {
    const early = t - Math.max(first, last);
    const late = t - Math.min(first, last);
    let integral = 0;
    if (small && !waveform.kinks.some((kink) => early < kink && late >= kink))
      for (let m = 0; m < GAP_POINTS; m++)
        integral += (length / 2) * weights[m]! * waveform.slope(early + (gap * (1 + nodes[m]!)) / 2);
    else integral = (waveform.value(t - first) - waveform.value(t - last)) / rate;
    peak = Math.max(peak, Math.abs(integral));
    addTo(sum, n, vector, term.factor * integral);
  });
  sum.error +=
    rounding(waveform, sum.times) * Math.abs(term.factor) * Math.max(peak, small ? 0 : waveform.peak / Math.abs(rate));
  sum.evaluations += sum.times.length;
}

const GAP_POINTS = 4;

function addByQuadrature(source: Filament, piece: LinePiece | ArcPiece, term: WaveTerm, sum: FarSum): void {
  const { waveform } = source;
  const view = piece.kind === 'line' ? new FarLineView(piece, sum.direction) : new FarArcView(piece, sum.direction);
  const { factor, delay, slowness, profile } = term;
  const jump = waveform.kinks.length > 0 ? waveform.value(0) : 0;
  const amplitude = (s: number) => (profile ? profile.value(s) : 1);
  const breaks = (profile?.breaks ?? []).filter((s) => s > view.start && s < view.end);
  const longest = longestPart(term, waveform.timeScale / 2, sum.speed);
  const total = [0, 0, 0];
  const difference = [0, 0, 0];
  let worst = 0;
  let peak = 0;
  sum.times.forEach((t, n) => {
    const stations = [view.start, view.end, ...breaks];
    for (const kink of waveform.kinks) stations.push(...fronts(view, delay, slowness, sum.speed, t - kink));
    stations.sort((p, q) => p - q);
    const cuts: number[] = [];
    for (let m = 1; m < stations.length; m++) gradedCuts(view, stations[m - 1]!, stations[m]!, 1, longest, cuts);
    total.fill(0);
    difference.fill(0);
    let from = view.start;
    for (const to of cuts) {
      const half = (to - from) / 2;
      for (let m = 0; half > 0 && m < KRONROD_POINTS; m++) {
        const s = from + half * (1 + kronrod.nodes[m]!);
        view.look(s);
        const slope = half * amplitude(s) * waveform.slope(t - delay - slowness * s - view.r / sum.speed);
        const tangent = [view.sx, view.sy, view.sz];
        for (let a = 0; a < 3; a++) {
          total[a]! += kronrod.weights[m]! * slope * tangent[a]!;
          difference[a]! += kronrod.differences[m]! * slope * tangent[a]!;
        }
      }
      sum.evaluations += KRONROD_POINTS;
      from = to;
    }
    if (jump !== 0)
      for (const s of fronts(view, delay, slowness, sum.speed, t)) {
        view.look(s);
        const rate = Math.abs(slowness - (view.sx * view.x + view.sy * view.y + view.sz * view.z) / sum.speed);
        if (rate === 0) continue;
        const size = (jump * amplitude(s)) / rate;
        total[0]! += size * view.sx;
        total[1]! += size * view.sy;
        total[2]! += size * view.sz;
      }
    worst = Math.max(worst, Math.abs(difference[0]!) + Math.abs(difference[1]!) + Math.abs(difference[2]!));
    peak = Math.max(peak, Math.abs(total[0]!) + Math.abs(total[1]!) + Math.abs(total[2]!));
    addTo(sum, n, across([total[0]!, total[1]!, total[2]!], sum.direction), factor);
  });
  sum.error += Math.abs(factor) * (worst + rounding(waveform, sum.times) * peak);
}

/** A straight piece seen from infinity along n: R less the distance of the origin, −n·x(s); (x, y, z) is n. */
class FarLineView implements PieceView {
  readonly start: number;
  readonly end: number;
  readonly nearest: number;
  readonly x: number;
  readonly y: number;
  readonly z: number;
  readonly sx: number;
  readonly sy: number;
  readonly sz: number;
  r = 0;
  /** −n·x at the start, and its slope */
  readonly #first: number;
  readonly #slope: number;

  constructor(piece: LinePiece, direction: Vec3) {
    this.start = piece.s0;
    this.end = piece.s0 + piece.length;
    this.nearest = piece.s0;
    [this.x, this.y, this.z] = direction;
    [this.sx, this.sy, this.sz] = piece.direction;
    this.#first = -dot(piece.from, direction);
    this.#slope = -dot(piece.direction, direction);
  }

  look(s: number): void {
    this.r = this.#first + (s - this.start) * this.#slope;
  }

  distance(): number {
    return Number.POSITIVE_INFINITY;
  }

  /** s·bend + R is a straight line in s. */
  turns(): number[] {
    return [];
  }
}

/** A circle seen from infinity along n: R less the distance of the origin, −n·x(s); (x, y, z) is n. */
class FarArcView implements PieceView {
  readonly start: number;
  readonly end: number;
  readonly nearest: number;
  readonly x: number;
  readonly y: number;
  readonly z: number;
  r = 0;
  sx = 0;
  sy = 0;
  sz = 0;
  readonly #place = new Float64Array(3);
  readonly #tangent = new Float64Array(3);

  constructor(
    readonly piece: ArcPiece,
    direction: Vec3,
  ) {
    this.start = piece.s0;
    this.end = piece.s0 + piece.length;
    this.nearest = piece.s0;
    [this.x, this.y, this.z] = direction;
  }

  look(s: number): void {
    this.piece.point(s, this.#place);
    this.piece.tangent(s, this.#tangent);
    this.r = -(this.#place[0]! * this.x + this.#place[1]! * this.y + this.#place[2]! * this.z);
    [this.sx, this.sy, this.sz] = [this.#tangent[0]!, this.#tangent[1]!, this.#tangent[2]!];
  }

  distance(): number {
    return Number.POSITIVE_INFINITY;
  }

  /** bend = n·ŝ = b cos θ − a sin θ = ρ cos(θ + ψ), a and b being n·u and n·v */
  turns(bend: number): number[] {
    const n: Vec3 = [this.x, this.y, this.z];
    const a = dot(n, this.piece.u);
    const b = dot(n, this.piece.v);
    const rho = Math.sqrt(a * a + b * b);
    if (!(Math.abs(bend) < rho)) return [];
    const psi = atan2(a, b);
    const half = atan2(Math.sqrt((rho - bend) * (rho + bend)), bend);
    const turn = 2 * Math.PI;
    return [-psi - half, -psi + half]
      .map((angle) => this.start + (angle - turn * Math.floor(angle / turn)) * this.piece.radius)
      .filter((s) => s > this.start && s < this.end)
      .sort((p, q) => p - q);
  }
}
