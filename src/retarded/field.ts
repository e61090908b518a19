import type { Medium, Source, Vec3 } from '../scenario/model.ts';
import type { Waveform } from '../scenario/waveform.ts';
import {
  CHARGE,
  COEFFICIENTS,
  type Constants,
  CURRENT,
  chargeElement,
  constantsOf,
  dipoleElement,
  filamentElement,
  MAGNETIC,
  QUANTITIES,
  SCALAR,
  SLOPE,
  VECTOR,
} from './elements.ts';
import { delayRate, frontRounding, fronts, gradedCuts, instantRounding, longestPart, onset } from './panels.ts';
import { PART_ERROR, PART_NUMBERS, PART_ROUNDING, PartSums, ROUNDINGS } from './partSums.ts';
import { type PlaceView, viewOf } from './pieceView.ts';
import { type Integral, type Method, type Prepared, prepareSources } from './prepare.ts';
import { KRONROD_POINTS } from './quadrature.ts';
import { TermList } from './terms.ts';
import { addWave } from './waves.ts';
import { firstAfter, scalesOf } from './windows.ts';

export interface FieldOptions {
  /** 'best' (default): closed form where there is one; 'quadrature': adaptive quadrature of every filament */
  readonly method?: Method;
  /** relative error asked of each of E, B, φ, A; default 1e-10 */
  readonly tolerance?: number;
  /** false leaves φ and A out (they are NaN), which halves the work of full-speed waves */
  readonly potentials?: boolean;
  /** most integrand evaluations; default 200 000 */
  readonly maxEvaluations?: number;
}

/** The field at one point and instant, SI units, with bounds on the Euclidean norm of each error. */
export interface FieldValue {
  readonly E: Vec3;
  readonly H: Vec3;
  readonly B: Vec3;
  readonly phi: number;
  readonly A: Vec3;
  readonly errorE: number;
  readonly errorH: number;
  readonly errorPhi: number;
  readonly errorA: number;
  /** of the errors of E, H, φ and A what is rounding, which no refinement removes */
  readonly rounding: readonly [number, number, number, number];
  /** evaluations of integrands and closed-form terms */
  readonly evaluations: number;
  /** false: the errors are larger than the tolerance, the evaluations being used up (at `worst`) */
  readonly converged: boolean;
  readonly worst?: string;
}

/**
 * The exact field of prescribed currents at any point and instant.
 * @param point m; @param t s
 * @throws RangeError where the point lies on a source, naming it
 */
export function fieldAt(
  sources: readonly Source[],
  medium: Medium,
  point: Vec3,
  t: number,
  options: FieldOptions = {},
): FieldValue {
  return fieldOf(prepareSources(sources, medium, options.method ?? 'best'), options)(point, t);
}

/** The same for many points: sources are taken apart once. */
export function fieldOf(prepared: Prepared, options: FieldOptions = {}): (point: Vec3, t: number) => FieldValue {
  const k = constantsOf(prepared.medium);
  const settings = { tolerance: 1e-10, potentials: true, maxEvaluations: 200_000, ...options };
  return (point, t) => evaluate(prepared, k, point, t, settings);
}

/** A gap between the two delays of a wave counts as small below this part of the waveform's time scale. */
export const SMALL_GAP = 0.1;

/** The quantities that have an error of their own: from, to in the vector of ten. */
const GROUPS = [
  [0, MAGNETIC],
  [MAGNETIC, SCALAR],
  [SCALAR, VECTOR],
  [VECTOR, QUANTITIES],
] as const;

/** The order in which terms are rounded: A before φ. */
const OF_TERMS = [0, 1, 3, 2] as const;
const OF_FIELDS = [0, 1] as const;

const groupNorm = (v: Float64Array, g: number): number => {
  const [from, to] = GROUPS[g]!;
  let sum = 0;
  for (let c = from; c < to; c++) sum += v[c]! * v[c]!;
  return Math.sqrt(sum);
};

