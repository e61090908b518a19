import { formatQuantity } from '../elementary/quantity.ts';
import { distanceToSources, lastArrival, sourceBounds } from '../scenario/distance.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import type { Goal } from './planSearch.ts';
import { strengths } from './predict.ts';
import { Refusal } from './refusal.ts';

export interface GoalPlaces {
  readonly places: Goal['places'];
  /** what was left out, and why */
  readonly notes: readonly string[];
}

/** E that stands lower than this against ηH vanishes by symmetry: its relative error means nothing. −60 dB. */
const VANISHING = 1e-3;

/** Directions whose field is 20 dB below the strongest's are ignored. */
const RADIATES = 0.1;

/**
 * Where a tolerance is to hold: at an observer, at all observers in the box (in want of any, at all there are), or at a
 * distance.
 * @throws Refusal where there is no such place, or E vanishes there
 */
export function goalPlaces(scenario: Scenario, at: string | undefined, distance: number | undefined): GoalPlaces {
  if (at !== undefined && distance !== undefined)
    throw refusal('', at, 'Both an observer and a distance were given; a plan is made for one of them. Leave one out.');
  const found = distance === undefined ? observersOf(scenario, at) : placesAround(scenario, distance);
  refuseShortWindow(scenario, found.places);
  return found;
}

/** What still radiates (1 % of the peak of w′) must have passed a place for its error to mean anything. */
const ACTIVE = 0.01;

function refuseShortWindow({ sources, medium, duration }: Scenario, places: Goal['places']): void {
  for (const { name, at } of places) {
    const arrival = lastArrival(sources, medium, at, ACTIVE);
    if (arrival > duration)
      throw refusal(
        'duration',
        duration,
        `The run ends at ${formatQuantity(duration, 's')}, before the pulse has passed “${name}” at ` +
          `${formatQuantity(arrival, 's')}; lengthen duration or choose a nearer place.`,
      );
  }
}

const refusal = (path: string, value: unknown, message: string) => new Refusal([{ path, value, message }]);

function observersOf(scenario: Scenario, name: string | undefined): GoalPlaces {
  const { observers, sources } = scenario;
  const inside = observers.filter((o) => o.inside);
  const wanted =
    name === undefined ? (inside.length > 0 ? inside : observers) : observers.filter((o) => o.name === name);
  if (wanted.length === 0)
    throw name === undefined
      ? refusal('observers', [], 'There is no observer; a plan needs a place. Add one, or give a distance.')
      : refusal(
          'observers',
          name,
          `There is no observer “${name}”; there are ${observers.map((o) => `“${o.name}”`).join(', ') || 'none'}.`,
        );
  const near = wanted.find(({ at }) => distanceToSources(sources, at) === 0);
  if (near) throw refusal('observers', near.at, `Observer “${near.name}” lies on a source; move it off.`);
  const strength = strengths(
    scenario,
    wanted.map(({ at }) => at),
  );
  const seen = wanted.filter((_, p) => strength[p]!.E > VANISHING * strength[p]!.etaH);
  const blind = wanted.filter((o) => !seen.includes(o)).map((o) => `“${o.name}”`);
  if (seen.length === 0)
    throw refusal(
      'observers',
      wanted.map(({ at }) => at),
      `E vanishes at ${blind.join(', ')} while the run lasts, so that it has no relative error; choose another place.`,
    );
  const notes = blind.map((o) => `E vanishes at observer ${o}: it has no relative error and was left out.`);
  return { places: seen.map(({ name: own, at }) => ({ name: own, at })), notes };
}

/**
 * Places at a distance from the nearest source along axes and space diagonals, those whose field counts.
 * @throws Refusal where no field arrives
 */
export function placesAround(scenario: Scenario, distance: number): GoalPlaces {
  if (!(distance > 0)) throw refusal('', distance, `The distance is ${distance} m; it must be above 0.`);
  const { sources } = scenario;
  const bounds = sources.map(sourceBounds);
  const middle = [0, 1, 2].map(
    (a) => (Math.min(...bounds.map((b) => b.from[a]!)) + Math.max(...bounds.map((b) => b.to[a]!))) / 2,
  );
  const reach = Math.max(...bounds.flatMap(({ from, to }) => [0, 1, 2].map((a) => to[a]! - from[a]!)));
  const places = directions().map(({ name, along }) => {
    const point = (r: number): Vec3 => [0, 1, 2].map((a) => middle[a]! + r * along[a]!) as unknown as Vec3;
    // From beyond, where the distance only grows along the ray, inwards by bisection.
    let [near, far] = [0, distance + 2 * reach * Math.sqrt(3)];
    for (let round = 0; round < 60; round++) {
      const r = (near + far) / 2;
      if (distanceToSources(sources, point(r)) < distance) near = r;
      else far = r;
    }
    return { name, at: point(far) };
  });
  const strength = strengths(
    scenario,
    places.map(({ at }) => at),
  );
  const strongest = Math.max(...strength.map(({ E }) => E));
  if (strongest === 0)
    throw refusal(
      'duration',
      scenario.duration,
      `No field arrives at ${formatQuantity(distance, 'm')} while the run lasts; lengthen duration or come nearer.`,
    );
  const strong = places.filter((_, p) => strength[p]!.E >= RADIATES * strongest);
  return {
    places: strong,
    notes: [
      `The plan is for ${strong.length} of ${places.length} directions at ${formatQuantity(distance, 'm')} from the sources; in the others the field is 20 dB or more below the strongest.`,
    ].filter(() => strong.length < places.length),
  };
}

function directions(): { readonly name: string; readonly along: Vec3 }[] {
  const list: { name: string; along: Vec3 }[] = [];
  for (const x of [-1, 0, 1])
    for (const y of [-1, 0, 1])
      for (const z of [-1, 0, 1]) {
        const count = Math.abs(x) + Math.abs(y) + Math.abs(z);
        if (count !== 1 && count !== 3) continue;
        const r = 1 / Math.sqrt(count);
        const name = [x, y, z].map((s, a) => (s === 0 ? '' : `${s < 0 ? '−' : '+'}${'xyz'[a]}`)).join('');
        list.push({ name, along: [x * r, y * r, z * r] });
      }
  return list;
}
