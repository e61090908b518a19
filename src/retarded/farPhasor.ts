import { cos, sin } from '../elementary/elementary.ts';
import { type ArcPiece, dot, type LinePiece } from '../scenario/curve.ts';
import type { Filament, Medium, Source, Vec3, WaveTerm } from '../scenario/model.ts';
import { carrying } from '../scenario/profiles.ts';
import { gaussLegendre } from './quadrature.ts';
import { WaveformSet } from './terms.ts';
import { type Complex, type Drive, linesOf, type WaveformLine } from './waveformSpectrum.ts';

/** r·E(r) e^(+jkr) for r → ∞, r from the origin: V in the steady state, V/Hz of a pulse. */
export interface FarPhasor {
  /** x, y, z; across the direction */
  readonly values: readonly [Complex, Complex, Complex];
  /** bound on the Euclidean norm of its error */
  readonly error: number;
}

/**
 * What sources radiate along a direction n at a frequency, e^(+jωt):
 *   r E e^(jkr) = −jωμ/(4π) (1 − n n·) Σ W ∫ ŝ a(s) e^(−jω(delay + slowness s − n·x(s)/v)) ds + dipoles
 * (Balanis, Antenna Theory, 4th ed., §12.2, from memory). On a straight piece without profile the integral is
 * L sinc(ωL dτ/ds/2) e^(−jωτ(middle)); others are taken by Gauss's rule on parts of a limited phase.
 * @throws (from what it returns) RangeError for a frequency that is not above 0, or at which a current given by frequency is
 *   not known
 */
export function farPhasorOf(
  sources: readonly Source[],
  medium: Medium,
  drive: Drive,
): (direction: Vec3, frequency: number) => FarPhasor {
  const set = new WaveformSet();
  const owners = sources.map(({ waveform }) => set.index(waveform));
  const linesAt = linesOf(set.list, drive);
  let known: { frequency: number; lines: WaveformLine[] } = { frequency: Number.NaN, lines: [] };
  return (direction, frequency) => {
    if (!(frequency > 0)) throw new RangeError(`frequency is ${frequency} Hz; a far field needs one above 0.`);
    const omega = 2 * Math.PI * frequency;
    if (frequency !== known.frequency) known = { frequency, lines: linesAt(frequency) };
    const total = new Float64Array(6);
    let error = 0;
    sources.forEach((source, n) => {
      const { value, error: off } = known.lines[owners[n]!]!;
      const own = new Float64Array(6);
      const { quadrature, size } = addCurrent(source, medium.speed, direction, omega, own);
      for (let a = 0; a < 6; a += 2) {
        total[a]! += own[a]! * value[0] - own[a + 1]! * value[1];
        total[a + 1]! += own[a]! * value[1] + own[a + 1]! * value[0];
      }
      const strength = Math.sqrt(value[0] * value[0] + value[1] * value[1]);
      error += strength * quadrature + off * size;
    });
    // −jωμ/(4π), and what is across n
    const gain = (omega * medium.permeability) / (4 * Math.PI);
    const along = [0, 1].map((part) => direction.reduce((sum, d, a) => sum + d * total[2 * a + part]!, 0));
    const pair = (a: 0 | 1 | 2): Complex => [
      gain * (total[2 * a + 1]! - direction[a] * along[1]!),
      -gain * (total[2 * a]! - direction[a] * along[0]!),
    ];
    return { values: [pair(0), pair(1), pair(2)], error: gain * error };
  };
}

/** |r E|², V² or V²/Hz² */
export const squareOf = ({ values }: FarPhasor): number => values.reduce((sum, [re, im]) => sum + re * re + im * im, 0);

/** The largest phase, rad, that half of a part turns by: Gauss's 16 points integrate it to rounding. */
const HALF_PHASE = 4;
const POINTS = 16;
const FEWER_POINTS = 11;

