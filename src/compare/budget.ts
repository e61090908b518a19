import type { FieldHistory } from '../trace/trace.ts';
import { FIRST_COMPONENT, type Field, type Level, requireAligned, samplesOf } from './fields.ts';
import type { PointWeights } from './norms.ts';

/**
 * The error budget: grid − exact as the sum of four signals, each the difference of two fields over the same points and
 * instants:
 *
 *     boundary   = grid − free          what the walls sent back
 *     lattice    = free − gridded       what the Yee lattice does to the very currents it was given
 *     gridding   = gridded − computed   what putting the designed source on edges changed
 *     quadrature = computed − exact     what the integral got wrong
 *
 * The sum telescopes; signals add, norms do not, so each part carries its own relative L2 and its signed share.
 */
export const PARTS = ['boundary', 'lattice', 'gridding', 'quadrature'] as const;
export type Part = (typeof PARTS)[number];

/** The fields a budget is taken from, all over the same points and instants. */
export interface Histories {
  /** the grid solver in its box */
  readonly grid: FieldHistory;
  /** the grid solver with no walls; absent where that run cannot fit, which is a normal outcome */
  readonly free?: FieldHistory;
  /** the retarded integral of the currents on the grid's edges */
  readonly gridded: FieldHistory;
  /** the retarded integral of the designed currents, by quadrature */
  readonly computed: FieldHistory;
  /** the closed form where there is one, else `computed` itself */
  readonly exact: FieldHistory;
}

/** What each field's own error stays below; the floors of the parts follow from them. */
export interface Levels {
  /** rounding of a grid run (single precision: −67 to −111 dB of peak) */
  readonly rounding: Level;
  /** leftover reflection of the free-space run */
  readonly truncation: Level;
  /** quadrature error of `gridded` */
  readonly gridded: Level;
  /** quadrature error of `computed` */
  readonly computed: Level;
  /** error of `exact`: that of `computed` where there is no closed form */
  readonly exact: Level;
}

/** Floors as amplitudes at a point: V/m or A/m, root mean square over the window. */
export type FloorAmplitudes = Readonly<Record<BudgetName, number>>;

export interface BudgetEntry {
  /** √(Σ|part|²) / √(Σ|exact|²); NaN where the exact field vanishes. Raw, even below the floor */
  readonly relativeL2: number;
  /** ⟨part, total⟩ / ⟨total, total⟩: the shares sum to 1, negative where a part cancels others; NaN where total = 0 */
  readonly share: number;
  /** what the value cannot be told from, on the same scale as relativeL2 */
  readonly floor: number;
}

/** Without the free-space run, boundary and lattice are known only by their sum, grid − gridded. */
export interface Budget {
  readonly boundary: BudgetEntry | null;
  readonly lattice: BudgetEntry | null;
  /** null where boundary and lattice are known apart */
  readonly boundaryAndLattice: BudgetEntry | null;
  readonly gridding: BudgetEntry;
  readonly quadrature: BudgetEntry;
  readonly total: BudgetEntry;
}

/** What a budget may have an entry for. */
export type BudgetName = keyof Budget;

/** The two fields whose difference a part is: minuend, subtrahend. */
type Pair = readonly [FieldHistory, FieldHistory];

function requireHistories(histories: Histories): void {
  const { grid, free, gridded, computed, exact } = histories;
  requireAligned({ grid, gridded, computed, exact, ...(free ? { free } : {}) });
}

/**
 * Floors of the parts at one point: errors of the two fields a part is the difference of, added as bounds.
 * The two grid runs round independently, hence twice for the boundary part. The quadrature part is known to within the
 * error of `exact`, which is the quadrature's own bound where there is no closed form.
 */
export function floorAmplitudes(levels: Levels, field: Field, point: number): FloorAmplitudes {
  const rounding = levels.rounding(field, point);
  const truncation = levels.truncation(field, point);
  const gridded = levels.gridded(field, point);
  const computed = levels.computed(field, point);
  const exact = levels.exact(field, point);
  return {
    boundary: 2 * rounding + truncation,
    lattice: rounding + truncation + gridded,
    boundaryAndLattice: rounding + gridded,
    gridding: gridded + computed,
    quadrature: exact,
    total: rounding + exact,
  };
}

/** ⟨a − b, c − d⟩: Σ over the field's components and the instants, at one point. */
function innerProduct([a, b]: Pair, [c, d]: Pair, field: Field, point: number): number {
  let sum = 0;
  for (let k = FIRST_COMPONENT[field]; k < FIRST_COMPONENT[field] + 3; k++) {
    const as = samplesOf(a, point, k);
    const bs = samplesOf(b, point, k);
    const cs = samplesOf(c, point, k);
    const ds = samplesOf(d, point, k);
    for (let n = 0; n < as.length; n++) sum += (as[n]! - bs[n]!) * (cs[n]! - ds[n]!);
  }
  return sum;
}