/** One part of an integral; what it adds to the field is in `sums`, at the same index. */
interface Part {
  readonly integral: Integral;
  readonly view: PlaceView;
  readonly from: number;
  readonly to: number;
}

function evaluate(
  prepared: Prepared,
  k: Constants,
  point: Vec3,
  t: number,
  settings: Required<Omit<FieldOptions, 'method'>>,
): FieldValue {
  refuseOnSource(prepared, point);
  const { permeability } = prepared.medium;
  total.fill(0);
  rounding.fill(0);
  let evaluations = 0;

  terms.clear();
  addClosedTerms(prepared, k, point, gapWithoutKink(prepared, t), terms);
  const groups = settings.potentials ? OF_TERMS : OF_FIELDS;
  for (let n = 0; n < terms.count; n++) addTerm(prepared, terms, n, t, groups, total, rounding);
  evaluations += terms.count;

  const parts: Part[] = [];
  const integrate = (n: number, integral: Integral, view: PlaceView, from: number, to: number) => {
    parts[n] = { integral, view, from, to };
    evaluations += KRONROD_POINTS;
    integratePart(prepared, k, parts, n, t, settings.potentials);
  };
  for (const integral of prepared.integrals) {
    if (integral.potentialsOnly && !settings.potentials) continue;
    const view = viewOf(integral.piece, point);
    addFronts(prepared, k, integral, view, t, total, rounding);
    for (const [from, to] of partsOf(prepared, k, integral, view, t)) integrate(parts.length, integral, view, from, to);
  }

  for (;;) {
    sum.set(total);
    error.fill(0);
    floor.set(rounding);
    for (let at = 0; at < parts.length * PART_NUMBERS; at += PART_NUMBERS) {
      for (let c = 0; c < QUANTITIES; c++) sum[c]! += sums[at + c]!;
      for (let g = 0; g < 4; g++) {
        error[g]! += sums[at + PART_ERROR + g]!;
        floor[g]! += sums[at + PART_ROUNDING + g]!;
      }
    }
    const limits = parts.length === 0 ? NOTHING : limitsOf(settings.tolerance, k.speed);
    const open = parts.length === 0 ? NOTHING : groups.filter((g) => error[g]! > limits[g]!);
    const worst = open.length === 0 ? -1 : worstPart(parts, open, limits);
    const exhausted = evaluations + 2 * KRONROD_POINTS > settings.maxEvaluations;
    if (worst < 0 || exhausted) {
      const bad = worst < 0 ? undefined : parts[worst]!;
      if (!settings.potentials) {
        sum.fill(Number.NaN, SCALAR);
        error.fill(Number.NaN, 2);
        floor.fill(Number.NaN, 2);
      }
      return {
        E: [sum[0]!, sum[1]!, sum[2]!],
        B: [sum[3]!, sum[4]!, sum[5]!],
        H: [sum[3]! / permeability, sum[4]! / permeability, sum[5]! / permeability],
        phi: sum[SCALAR]!,
        A: [sum[VECTOR]!, sum[VECTOR + 1]!, sum[VECTOR + 2]!],
        errorE: error[0]! + floor[0]!,
        errorH: (error[1]! + floor[1]!) / permeability,
        errorPhi: error[2]! + floor[2]!,
        errorA: error[3]! + floor[3]!,
        rounding: [floor[0]!, floor[1]! / permeability, floor[2]!, floor[3]!],
        evaluations,
        converged: open.length === 0,
        ...(bad ? { worst: `${bad.integral.label}, s from ${bad.from} to ${bad.to} m` } : {}),
      };
    }
    const { integral, view, from, to } = parts[worst]!;
    const middle = (from + to) / 2;
    integrate(worst, integral, view, from, middle);
    integrate(parts.length, integral, view, middle, to);
  }
}

const NOTHING: readonly number[] = [];

/**
 * The errors of E, B, φ and A that are small enough. B is measured against |E|/v and A against φ/v: after a pulse has passed
 * they are zero to rounding.
 */
