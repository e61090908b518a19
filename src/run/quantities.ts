import { type Quantities, tracePulse } from '../compare/quantities.ts';
import type { Routes } from '../compare/result.ts';
import { farInstants, radiatedEnergy } from '../derived/radiation.ts';
import { centreOf, largestPartAt, regionsAlong } from '../derived/regions.ts';
import { longestPart } from '../retarded/panels.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { cellCentre } from '../scenario/sites.ts';
import type { Asked, Means } from './answers.ts';
import type { Comparison } from './conclude.ts';
import { vanishes } from './levels.ts';
import { patternOf } from './pattern.ts';
import { type Places, SEED } from './places.ts';
import type { Question } from './question.ts';
import { compareRoutes } from './routes.ts';

/** Relative error asked of the radiated energy: three digits are what a report shows. */
const ENERGY_ACCURACY = 1e-3;

/** Evaluations of a waveform that quantities beside the comparison may take each, roughly a tenth of a second. */
const CHEAP = 1e6;

/** Directions that the energy's rules take; points and instants at which parts are looked at; roughly. */
const DIRECTIONS = 200;
const PART_INSTANTS = 25 * 60;

/** Observers that are told which part is the largest there. */
const MOST_OBSERVERS = 8;

/**
 * A comparison with what engineers ask for beside errors, and what two routes to the exact field say of each other; with the
 * far field's error by direction where asked for.
 */
export async function withQuantities(
  { question, json, places }: Asked,
  { team, gridThreads, onProgress }: Means,
  comparison: Comparison,
  pattern: boolean,
): Promise<Comparison> {
  const quantities = quantitiesOf(question.scenario, places, comparison.signals);
  const { integral } = comparison.result;
  const result = { ...comparison.result, integral: { ...integral, routes: routesOf(question, places) }, quantities };
  if (!pattern) return { ...comparison, result };
  try {
    const found = await patternOf(team, question, json, gridThreads, onProgress);
    return { ...comparison, result: { ...result, quantities: { ...quantities, pattern: found } } };
  } catch (error) {
    if (!(error instanceof RangeError)) throw error;
    return { ...comparison, result: { ...result, quantities: { ...quantities, patternRefused: error.message } } };
  }
}

/** Both routes at the middles of the cells where the budget is taken. */
function routesOf({ scenario, steps, timeStep }: Question, { inside, budgetCells }: Places): Routes {
  const { sources, medium, grid } = scenario;
  const all = Array.from({ length: budgetCells.length / 3 }, (_, p) => ({
    observer: inside[p]?.name ?? null,
    at: cellCentre(grid, budgetCells, p),
  }));
  return compareRoutes(sources, medium, all, steps * timeStep, SEED);
}

/**
 * What `result.json` tells beside errors, without the pattern: the radiated energy, where near, induction and radiation
 * take over, peak and rise time at each observer. What would take long is left out.
 */
function quantitiesOf(scenario: Scenario, places: Places, signals: Comparison['signals']): Quantities {
  const { sources, medium } = scenario;
  const isCheap = elementsOf(scenario, true) * PART_INSTANTS <= CHEAP;
  const parts = isCheap ? largestPartAt(sources, medium) : null;
  const centre = centreOf(sources);
  return {
    radiatedEnergy: energyOf(scenario),
    regions: isCheap ? regionsTowards(scenario, places, centre) : null,
    observers: signals
      ? places.inside.map(({ name, at }, p) => {
          const pulse = (field: 'E' | 'H') =>
            vanishes(signals.exact, field, p, medium.impedance)
              ? null
              : tracePulse(signals.grid, signals.exact, field, p);
          const E = pulse('E');
          // Parts of a field that vanishes are but its rounding.
          return { name, largestPart: parts && E && p < MOST_OBSERVERS ? parts(at).largest : null, E, H: pulse('H') };
        })
      : [],
    pattern: null,
  };
}

/** Points of rules along all sources; waves on straight pieces count two where their integral is known (`all` false). */
function elementsOf({ sources, medium }: Scenario, all: boolean): number {
  let elements = 0;
  for (const source of sources) {
    if (source.type === 'dipole') {
      elements++;
      continue;
    }
    for (const term of source.terms) {
      const longest = longestPart(term, source.waveform.timeScale / 2, medium.speed);
      for (const { kind, length } of source.curve.pieces)
        elements += kind === 'line' && !term.profile && !all ? 2 : RULE * Math.ceil(length / longest);
    }
  }
  return elements;
}

/** Points of a rule. */
const RULE = 16;

function energyOf(scenario: Scenario): Quantities['radiatedEnergy'] {
  const { sources, medium } = scenario;
  const instants = farInstants(sources, medium);
  if (elementsOf(scenario, false) * instants.length * DIRECTIONS > CHEAP) return null;
  try {
    const { value, error } = radiatedEnergy(sources, medium, { instants, tolerance: ENERGY_ACCURACY });
    return { value, error };
  } catch (error) {
    // A current that jumps radiates without bound.
    if (error instanceof RangeError) return null;
    throw error;
  }
}

function regionsTowards({ sources, medium }: Scenario, places: Places, centre: Vec3): Quantities['regions'] {
  const first = places.inside[0];
  if (!first) return null;
  const line = first.at.map((x, a) => x - centre[a]!);
  const r = Math.sqrt(line.reduce((sum, d) => sum + d * d, 0));
  return r > 0 ? regionsAlong(sources, medium)(line.map((d) => d / r) as unknown as Vec3) : null;
}
