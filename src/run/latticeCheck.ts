import {
  type Agreement,
  agreementSentence,
  latticeAgreement,
  type NotPredicted,
  type PredictedLattice,
} from '../compare/agreement.ts';
import { difference, type Histories, type Levels } from '../compare/budget.ts';
import type { Check } from '../compare/result.ts';
import { formatNumber } from '../elementary/quantity.ts';
import { distanceToSources } from '../scenario/distance.ts';
import { cellCentre } from '../scenario/sites.ts';
import { type FieldHistory, instantsOf } from '../trace/trace.ts';
import { rootMeanSquare } from './levels.ts';
import type { Places } from './places.ts';
import type { Team } from './pool.ts';
import type { Question } from './question.ts';
import type { LatticeForm } from './worker.ts';

/** Below so many cells per shortest wavelength, or nearer to a source than so many, prediction is not sharp enough. */
const FEWEST_CELLS = 8;
const NEAREST_CELLS = 4;

/** A jump of the current at t = 0 above this fraction of its peak shows in the field beside what is predicted. */
const LARGEST_JUMP = 1e-4;

/** Edge responses (edges × sites) that are worth their time: some 1.5 µs each, and in the spectral form as much a line. */
const MOST_RESPONSES = 60_000;

/**
 * The next order of a prediction, in units of (kh)² of the part itself, k that of the shortest significant wavelength:
 * bursts, which have most of their energy near it, leave up to 0.3 of that at 8 cells a wavelength (measured on 40 cases).
 */
const NEXT_ORDER = 0.5;

/**
 * The time form leaves out the square of the phase error: half of (what the lattice adds)², relative to the field. Up to
 * here that is below 0.05 %.
 */
const MOST_FOR_TIME_FORM = 0.03;

/**
 * The closed form's prediction of the lattice part at the budget's points, or at as many of them as take no noticeable
 * time; or why there is none.
 */
export async function predictLattice(
  team: Team,
  question: Question,
  json: unknown,
  places: Places,
  free: FieldHistory | null,
  gridded: FieldHistory,
): Promise<PredictedLattice | NotPredicted> {
  const { scenario, cellsPerWavelength, highestFrequency, timeStep, steps } = question;
  const { grid, sources, medium } = scenario;
  if (!free) return { reason: 'is not known by itself: the free-space run does not fit into memory' };
  if (cellsPerWavelength < FEWEST_CELLS)
    return {
      reason: `is predicted from ${FEWEST_CELLS} cells per shortest wavelength on, and there are ${formatNumber(cellsPerWavelength, 2)}`,
    };
  const kinked = sources.find(({ waveform }) => waveform.expectedOrder.order < 2 || waveform.jump > LARGEST_JUMP);
  if (kinked) return { reason: `has no closed form for the waveform of “${kinked.name}”, which is not smooth` };
  const { budgetCells, every } = places;
  const longest = Math.max(...grid.cellSize);
  const far = Array.from({ length: budgetCells.length / 3 }, (_, p) => p).filter(
    (p) => distanceToSources(sources, cellCentre(grid, budgetCells, p)) >= NEAREST_CELLS * longest,
  );
  if (far.length === 0)
    return { reason: `is predicted from ${NEAREST_CELLS} cells off the sources on, and no point is` };

  const edges = 6 * question.gridded.edges.count;
  // An estimate of spectral lines, up to where a pulse's spectrum ends.
  const lines = 4 * highestFrequency * steps * timeStep;
  const share = latticeShare(difference(free, gridded), gridded, medium.impedance);
  const dear = far.filter((p) => share(p) > MOST_FOR_TIME_FORM);
  const cheap = far.filter((p) => share(p) <= MOST_FOR_TIME_FORM);
  const instants = instantsOf(steps, timeStep, every);
  const parts = [
    ...shareOut('time', spread(cheap, MOST_RESPONSES / edges), team.threads),
    ...shareOut('spectrum', spread(dear, MOST_RESPONSES / (edges * lines)), team.threads),
  ];
  const pieces = await Promise.all(
    parts.map(({ form, points }) => {
      const cells = Int32Array.from(points.flatMap((p) => [...budgetCells.subarray(3 * p, 3 * p + 3)]));
      return team.run('predictLattice', [json, cells, instants, form]);
    }),
  );
  const points = Int32Array.from(parts.flatMap((part) => part.points));
  const values = new Float64Array(points.length * 6 * instants.count);
  let at = 0;
  for (const piece of pieces) {
    values.set(piece, at);
    at += piece.length;
  }
  const perCell = (2 * Math.PI) / cellsPerWavelength;
  return { points, every, remainder: NEXT_ORDER * perCell * perCell, values };
}

/** How the measured lattice part compares with its prediction, as it is written. */
export function latticeCheck(
  { free, gridded }: Histories,
  predicted: PredictedLattice | NotPredicted,
  levels: Levels,
  { inside }: Places,
  impedance: number,
): Check {
  const found = latticeAgreement({ gridded, ...(free ? { free } : {}) }, predicted, levels, impedance);
  const observer = found.worst === null ? null : (inside[found.worst.point]?.name ?? null);
  const place = observer === null ? 'a sample of the volume' : `observer ${observer}`;
  const { status, points, of, reason, worst }: Agreement = found;
  return {
    name: 'lattice part agrees with its prediction',
    status,
    reason,
    points,
    of,
    observer,
    field: worst?.field ?? null,
    mismatch: worst?.mismatch ?? null,
    limit: worst?.limit ?? null,
    sentence: agreementSentence(found, place),
  };
}

/** The lattice part at a point relative to the field, E or ηH, the larger. */
function latticeShare(lattice: FieldHistory, field: FieldHistory, impedance: number): (point: number) => number {
  const amplitude = (history: FieldHistory, p: number) =>
    Math.max(rootMeanSquare(history, 'E', p), impedance * rootMeanSquare(history, 'H', p));
  return (p) => amplitude(lattice, p) / amplitude(field, p);
}

/** Points predicted in one form, in as many parts as there are threads. */
function shareOut(form: LatticeForm, points: readonly number[], threads: number) {
  const length = Math.ceil(points.length / threads);
  const parts = Array.from({ length: threads }, (_, n) => points.slice(n * length, (n + 1) * length));
  return parts.filter((part) => part.length > 0).map((part) => ({ form, points: part }));
}

/** At least one and at most `most` of a list, spread evenly; none of none. */
function spread(list: readonly number[], most: number): number[] {
  const count = Math.min(list.length, Math.max(1, Math.floor(most)));
  return Array.from({ length: count }, (_, m) => list[Math.floor((m * list.length) / count)]!);
}