function limitsOf(tolerance: number, speed: number): number[] {
  const [E, B, phi, A] = [groupNorm(sum, 0), groupNorm(sum, 1), groupNorm(sum, 2), groupNorm(sum, 3)];
  return [E, Math.max(B, E / speed), Math.max(phi, A * speed), Math.max(A, phi / speed)].map((size, g) =>
    Math.max(tolerance * size - floor[g]!, floor[g]!),
  );
}

/** The part with the largest error relative to its limit that bisection can still lower; −1 if there is none. */
function worstPart(parts: readonly Part[], open: readonly number[], limits: readonly number[]): number {
  let worst = -1;
  let most = 0;
  parts.forEach(({ from, to }, n) => {
    const middle = (from + to) / 2;
    if (!(middle > from && middle < to)) return;
    const at = n * PART_NUMBERS;
    for (const g of open) {
      const error = sums[at + PART_ERROR + g]!;
      const size = error / limits[g]!;
      if (size > most && error > sums[at + PART_ROUNDING + g]!) {
        most = size;
        worst = n;
      }
    }
  });
  return worst;
}

/** Integrates part n of the list into `sums`. */
function integratePart(
  prepared: Prepared,
  k: Constants,
  parts: readonly Part[],
  n: number,
  t: number,
  potentials: boolean,
): void {
  const { integral, view, from, to } = parts[n]!;
  if ((n + 1) * PART_NUMBERS > sums.length) {
    const bigger = new Float64Array(2 * sums.length);
    bigger.set(sums);
    sums = bigger;
  }
  kernel ??= new PartSums();
  const carried = { terms: integral.terms, waveform: prepared.waveforms[integral.waveform]! };
  const wanted = { fields: !integral.potentialsOnly, potentials };
  kernel.integrate(k, carried, view, from, to, t, wanted, sums, n * PART_NUMBERS);
}

/** Bounds of the parts that an integral starts with: cut at fronts of kinks, graded towards the observer. */
function* partsOf(prepared: Prepared, k: Constants, integral: Integral, view: PlaceView, t: number) {
  const waveform = prepared.waveforms[integral.waveform]!;
  const stations = [view.start, view.end];
  if (view.nearest > view.start && view.nearest < view.end) stations.push(view.nearest);
  for (const { delay, slowness, profile } of integral.terms) {
    for (const kink of waveform.kinks) stations.push(...fronts(view, delay, slowness, k.speed, t - kink));
    for (const seam of seamsSeen(waveform, view, delay, slowness, k.speed, t))
      stations.push(...fronts(view, delay, slowness, k.speed, t - seam));
    for (const s of profile?.breaks ?? []) if (s > view.start && s < view.end) stations.push(s);
  }
  stations.sort((a, b) => a - b);
  const longest = Math.min(...integral.terms.map((term) => longestPart(term, waveform.timeScale, k.speed)));
  for (let m = 1; m < stations.length; m++) {
    const from = stations[m - 1]!;
    const to = stations[m]!;
    if (!(to > from)) continue;
    const cuts: number[] = [];
    gradedCuts(view, from, to, 1, longest, cuts);
    let start = from;
    for (const cut of cuts) {
      if (reached(integral, view, start, cut, t, k.speed)) yield [start, cut] as const;
      start = cut;
    }
  }
}

/** The seams of a waveform that a piece shows at t. */
function seamsSeen(
  { seams }: Waveform,
  view: PlaceView,
  delay: number,
  slowness: number,
  speed: number,
  t: number,
): readonly number[] {
  if (seams.length === 0) return seams;
  let earliest = Number.POSITIVE_INFINITY;
  let latest = Number.NEGATIVE_INFINITY;
  for (const s of [view.start, ...view.turns(slowness * speed), view.end]) {
    view.look(s);
    const u = t - delay - slowness * s - view.r / speed;
    earliest = Math.min(earliest, u);
    latest = Math.max(latest, u);
  }
  return seams.slice(firstAfter(seams, earliest), firstAfter(seams, latest));
}

