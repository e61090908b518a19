import { COMPONENTS, type Component, type FieldHistory } from '../trace/trace.ts';
import { FIELD_UNIT, FIRST_COMPONENT, type Field, requireAligned, samplesOf } from './fields.ts';

/**
 * Relative norms of grid − exact over samples in space and time.
 *
 * Every sample of a norm stands for a volume and a time step. On one uniform grid both are the same for all samples and
 * cancel from a ratio of norms, so a sample's weight is the number of cells it stands for: 1 where every cell counts,
 * (cells of the stratum)/(samples of the stratum) for a stratified sample, 0 for a sample that is left out.
 */
export interface Norm {
  /** ‖grid − exact‖ / ‖exact‖; NaN where the exact field vanishes */
  readonly value: number;
  /** the reference norm ‖exact‖ as an amplitude: mean (L1), root mean square (L2) or peak (L∞) of its components */
  readonly scale: number;
  readonly unit: 'V/m' | 'A/m';
  /** how many component samples were used */
  readonly samples: number;
}

/** A norm over a sample of the volume, with the standard error that sampling leaves in it. */
export interface SampledNorm extends Norm {
  readonly standardError: number;
}

/** A maximum, with the place and instant where the difference is largest. */
export interface MaximumNorm extends Norm {
  readonly component: Component;
  /** index of the point */
  readonly point: number;
  /** m */
  readonly at: readonly [number, number, number];
  /** s */
  readonly time: number;
}

/** Weights of points, one each; absent: all 1. */
export type PointWeights = Float64Array | undefined;

/** Strata that the points were drawn from: index of each point's stratum, and cells in each stratum. */
export interface Strata {
  readonly of: Int32Array;
  readonly cells: Float64Array;
}

/** Sums over one point's samples of a field: Σ|a − b|, Σ|b|, Σ(a − b)², Σb², a = grid and b = exact. */
function pointSums(grid: FieldHistory, exact: FieldHistory, field: Field, point: number) {
  const sums = { absDifference: 0, absExact: 0, squaredDifference: 0, squaredExact: 0 };
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
    const a = samplesOf(grid, point, c);
    const b = samplesOf(exact, point, c);
    for (let n = 0; n < a.length; n++) {
      const difference = a[n]! - b[n]!;
      sums.absDifference += Math.abs(difference);
      sums.absExact += Math.abs(b[n]!);
      sums.squaredDifference += difference * difference;
      sums.squaredExact += b[n]! * b[n]!;
    }
  }
  return sums;
}

/**
 * Relative L1: Σ w |grid − exact| / Σ w |exact|, over points, the field's three components and instants.
 * @throws Error where the two are not sampled alike
 */
export function relativeL1(grid: FieldHistory, exact: FieldHistory, field: Field, weights?: PointWeights): Norm {
  requireAligned({ grid, exact });
  let difference = 0;
  let reference = 0;
  let total = 0;
  let points = 0;
  for (let p = 0; p < grid.points.count; p++) {
    const w = weights ? weights[p]! : 1;
    if (w === 0) continue;
    const sums = pointSums(grid, exact, field, p);
    difference += w * sums.absDifference;
    reference += w * sums.absExact;
    total += w;
    points++;
  }
  const perPoint = 3 * grid.instants.count;
  return {
    value: difference / reference,
    scale: reference / (total * perPoint),
    unit: FIELD_UNIT[field],
    samples: points * perPoint,
  };
}

/**
 * Relative L2: √(Σ w (grid − exact)²) / √(Σ w exact²), over points, the field's three components and instants.
 *
 * With strata, the standard error of the value: that of a ratio of two stratified totals, r = A/B with residuals
 * z = w(a − r b) of the points, var r = Σ_strata (1 − n/N) n/(n − 1) Σ (z − z̄)² / B² (Cochran, Sampling Techniques,
 * 3rd ed., §6.11, from memory), halved by the root: δ√r = δr/(2√r). 0 where every cell was used; a stratum of one
 * sample out of many adds nothing, so draw two from each.
 * @throws Error where the two are not sampled alike
 */
