import type { WaveTerm } from '../scenario/model.ts';
import { crossing, type PieceView } from './pieceView.ts';
import type { Integral, Prepared } from './prepare.ts';

/**
 * Cuts [from, to] in halves until each part is no longer than `grading` times its distance from the observer, nor than
 * `longest` (m). On such a part the integrand is analytic within an ellipse that the distance sets, whatever the distance
 * is. Appends the upper ends of the parts, ascending.
 */
export function gradedCuts(
  view: PieceView,
  from: number,
  to: number,
  grading: number,
  longest: number,
  cuts: number[],
): void {
  const length = to - from;
  const middle = from + length / 2;
  const tooLong = length > grading * view.distance(from, to) || length > longest;
  if (tooLong && middle > from && middle < to) {
    gradedCuts(view, from, middle, grading, longest, cuts);
    gradedCuts(view, middle, to, grading, longest, cuts);
  } else cuts.push(to);
}

/**
 * The longest part on which a term varies little, m: its delay s·slowness + R/v by two of the waveform's time scales, its
 * profile by one of its own.
 */
export function longestPart({ slowness, profile }: WaveTerm, timeScale: number, speed: number): number {
  const byDelay = (2 * timeScale * speed) / (1 + Math.abs(slowness * speed));
  return profile ? Math.min(byDelay, profile.scale) : byDelay;
}

/** Where a wave term's delay, delay + slowness·s + R(s)/v, equals `target`: arc lengths, ascending. */
export function fronts(view: PieceView, delay: number, slowness: number, speed: number, target: number): number[] {
  const bend = slowness * speed;
  const reach = (target - delay) * speed;
  const stations = [view.start, ...view.turns(bend), view.end];
  const found: number[] = [];
  for (let m = 1; m < stations.length; m++) {
    const s = crossing(view, bend, reach, stations[m - 1]!, stations[m]!);
    if (s !== undefined && s !== found.at(-1)) found.push(s);
  }
  return found;
}

/** w(0⁺), A: the size of the jump with which an integral's waveform starts; 0 where jumps do not count. */
export function onset(prepared: Prepared, integral: Integral): number {
  const waveform = prepared.waveforms[integral.waveform]!;
  return prepared.impulses && waveform.kinks.length > 0 ? waveform.value(0) : 0;
}

/** |d(delay)/ds| at s, s/m, and the element there left in `view`. */
export function delayRate(view: PieceView, s: number, slowness: number, speed: number): number {
  view.look(s);
  return Math.abs(slowness - (view.x * view.sx + view.y * view.sy + view.z * view.sz) / (view.r * speed));
}

/**
 * Relative rounding of a front's D/|dτ/ds| at the place left in `view`: a rounding of the instant moves the front by
 * δt/|dτ/ds|, over which dτ/ds changes at a rate of about 1/(vR).
 */
export function frontRounding(view: PieceView, rate: number, t: number, speed: number): number {
  return Number.EPSILON * (8 + (2 * Math.abs(t)) / (speed * view.r * rate * rate));
}

/** What t − delay − slowness·s − R/v is rounded to, s. */
export const instantRounding = (t: number, delay: number, along: number, travel: number): number =>
  Number.EPSILON * (Math.abs(t) + Math.abs(delay) + Math.abs(along) + 2 * travel);