/** Whether any part of [from, to] can be felt at t: before its start a current is zero. */
function reached(integral: Integral, view: PlaceView, from: number, to: number, t: number, speed: number): boolean {
  const travel = view.distance(from, to) / speed;
  return integral.terms.some(({ delay, slowness }) => t >= delay + Math.min(slowness * from, slowness * to) + travel);
}

/**
 * A current that starts with a jump J has w′ = J δ at its front: J D/|dτ/ds| there, D the coefficients of w′. (A front
 * exactly along a stationary delay is the caustic of a uniform current switched on at once; it has no finite value.)
 * Where the slope jumps by K, a rounding δt of the instant moves the front and with it K D δt/|dτ/ds|.
 */
function addFronts(
  prepared: Prepared,
  k: Constants,
  integral: Integral,
  view: PlaceView,
  t: number,
  total: Float64Array,
  rounding: Float64Array,
): void {
  if (integral.potentialsOnly) return;
  const waveform = prepared.waveforms[integral.waveform]!;
  const jump = onset(prepared, integral);
  for (const { factor, delay, slowness, profile } of integral.terms)
    for (const kink of waveform.kinks)
      for (const s of fronts(view, delay, slowness, k.speed, t - kink)) {
        const rate = delayRate(view, s, slowness, k.speed);
        if (rate === 0) continue;
        const amplitude = profile ? profile.value(s) : 1;
        filamentElement(k, view.x, view.y, view.z, view.sx, view.sy, view.sz, slowness, amplitude, 0, element);
        const before = kink === 0 ? 0 : waveform.slope(kink * (1 - 4 * Number.EPSILON));
        const bend = waveform.slope(kink) - before;
        const moved = (instantRounding(t, delay, slowness * s, view.r / k.speed) * bend) / rate;
        const impulse = kink === 0 ? (factor * jump) / rate : 0;
        for (let c = 0; c < QUANTITIES; c++) {
          front[c] = element[SLOPE + c]!;
          total[c]! += impulse * front[c]!;
        }
        const relative = Math.abs(impulse) * frontRounding(view, rate, t, k.speed) + Math.abs(factor * moved);
        for (let g = 0; g < 4; g++) rounding[g]! += relative * groupNorm(front, g);
      }
}

/** Of the evaluation at hand: what is in closed form, with its rounding; all of it, with errors and roundings. */
const total = new Float64Array(QUANTITIES);
const rounding = new Float64Array(4);
const sum = new Float64Array(QUANTITIES);
const error = new Float64Array(4);
const floor = new Float64Array(4);
const element = new Float64Array(COEFFICIENTS);
const terms = new TermList();
const wave = new Float64Array(4);
const front = new Float64Array(QUANTITIES);
/** What the parts add, PART_NUMBERS each. */
let sums = new Float64Array(16 * PART_NUMBERS);
let kernel: PartSums | undefined;

/** Adds term n at t, and its rounding: of products, of the geometry, of the instant. */
function addTerm(
  prepared: Prepared,
  list: TermList,
  n: number,
  t: number,
  groups: readonly number[],
  total: Float64Array,
  rounding: Float64Array,
): void {
  const delay = list.delay[n]!;
  const waveform = prepared.waveforms[list.waveform[n]!]!;
  if (t < delay) return;
  waveform.at(t - delay, 3, wave);
  const base = n * COEFFICIENTS;
  const instant = Number.EPSILON * (Math.abs(t) + Math.abs(delay));
  const relative = ROUNDINGS + Number.EPSILON * list.geometry[n]!;
  const [charge, current, slope] = scalesOf(waveform);
  const { speed } = prepared.medium;
  // A rounding of a direction turns E into B: near an axis B is right relative to |E|/v only, and φ to v|A|.
  let electric = 0;
  let carried = 0;
  for (const g of groups) {
    let own = 0;
    let shift = 0;
    let sample = 0;
    for (let c = GROUPS[g]![0]; c < GROUPS[g]![1]; c++) {
      const q = list.coefficient[base + CHARGE + c]!;
      const w = list.coefficient[base + CURRENT + c]!;
      const d = list.coefficient[base + SLOPE + c]!;
      total[c]! += q * wave[0]! + w * wave[1]! + d * wave[2]!;
      const size = Math.abs(q * wave[0]!) + Math.abs(w * wave[1]!) + Math.abs(d * wave[2]!);
      const moved = q * wave[1]! + w * wave[2]! + d * wave[3]!;
      const sampled = ROUNDINGS * (Math.abs(q) * charge + Math.abs(w) * current + Math.abs(d) * slope);
      own += size * size;
      shift += moved * moved;
      sample += sampled * sampled;
    }
    electric = g === 0 ? own : electric;
    if (g === 1) own = Math.max(own, electric / (speed * speed));
    carried = g === 3 ? own : carried;
    if (g === 2) own = Math.max(own, carried * speed * speed);
    rounding[g]! += relative * Math.sqrt(own) + instant * Math.sqrt(shift) + Math.sqrt(sample);
  }
}

