import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import type { Routes } from '../compare/result.ts';
import { type FieldValue, fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { fieldBySpectrum, type Peaks, type SpectralValue, spectralWork } from '../retarded/spectral.ts';
import { distanceToSources, firstArrival } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';
import { VANISHES } from './levels.ts';

/** What both routes to the exact field give at one point and instant. */
interface RouteValue {
  readonly E: Vec3;
  readonly H: Vec3;
  readonly phi: number;
  readonly A: Vec3;
}

/** The largest sizes of a field at a point, and how far it is from the nearest source, m. */
export interface PeaksAt extends Peaks {
  readonly distance: number;
}

/** How far two routes are apart in one quantity. */
export interface Disagreement {
  readonly quantity: 'E' | 'H' | 'phi' | 'A';
  /** largest difference, relative to the peak at the same point */
  readonly largest: number;
  /** where that is: its number in the lists */
  readonly row: number;
  /** that peak, V/m, A/m, V, V·s/m */
  readonly peak: number;
}

/**
 * The largest difference of two routes in each quantity, relative to the peak of its vector at the same point. H is measured
 * against E/η where that is larger, φ and vA against each other: one of them may vanish by symmetry.
 * @param peaks those of each row's point
 */
export function disagreement(
  first: readonly RouteValue[],
  second: readonly RouteValue[],
  peaks: readonly PeaksAt[],
  { speed, impedance }: { readonly speed: number; readonly impedance: number },
): Disagreement[] {
  const scales = scalesOf({ speed, impedance });
  const quantities = [
    { quantity: 'E', of: ({ E }: RouteValue) => E },
    { quantity: 'H', of: ({ H }: RouteValue) => H },
    { quantity: 'phi', of: ({ phi }: RouteValue) => [phi] },
    { quantity: 'A', of: ({ A }: RouteValue) => A },
  ] as const;
  return quantities.map(({ quantity, of }) => {
    const peak = scales[quantity];
    let worst: Disagreement = { quantity, largest: 0, row: 0, peak: peaks.length > 0 ? peak(peaks[0]!) : 0 };
    first.forEach((value, row) => {
      const other = of(second[row]!);
      const off = norm(of(value).map((x, c) => x - other[c]!));
      const scale = peak(peaks[row]!);
      const largest = off === 0 ? 0 : off / scale;
      if (largest > worst.largest) worst = { quantity, largest, row, peak: scale };
    });
    return worst;
  });
}

/**
 * What each quantity is measured against, of the peaks at a point. On the axis of a loop E and both potentials are 0 but for
 * rounding: a part of ηH, or of it over the distance, is what their rounding is small against.
 */
const scalesOf = ({ speed, impedance }: { readonly speed: number; readonly impedance: number }) => {
  const field = ({ E, H }: Peaks) => Math.max(E, impedance * H);
  const potential = (peaks: PeaksAt) => Math.max(peaks.phi, speed * peaks.A, VANISHES * peaks.distance * field(peaks));
  return {
    E: (peaks: PeaksAt) => Math.max(peaks.E, VANISHES * field(peaks)),
    H: (peaks: PeaksAt) => Math.max(peaks.H, peaks.E / impedance),
    phi: potential,
    A: (peaks: PeaksAt) => potential(peaks) / speed,
  };
};

const norm = (v: readonly number[]): number => Math.sqrt(v.reduce((sum, x) => sum + x * x, 0));

/** Largest part of the peak by which routes may differ for smooth pulses, beside what they tell of their own errors. */
const LIMIT = 1e-8;

/** Places, and instants at each, that are drawn. */
const MOST_PLACES = 3;
const INSTANTS = 4;

/** Terms of the line spectra that all places may take together: some 0.1 s. */
const MOST_TERMS = 1.5e6;

/** A place where the exact field is known, by its observer's name if it has one. */
export interface RoutePlace {
  readonly observer: string | null;
  readonly at: Vec3;
}

/**
 * Retarded integrals against spectra and back at a few places and instants, drawn by lot. Where a current has a kink or a
 * jump its spectrum has no end and would tell of its own cut alone; where sources are large in wavelengths the lines would
 * take longer than they tell: both are told instead.
 * @param seed draws places and instants
 */
export function compareRoutes(
  sources: readonly Source[],
  medium: Medium,
  places: readonly RoutePlace[],
  duration: number,
  seed: number,
): Routes {
  const rng = xoroshiro128plus(seed);
  const left = places
    .map((place) => ({ ...place, first: firstArrival(sources, medium, place.at) }))
    .filter(({ first }) => first < duration);
  const none = (reason: string): Routes => ({ status: 'not compared', reason, ...NOTHING });
  if (left.length === 0) return none('no field reaches the places where it would be compared');
  const window = duration - Math.min(...left.map(({ first }) => first));
  const { endless, terms } = spectralWork(sources, medium, window);
  if (endless) return none('a current has a kink or a jump, so its spectrum has no end');

  const chosen: typeof left = [];
  for (let work = 0; chosen.length < MOST_PLACES && left.length > 0; ) {
    const [next] = left.splice(uniformInt(rng, 0, left.length - 1), 1);
    work += terms(next!.at);
    if (work > MOST_TERMS) break;
    chosen.push(next!);
  }
  if (chosen.length === 0) return none('the sources are so many wavelengths long that spectra would take too long');

  const exact = fieldOf(prepareSources(sources, medium, 'best'));
  const bySpectrum = fieldBySpectrum(sources, medium, window);
  const integrals: FieldValue[] = [];
  const spectral: SpectralValue[] = [];
  const peaks: PeaksAt[] = [];
  const told: number[] = [];
  const { E, H } = scalesOf(medium);
  for (const { at, first } of chosen) {
    const times = Array.from({ length: INSTANTS }, () => first + (duration - first) * uniformFloat64(rng));
    const { values, peaks: peaksOf } = bySpectrum(at, times);
    const here = { ...peaksOf(), distance: distanceToSources(sources, at) };
    times.forEach((t, n) => {
      const own = exact(at, t);
      integrals.push(own);
      spectral.push(values[n]!);
      peaks.push(here);
      told.push((own.errorE + values[n]!.errorE) / E(here), (own.errorH + values[n]!.errorH) / H(here));
    });
  }
  const list = disagreement(spectral, integrals, peaks, medium);
  const worst = list.reduce((most, one) => (one.largest > most.largest ? one : most));
  const limit = LIMIT + Math.max(...told.filter(Number.isFinite));
  return {
    status: worst.largest <= limit ? 'agree' : 'differ',
    reason: null,
    places: chosen.length,
    instants: INSTANTS,
    largest: worst.largest,
    quantity: worst.quantity,
    observer: chosen[Math.floor(worst.row / INSTANTS)]!.observer,
    limit,
  };
}

const NOTHING = { places: 0, instants: 0, largest: null, quantity: null, observer: null, limit: null } as const;