export function relativeL2(
  grid: FieldHistory,
  exact: FieldHistory,
  field: Field,
  weights?: PointWeights,
  strata?: Strata,
): SampledNorm {
  requireAligned({ grid, exact });
  const count = grid.points.count;
  const a = new Float64Array(count);
  const b = new Float64Array(count);
  let difference = 0;
  let reference = 0;
  let total = 0;
  let points = 0;
  for (let p = 0; p < count; p++) {
    const w = weights ? weights[p]! : 1;
    if (w === 0) continue;
    const sums = pointSums(grid, exact, field, p);
    a[p] = w * sums.squaredDifference;
    b[p] = w * sums.squaredExact;
    difference += a[p]!;
    reference += b[p]!;
    total += w;
    points++;
  }
  const perPoint = 3 * grid.instants.count;
  const ratio = difference / reference;
  const value = Math.sqrt(ratio);
  const variance = strata ? ratioVariance(a, b, ratio, reference, weights, strata) : 0;
  return {
    value,
    scale: Math.sqrt(reference / (total * perPoint)),
    unit: FIELD_UNIT[field],
    samples: points * perPoint,
    standardError: variance > 0 ? Math.sqrt(variance) / (2 * value) : 0,
  };
}

function ratioVariance(
  a: Float64Array,
  b: Float64Array,
  ratio: number,
  reference: number,
  weights: PointWeights,
  strata: Strata,
): number {
  const kinds = strata.cells.length;
  const n = new Float64Array(kinds);
  const sum = new Float64Array(kinds);
  const squares = new Float64Array(kinds);
  for (let p = 0; p < a.length; p++) {
    if (weights && weights[p] === 0) continue;
    const h = strata.of[p]!;
    const z = a[p]! - ratio * b[p]!;
    n[h]! += 1;
    sum[h]! += z;
    squares[h]! += z * z;
  }
  let variance = 0;
  for (let h = 0; h < kinds; h++) {
    if (n[h]! < 2) continue;
    const spread = Math.max(0, squares[h]! - (sum[h]! * sum[h]!) / n[h]!);
    variance += Math.max(0, 1 - n[h]! / strata.cells[h]!) * (n[h]! / (n[h]! - 1)) * spread;
  }
  return variance / (reference * reference);
}

/**
 * Relative L∞: max |grid − exact| / max |exact| over points of non-zero weight, the field's three components and
 * instants; the two maxima need not coincide. Names the component, place and instant of the largest difference.
 * @throws Error where the two are not sampled alike
 */
export function relativeLinf(
  grid: FieldHistory,
  exact: FieldHistory,
  field: Field,
  weights?: PointWeights,
): MaximumNorm {
  requireAligned({ grid, exact });
  let largest = -1;
  let scale = 0;
  let points = 0;
  const where = { point: 0, component: FIRST_COMPONENT[field], instant: 0 };
  for (let p = 0; p < grid.points.count; p++) {
    if (weights && weights[p] === 0) continue;
    points++;
    for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++) {
      const a = samplesOf(grid, p, c);
      const b = samplesOf(exact, p, c);
      for (let n = 0; n < a.length; n++) {
        const difference = Math.abs(a[n]! - b[n]!);
        scale = Math.max(scale, Math.abs(b[n]!));
        if (difference > largest) {
          largest = difference;
          Object.assign(where, { point: p, component: c, instant: n });
        }
      }
    }
  }
  const { point, component, instant } = where;
  const site = (point * 6 + component) * 3;
  const [x, y, z] = exact.points.position.subarray(site, site + 3);
  return {
    value: largest / scale,
    scale,
    unit: FIELD_UNIT[field],
    samples: points * 3 * grid.instants.count,
    component: COMPONENTS[component]!,
    point,
    at: [x!, y!, z!],
    time: exact.instants[field][instant]!,
  };
}