/** All that has a closed form at `point`, as delayed waveforms. */
export function addClosedTerms(
  prepared: Prepared,
  k: Constants,
  point: Vec3,
  smallGap: (waveform: number, from: number, gap: number, slimness: number) => boolean,
  list: TermList,
): void {
  for (const { at, factor, delay, waveform } of prepared.charges) {
    const [x, y, z, r, rounding] = relativeTo(at, point);
    chargeElement(k, x, y, z, element);
    list.add(element, factor, delay + r / k.speed, waveform, rounding);
  }
  for (const { at, moment, waveform } of prepared.dipoles) {
    const [x, y, z, r, rounding] = relativeTo(at, point);
    dipoleElement(k, x, y, z, moment, element);
    list.add(element, 1, r / k.speed, waveform, rounding);
  }
  for (const w of prepared.waves) addWave(k, w, point, smallGap, list);
}

/** R, |R|, and how many roundings of the positions |R| is worth. */
function relativeTo(at: Vec3, point: Vec3): readonly [number, number, number, number, number] {
  const x = point[0] - at[0];
  const y = point[1] - at[1];
  const z = point[2] - at[2];
  const r = Math.sqrt(x * x + y * y + z * z);
  return [x, y, z, r, (largest(at) + largest(point)) / r];
}

const largest = (p: Vec3): number => Math.max(Math.abs(p[0]), Math.abs(p[1]), Math.abs(p[2]));

/** Gaps that a kink must lie before a gap: four points integrate a broken power of time to rounding from there on. */
const CLEAR_OF_KINKS = 20;

/** At one instant t a gap is small if no kink of the waveform falls into it, or shortly before it, and no seam. */
function gapWithoutKink(prepared: Prepared, t: number) {
  return (index: number, from: number, gap: number) => {
    const { kinks, seams, timeScale } = prepared.waveforms[index]!;
    const late = t - from;
    return (
      gap < SMALL_GAP * timeScale &&
      !kinks.some((kink) => late >= kink && late - (1 + CLEAR_OF_KINKS) * gap < kink) &&
      firstAfter(seams, late) === firstAfter(seams, late - gap)
    );
  };
}

/** Below this many roundings of the coordinates a point counts as on a source. */
const ON_SOURCE = 64 * Number.EPSILON;

/**
 * @throws RangeError naming the source and where on it
 */
export function refuseOnSource(prepared: Prepared, point: Vec3): void {
  const refuse = (where: string) => {
    throw new RangeError(
      `observer (${point.join(', ')}) m lies on the source: ${where}; the field of a filament is infinite there. Move it off.`,
    );
  };
  for (const { piece, label } of prepared.integrals) {
    const size = largest(point) + piece.length;
    if (piece.distance(point) <= ON_SOURCE * size) refuse(`${label}, s = ${viewOf(piece, point).nearest} m`);
  }
  for (const { at, label } of [...prepared.charges, ...prepared.dipoles])
    if (relativeTo(at, point)[3] <= ON_SOURCE * (largest(at) + largest(point))) refuse(label);
}