/** Σ|field|² over the field's components and the instants, at one point. */
export function energy(history: FieldHistory, field: Field, point: number): number {
  let sum = 0;
  for (let k = FIRST_COMPONENT[field]; k < FIRST_COMPONENT[field] + 3; k++) {
    const samples = samplesOf(history, point, k);
    for (let n = 0; n < samples.length; n++) sum += samples[n]! * samples[n]!;
  }
  return sum;
}

/**
 * The budget of a field pooled over points: sums over points come before roots and quotients.
 * @param weights of the points: 0 leaves one out; absent: all 1
 * @throws Error where the histories are not sampled alike
 */
export function budgetOf(histories: Histories, levels: Levels, field: Field, weights?: PointWeights): Budget {
  requireHistories(histories);
  const { grid, free, gridded, computed, exact } = histories;
  const count = exact.points.count;
  const pooled = (term: (point: number) => number): number => {
    let sum = 0;
    for (let p = 0; p < count; p++) {
      const w = weights ? weights[p]! : 1;
      if (w !== 0) sum += w * term(p);
    }
    return sum;
  };
  const total: Pair = [grid, exact];
  const totalSquare = pooled((p) => innerProduct(total, total, field, p));
  const reference = pooled((p) => energy(exact, field, p));
  const entry = (name: BudgetName, part: Pair): BudgetEntry => ({
    relativeL2: Math.sqrt(pooled((p) => innerProduct(part, part, field, p)) / reference),
    share: pooled((p) => innerProduct(part, total, field, p)) / totalSquare,
    floor: Math.sqrt(pooled((p) => floorAmplitudes(levels, field, p)[name] ** 2 * exact.instants.count) / reference),
  });
  return {
    boundary: free ? entry('boundary', [grid, free]) : null,
    lattice: free ? entry('lattice', [free, gridded]) : null,
    boundaryAndLattice: free ? null : entry('boundaryAndLattice', [grid, gridded]),
    gridding: entry('gridding', [gridded, computed]),
    quadrature: entry('quadrature', [computed, exact]),
    total: entry('total', total),
  };
}

/** The budget of a field at one point. */
export function budgetAt(histories: Histories, levels: Levels, field: Field, point: number): Budget {
  const weights = new Float64Array(histories.exact.points.count);
  weights[point] = 1;
  return budgetOf(histories, levels, field, weights);
}

/** The difference of two fields as a field of its own: what a part looks like in time. */
export function difference(a: FieldHistory, b: FieldHistory): FieldHistory {
  requireAligned({ minuend: a, subtrahend: b });
  return { points: a.points, instants: a.instants, values: a.values.map((v, i) => v - b.values[i]!) };
}

/** The part signals. `boundary` and `lattice` are absent without the free-space run. */
export interface PartSignals {
  readonly boundary?: FieldHistory;
  readonly lattice?: FieldHistory;
  readonly gridding: FieldHistory;
  readonly quadrature: FieldHistory;
}

/**
 * The parts as signals over time, for traces and charts.
 * @throws Error where the histories are not sampled alike
 */
export function partSignals(histories: Histories): PartSignals {
  requireHistories(histories);
  const { grid, free, gridded, computed, exact } = histories;
  return {
    ...(free ? { boundary: difference(grid, free), lattice: difference(free, gridded) } : {}),
    gridding: difference(gridded, computed),
    quadrature: difference(computed, exact),
  };
}

/** Peak of what the walls sent back, and what it cannot be told from, both relative to the exact field's peak. */
export interface BoundaryLevel {
  readonly peak: number;
  readonly floor: number;
}

/**
 * max |grid − free| / max |exact| over components and instants, the worst of the given points: what "−71 dB of the
 * exact peak" is the decibels of. Null where the free-space run is missing or no point has a field.
 */
export function boundaryLevel(
  { grid, free, exact }: Histories,
  levels: Levels,
  field: Field,
  points: readonly number[],
): BoundaryLevel | null {
  if (!free) return null;
  const reflected = difference(grid, free);
  const each = points
    .map((p) => ({ peak: peakAt(exact, field, p), reflected: peakAt(reflected, field, p), point: p }))
    .filter(({ peak }) => peak > 0)
    .map(({ peak, reflected, point }) => ({
      peak: reflected / peak,
      floor: floorAmplitudes(levels, field, point).boundary / peak,
    }));
  return each.length === 0 ? null : each.reduce((a, b) => (b.peak > a.peak ? b : a));
}

/** Largest |sample| of a field's components at one point. */
function peakAt(history: FieldHistory, field: Field, point: number): number {
  let peak = 0;
  for (let k = FIRST_COMPONENT[field]; k < FIRST_COMPONENT[field] + 3; k++)
    for (const v of samplesOf(history, point, k)) peak = Math.max(peak, Math.abs(v));
  return peak;
}
