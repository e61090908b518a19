import { log, pow } from '../elementary/elementary.ts';
import { type PartPeaks, partPeaksOf } from '../retarded/parts.ts';
import { distanceToSources, firstArrival, lastArrival, sourceBounds } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';

/** Where along a line which part of E (near 1/r³, induction 1/r², radiation 1/r) has the largest peak. */
export interface Regions {
  /** the middle of the sources, from which the line starts, m */
  readonly centre: Vec3;
  /** unit vector */
  readonly direction: Vec3;
  /** up to here from the centre the near part is the largest, m; null where it nowhere is outside of the sources */
  readonly nearTo: number | null;
  /** from here on the radiation part is the largest, m; null where it is everywhere outside of the sources */
  readonly radiationFrom: number | null;
}

export type PartName = keyof PartPeaks;

/** Which part of E has the largest peak, and the peaks, V/m. */
export interface LargestPart extends PartPeaks {
  readonly largest: PartName;
}

/** The peaks of a point are looked for at so many instants. */
const INSTANTS = 60;

/** The last of them is when what radiates has fallen to this part of its peak. */
const ACTIVE = 1e-3;

/**
 * Which part of E is the largest at points: peaks over time of each part, from the first arrival until the sources have
 * passed. What charge leaves behind for ever counts in the near part.
 * @throws (from what it returns) RangeError where the point lies on a source, naming it
 */
export function largestPartAt(sources: readonly Source[], medium: Medium): (point: Vec3) => LargestPart {
  const peaks = partPeaksOf(sources, medium);
  return (point) => {
    const first = firstArrival(sources, medium, point);
    const last = lastArrival(sources, medium, point, ACTIVE);
    const instants = Array.from({ length: INSTANTS }, (_, n) => first + ((last - first) * (n + 1)) / INSTANTS);
    const found = peaks(point, instants);
    const largest = (['near', 'induction', 'radiation'] as const).reduce((best, part) =>
      found[part] > found[best] ? part : best,
    );
    return { ...found, largest };
  };
}

/** The middle of the box around all sources, m. */
export function centreOf(sources: readonly Source[]): Vec3 {
  const bounds = sources.map(sourceBounds);
  return [0, 1, 2].map(
    (a) => (Math.min(...bounds.map(({ from }) => from[a]!)) + Math.max(...bounds.map(({ to }) => to[a]!))) / 2,
  ) as unknown as Vec3;
}

/** log f, which grows by one to two for every e-fold of r, is brought below this. */
const ACCURACY = 3e-3;
const MOST_ROUNDS = 40;

/** In wavelengths of time scales: nearer to the sources nothing is looked at. */
const NEAREST = 1e-3;

/** Where the parts take over from each other along a line from the middle of the sources outwards. */
export function regionsAlong(sources: readonly Source[], medium: Medium): (direction: Vec3) => Regions {
  const at = largestPartAt(sources, medium);
  const centre = centreOf(sources);
  const pulse = medium.speed * Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  return (direction) => {
    const place = (r: number): Vec3 => direction.map((d, a) => centre[a]! + r * d) as unknown as Vec3;
    const least = outside(sources, place, NEAREST * pulse);
    // Both searches look at the same distances first, and at the same ones throughout where induction never leads.
    const known = new Map<number, PartPeaks>();
    const peaksAt = (r: number): PartPeaks => {
      const found = known.get(r) ?? at(place(r));
      known.set(r, found);
      return found;
    };
    /** Where log f, f < 1 nearer and f > 1 farther, is 0: nearly straight over log r, so that few chords find it. */
    const where = (excess: (p: PartPeaks) => number): number | null => {
      let low = { r: least, f: excess(peaksAt(least)) };
      if (low.f > 1) return null;
      let high = low;
      for (let n = 0; n < MOST_ROUNDS && high.f < 1; n++) {
        low = high;
        const r = Math.max(4 * low.r, pulse);
        high = { r, f: excess(peaksAt(r)) };
      }
      for (let n = 0; n < MOST_ROUNDS; n++) {
        const share = -log(low.f) / (log(high.f) - log(low.f));
        const r = low.r * pow(high.r / low.r, share);
        const f = excess(peaksAt(r));
        if (Math.abs(log(f)) < ACCURACY) return r;
        if (f < 1) low = { r, f };
        else high = { r, f };
      }
      return low.r;
    };
    return {
      centre,
      direction,
      nearTo: where(({ near, induction, radiation }) => Math.max(induction, radiation) / near),
      radiationFrom: where(({ near, induction, radiation }) => radiation / Math.max(near, induction)),
    };
  };
}

/** The least distance along the line beyond which no source is nearer than `gap`: from the far end of the sources. */
function outside(sources: readonly Source[], place: (r: number) => Vec3, gap: number): number {
  const bounds = sources.map(sourceBounds);
  const origin = place(0);
  let reach = gap;
  for (const { from, to } of bounds)
    for (const corner of [0, 1, 2, 3, 4, 5, 6, 7]) {
      const square = [0, 1, 2].reduce((sum, a) => sum + (((corner >> a) & 1 ? from : to)[a]! - origin[a]!) ** 2, 0);
      reach = Math.max(reach, Math.sqrt(square));
    }
  let r = reach;
  while (distanceToSources(sources, place(r)) < gap) r += gap;
  return r;
}
