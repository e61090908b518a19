import { fieldOf } from '../retarded/field.ts';
import { historyOf } from '../retarded/history.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { firstArrival, lastArrival } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';
import { bisect } from '../scenario/search.ts';
import { COMPONENTS, type Component, instantsOf, samplePoints } from '../trace/trace.ts';

/** The pulse that one field makes at a point, told by its strongest component (the largest ∫F² dt). */
export interface Pulse {
  readonly component: Component;
  /** the largest |F|, V/m or A/m, with the sign of F there */
  readonly peak: number;
  /** when, s */
  readonly peakTime: number;
  /**
   * from the last instant before the peak at which F is 10 % of it to the first after that at which it is 90 %, s; NaN
   * where the field does not rise from below 10 %
   */
  readonly riseTime: number;
}

/** What the fields are at rest for: slopes of currents below this part of their peak. */
const ACTIVE = 1e-6;

/** Instants in the shortest time scale, and at most. */
const SAMPLES = 8;
const MOST_SAMPLES = 20_000;

/** What share of the peak the rise begins and ends at. */
const FOOT = 0.1;
const TOP = 0.9;

/**
 * Peak and 10–90 % rise time of the exact E and H at a point. Found on samples eight to the shortest time scale, then on
 * the field itself: peak and crossings are right to rounding of the field.
 * @returns null for a field that vanishes there
 * @throws (from what it returns) RangeError where the point lies on a source, naming it
 */
export function pulseAt(
  sources: readonly Source[],
  medium: Medium,
): (point: Vec3) => { readonly E: Pulse | null; readonly H: Pulse | null } {
  const prepared = prepareSources(sources, medium, 'best');
  const field = fieldOf(prepared, { potentials: false });
  const scale = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  return (point) => {
    const start = firstArrival(sources, medium, point);
    const stretch = lastArrival(sources, medium, point, ACTIVE) - start + scale;
    const step = Math.max(scale / SAMPLES, stretch / MOST_SAMPLES);
    const { E: after, count } = instantsOf(Math.ceil(stretch / step), step);
    const instants = { count, E: after.map((t) => start + t), H: after.map((t) => start + t) };
    // A cell without extent has all its six sites at the point.
    const { values } = historyOf(prepared, samplePoints(new Int32Array(3), point, [0, 0, 0]), instants);
    const strongest = (first: number) => {
      const squares = [0, 1, 2].map((c) =>
        values.subarray((first + c) * count, (first + c + 1) * count).reduce((sum, v) => sum + v * v, 0),
      );
      return first + squares.indexOf(Math.max(...squares));
    };
    const pulseOf = (first: number, other: number): Pulse | null => {
      const c = strongest(first);
      const samples = values.subarray(c * count, (c + 1) * count);
      const size = samples.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
      // What vanishes by symmetry is rounding of the other field.
      const against = values.subarray(other * count, (other + 3) * count).reduce((m, v) => Math.max(m, Math.abs(v)), 0);
      const unit = first === 0 ? medium.impedance : 1 / medium.impedance;
      if (size <= VANISHES * unit * against) return null;
      const at = (t: number) => (c < 3 ? field(point, t).E[c]! : field(point, t).H[c - 3]!);
      return pulseOn(at, samples, instants.E, COMPONENTS[c]!);
    };
    return { E: pulseOf(0, 3), H: pulseOf(3, 0) };
  };
}

/** A field below this share of the other vanishes by symmetry (−200 dB). */
const VANISHES = 1e-10;

/** Refines what samples show of a component's pulse on the component itself. */
function pulseOn(
  at: (t: number) => number,
  samples: Float64Array,
  instants: Float64Array,
  component: Component,
): Pulse {
  let index = 0;
  samples.forEach((v, n) => {
    if (Math.abs(v) > Math.abs(samples[index]!)) index = n;
  });
  const sign = samples[index]! < 0 ? -1 : 1;
  let low = instants[Math.max(0, index - 1)]!;
  let high = instants[Math.min(instants.length - 1, index + 1)]!;
  for (let n = 0; n < HALVINGS; n++) {
    const third = (high - low) / 3;
    if (sign * at(low + third) < sign * at(high - third)) low += third;
    else high -= third;
  }
  const peakTime = (low + high) / 2;
  const peak = at(peakTime);

  const share = (n: number) => samples[n]! / peak;
  let foot = index;
  while (foot >= 0 && share(foot) > FOOT) foot--;
  if (foot < 0) return { component, peak, peakTime, riseTime: Number.NaN };
  let top = foot;
  while (top < index && share(top) < TOP) top++;
  const crossing = (level: number, before: number, after: number) => bisect((t) => at(t) / peak < level, before, after);
  const begins = crossing(FOOT, instants[foot]!, instants[foot + 1]!);
  const ends = crossing(TOP, instants[top - 1]!, Math.min(instants[top]!, peakTime));
  return { component, peak, peakTime, riseTime: ends - begins };
}

/** Of the interval about the peak, by thirds: the peak is flat, its instant is right to the root of a rounding. */
const HALVINGS = 44;