/** Adds ∫ ŝ a e^(−jωτ) ds of a source of 1 A, A·m; returns a bound on its error, and ∫|a| ds or the moment. */
function addCurrent(
  source: Source,
  speed: number,
  direction: Vec3,
  omega: number,
  out: Float64Array,
): { quadrature: number; size: number } {
  if (source.type === 'dipole') {
    const phase = (omega * dot(source.at, direction)) / speed;
    addVector(out, source.direction, source.length * cos(phase), source.length * sin(phase));
    return { quadrature: Number.EPSILON * (8 + Math.abs(phase)) * source.length, size: source.length };
  }
  let quadrature = 0;
  let size = 0;
  for (const term of source.terms)
    for (const [piece] of carrying(source)) {
      const straight = piece.kind === 'line' && !term.profile;
      quadrature += straight
        ? addLine(piece, term, speed, direction, omega, out)
        : addByQuadrature(source, piece, term, speed, direction, omega, out);
      size += Math.abs(term.factor) * piece.length;
    }
  return { quadrature, size };
}

function addVector(out: Float64Array, vector: ArrayLike<number>, re: number, im: number): void {
  for (let a = 0; a < 3; a++) {
    out[2 * a]! += vector[a]! * re;
    out[2 * a + 1]! += vector[a]! * im;
  }
}

function addLine(
  { s0, length, from, direction: tangent }: LinePiece,
  { factor, delay, slowness }: WaveTerm,
  speed: number,
  direction: Vec3,
  omega: number,
  out: Float64Array,
): number {
  const rate = slowness - dot(tangent, direction) / speed;
  const middle = delay + slowness * s0 - dot(from, direction) / speed + (rate * length) / 2;
  const half = (omega * rate * length) / 2;
  const whole = factor * length * (half === 0 ? 1 : sin(half) / half);
  addVector(out, tangent, whole * cos(omega * middle), -whole * sin(omega * middle));
  return Number.EPSILON * (8 + omega * Math.abs(middle) + Math.abs(half)) * Math.abs(factor) * length;
}

function addByQuadrature(
  { curve }: Filament,
  piece: LinePiece | ArcPiece,
  term: WaveTerm,
  speed: number,
  direction: Vec3,
  omega: number,
  out: Float64Array,
): number {
  const { factor, delay, slowness, profile } = term;
  const turning = (2 * HALF_PHASE) / (omega * (1 / speed + Math.abs(slowness)));
  const bending = piece.kind === 'arc' ? piece.radius : Number.POSITIVE_INFINITY;
  const longest = Math.min(turning, bending, profile?.scale ?? Number.POSITIVE_INFINITY);
  const end = piece.s0 + piece.length;
  const breaks = (profile?.breaks ?? []).filter((s) => s > piece.s0 && s < end);
  const stations = [piece.s0, ...breaks, end];
  const place = new Float64Array(3);
  const tangent = new Float64Array(3);
  const fine = new Float64Array(6);
  const coarse = new Float64Array(6);
  let latest = 0;
  for (let m = 1; m < stations.length; m++) {
    const parts = Math.ceil((stations[m]! - stations[m - 1]!) / longest);
    const half = (stations[m]! - stations[m - 1]!) / (2 * parts);
    for (const [sum, points] of [
      [fine, POINTS],
      [coarse, FEWER_POINTS],
    ] as const) {
      const { nodes, weights } = gaussLegendre(points);
      for (let p = 0; p < parts; p++)
        nodes.forEach((x, n) => {
          const s = stations[m - 1]! + half * (2 * p + 1 + x);
          piece.point(s, place);
          piece.tangent(s, tangent);
          const towards = place[0]! * direction[0] + place[1]! * direction[1] + place[2]! * direction[2];
          const tau = delay + slowness * s - towards / speed;
          const amount = half * weights[n]! * factor * (profile ? profile.value(s) : 1);
          latest = Math.max(latest, Math.abs(tau));
          addVector(sum, tangent, amount * cos(omega * tau), -amount * sin(omega * tau));
        });
    }
  }
  let difference = 0;
  for (let c = 0; c < 6; c++) {
    out[c]! += fine[c]!;
    difference += (fine[c]! - coarse[c]!) ** 2;
  }
  return Math.sqrt(difference) + Number.EPSILON * (8 + omega * latest) * Math.abs(factor) * curve.length;
}
