import { formatPercent } from '../elementary/quantity.ts';
import type { FieldHistory } from '../trace/trace.ts';
import { floorAmplitudes, type Levels } from './budget.ts';
import { FIELDS, FIRST_COMPONENT, type Field, samplesOf } from './fields.ts';

/**
 * The standing check of every comparison: the lattice part, free − gridded, is a thing of theory, so what a run shows of
 * it must be what the closed form says. A slip of either solver, half a time step or a wrong coefficient, shows here.
 */
export interface PredictedLattice {
  /** which of the budget's points were predicted */
  readonly points: Int32Array;
  /** instants of the prediction are every `every`-th of the run's, the last one included */
  readonly every: number;
  /** what the next order of the prediction may add to it, a fraction of the predicted part */
  readonly remainder: number;
  /** the lattice part at those points, in their order; V/m and A/m */
  readonly values: Float64Array;
}

/** Why the lattice part was not held against its prediction: a predicate of “the lattice part”. */
export interface NotPredicted {
  readonly reason: string;
}

export interface Agreement {
  readonly status: 'agrees' | 'differs' | 'not judged';
  /** points judged, of those of the budget */
  readonly points: number;
  readonly of: number;
  /** of the point and field nearest to its limit or farthest beyond it; null where none was judged */
  readonly worst: {
    /** index among the budget's points */
    readonly point: number;
    readonly field: Field;
    /** √(Σ|measured − predicted|²) over the field's, a fraction */
    readonly mismatch: number;
    /** on the same scale */
    readonly limit: number;
  } | null;
  readonly reason: string | null;
}

/** A prediction to the second order leaves less than 0.1 % of the field where the lattice part is small. */
const ALLOWED = 1e-3;

/** Below this many floors a mismatch may be the floor's own. */
const FLOORS = 3;

/**
 * Holds the measured lattice part against its prediction. At each point and for each field
 *   ‖measured − predicted‖ ≤ max(0.1 % ‖field‖, 3 floors, remainder ‖predicted‖),   norms over instants and components,
 * the field's norm being that of E or ηH, the larger: where one of them vanishes by symmetry it is no scale.
 * @param impedance η, Ω
 */
export function latticeAgreement(
  fields: { readonly free?: FieldHistory; readonly gridded: FieldHistory },
  predicted: PredictedLattice | NotPredicted,
  levels: Levels,
  impedance: number,
): Agreement {
  const of = fields.gridded.points.count;
  const notJudged = (reason: string): Agreement => ({ status: 'not judged', points: 0, of, worst: null, reason });
  if ('reason' in predicted) return notJudged(predicted.reason);
  const { free, gridded } = fields;
  if (!free) return notJudged('is not known by itself: the free-space run does not fit into memory');
  let worst: Agreement['worst'] = null;
  predicted.points.forEach((point, index) => {
    const amplitude = (field: Field) => amplitudeAt(gridded, field, point, predicted.every);
    const E = Math.max(amplitude('E'), impedance * amplitude('H'));
    if (E === 0) return;
    for (const field of FIELDS) {
      const scale = field === 'E' ? E : E / impedance;
      const { apart, itself } = amplitudesAt(free, gridded, predicted, field, point, index);
      const mismatch = apart / scale;
      const floor = FLOORS * floorAmplitudes(levels, field, point).lattice;
      const limit = Math.max(ALLOWED, floor / scale, (predicted.remainder * itself) / scale);
      if (worst === null || mismatch * worst.limit > worst.mismatch * limit) worst = { point, field, mismatch, limit };
    }
  });
  const found = worst as Agreement['worst'];
  if (found === null) return notJudged('vanishes at every point that could be judged');
  const status = found.mismatch <= found.limit ? 'agrees' : 'differs';
  return { status, points: predicted.points.length, of, worst: found, reason: null };
}

/** The agreement in a sentence. @param place names the worst point: "observer A" */
export function agreementSentence({ status, worst, reason }: Agreement, place: string): string {
  if (worst === null) return `Not checked against theory: the lattice part ${reason}.`;
  const apart = `${formatPercent(worst.mismatch, 2)} of the field apart (${worst.field} at ${place}, limit ${formatPercent(worst.limit, 2)})`;
  if (status === 'agrees') return `The lattice part agrees with its closed-form prediction: at most ${apart}.`;
  return (
    `THE LATTICE PART DIFFERS FROM ITS CLOSED-FORM PREDICTION: ${apart}. ` +
    'One of the solvers is at fault here; do not rely on these figures.'
  );
}

/** Full-rate index of the prediction's instant m. */
const instantOf = (count: number, thinned: number, every: number, m: number) => count - 1 - (thinned - 1 - m) * every;

/** Root mean square of the field over the prediction's instants. */
function amplitudeAt(history: FieldHistory, field: Field, point: number, every: number): number {
  let sum = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const samples = samplesOf(history, point, c);
    for (let n = samples.length - 1; n >= 0; n -= every) sum += samples[n]! * samples[n]!;
  }
  return Math.sqrt(sum / Math.ceil(history.instants.count / every));
}

/** Root mean square over instants of |free − gridded − predicted|, and of |predicted|. */
function amplitudesAt(
  free: FieldHistory,
  gridded: FieldHistory,
  { points, every, values }: PredictedLattice,
  field: Field,
  point: number,
  index: number,
): { readonly apart: number; readonly itself: number } {
  const thinned = values.length / (6 * points.length);
  let off = 0;
  let own = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const f = samplesOf(free, point, c);
    const g = samplesOf(gridded, point, c);
    for (let m = 0; m < thinned; m++) {
      const n = instantOf(f.length, thinned, every, m);
      const predicted = values[(index * 6 + c) * thinned + m]!;
      off += (f[n]! - g[n]! - predicted) ** 2;
      own += predicted * predicted;
    }
  }
  return { apart: Math.sqrt(off / thinned), itself: Math.sqrt(own / thinned) };
}
