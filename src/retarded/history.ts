import type { Medium, Profile, Source, Vec3 } from '../scenario/model.ts';
import type { Instants, SamplePoints } from '../trace/trace.ts';
import { DelayGrid, ElementList } from './delayGrid.ts';
import {
  CHARGE,
  COEFFICIENTS,
  type Constants,
  CURRENT,
  constantsOf,
  filamentElement,
  MAGNETIC,
  SLOPE,
} from './elements.ts';
import { addClosedTerms, refuseOnSource, SMALL_GAP } from './field.ts';
import { delayRate, frontRounding, gradedCuts, longestPart, onset } from './panels.ts';
import { crossing, type PieceView, viewOf } from './pieceView.ts';
import { type Integral, type Method, type Prepared, prepareSources } from './prepare.ts';
import { KRONROD_POINTS, kronrod } from './quadrature.ts';
import { TermList } from './terms.ts';

export interface HistoryOptions {
  readonly method?: Method;
  /** error asked of the integrals at each site, relative to its peak there; default 1e-9 */
  readonly tolerance?: number;
}

export interface History {
  /** laid out as in FieldHistory: (point·6 + component)·count + n; V/m for E, A/m for H */
  readonly values: Float64Array;
  /** bound on the error of every value of a site: point·6 + component; V/m or A/m */
  readonly errorBound: Float64Array;
  /** integrand nodes and closed-form terms, each of which serves all instants */
  readonly evaluations: number;
}

/**
 * The exact field at the sites of a Yee grid, one component at each, at the instants of a run.
 * @throws RangeError where a site lies on a source, or where instants are not equidistant
 */
export function exactHistory(
  sources: readonly Source[],
  medium: Medium,
  points: SamplePoints,
  instants: Instants,
  options: HistoryOptions = {},
): History {
  return historyOf(prepareSources(sources, medium, options.method ?? 'best'), points, instants, options);
}

/** Error of a sampled waveform relative to its peak: of closed forms, which have no other. */
const CLOSED_ACCURACY = 1e-12;

/** Halvings of the panels' grading before an error above the tolerance is reported instead. */
const REFINEMENTS = 4;

export function historyOf(
  prepared: Prepared,
  points: SamplePoints,
  instants: Instants,
  { tolerance = 1e-9 }: HistoryOptions = {},
): History {
  const step = stepOf(instants, prepared);
  const latest = Math.max(instants.E.at(-1) ?? 0, instants.H.at(-1) ?? 0);
  const grid = new DelayGrid(prepared.waveforms, step, instants.count, latest, CLOSED_ACCURACY);
  try {
    const site = new Site(prepared, grid, tolerance, latest);
    const values = new Float64Array(points.count * 6 * instants.count);
    const errorBound = new Float64Array(points.count * 6);
    for (let m = 0; m < points.count * 6; m++) {
      const component = m % 6;
      const at: Vec3 = [points.position[3 * m]!, points.position[3 * m + 1]!, points.position[3 * m + 2]!];
      const first = (component < 3 ? instants.E : instants.H)[0]!;
      errorBound[m] = site.history(at, component, first, values.subarray(m * instants.count, (m + 1) * instants.count));
    }
    return { values, errorBound, evaluations: site.evaluations };
  } finally {
    grid.release();
  }
}

/** The common step of E and H instants. */
export function stepOf(instants: Instants, prepared: { readonly waveforms: readonly { timeScale: number }[] }): number {
  const { count, E, H } = instants;
  if (count < 2) return prepared.waveforms.reduce((least, { timeScale }) => Math.min(least, timeScale), 1) / 8;
  const step = (E[count - 1]! - E[0]!) / (count - 1);
  for (const list of [E, H])
    for (let n = 0; n < count; n++) {
      const off = Math.abs(list[n]! - list[0]! - n * step);
      if (!(off <= 1e-9 * step + 4 * Number.EPSILON * Math.abs(list[n]!)))
        throw new RangeError(
          `instant ${n} is ${off} s off a step of ${step} s; a history needs equidistant instants. Take fieldAt for others.`,
        );
    }
  return step;
}

/** One site at a time: its elements, their histories, and the errors of both. */
class Site {
  evaluations = 0;
  readonly #k: Constants;
  readonly #integrals: readonly Integral[];
  readonly #terms = new TermList();
  readonly #element = new Float64Array(COEFFICIENTS);
  readonly #closed: ElementList[];
  readonly #nodes: ElementList[];
  readonly #differences: ElementList[];
  readonly #smallGap: (waveform: number, from: number, gap: number, slimness: number) => boolean;
  /** Σ|coefficient| · peak, and the same times the rule's errors */
  #size = 0;
  #sampling = 0;
  #rounding = 0;
  /** rounding of a jump's front, which one instant feels at a time */
  #front = 0;

  /** roundings that an instant is worth, by waveform */
  readonly #instant: readonly number[];

  constructor(
    readonly prepared: Prepared,
    readonly grid: DelayGrid,
    readonly tolerance: number,
    latest: number,
  ) {
    this.#k = constantsOf(prepared.medium);
    this.#integrals = prepared.integrals.filter(({ potentialsOnly }) => !potentialsOnly);
    this.#instant = prepared.waveforms.map(({ timeScale }) => (2 * latest) / timeScale);
    const lists = () => prepared.waveforms.map(() => new ElementList());
    this.#closed = lists();
    this.#nodes = lists();
    this.#differences = lists();
    // A front in the gap would be lost, for one instant at most: only gaps that matter to nothing else are taken then.
    this.#smallGap = (index, _from, gap, slimness) => {
      const { kinks, timeScale } = prepared.waveforms[index]!;
      return gap < SMALL_GAP * timeScale && (kinks.length === 0 || slimness < 1e-6);
    };
  }

  /** Writes the history of one component at one place into `out`, which is 0; returns the bound of its error. */
  history(at: Vec3, component: number, first: number, out: Float64Array): number {
    refuseOnSource(this.prepared, at);
    const magnetic = component >= 3;
    const quantity = magnetic ? MAGNETIC + component - 3 : component;
    const scale = magnetic ? 1 / this.prepared.medium.permeability : 1;
    // Without integrals nothing is refined, and what is in closed form is all.
    const closed = this.#integrals.length === 0 ? out : new Float64Array(out.length);
    this.#size = 0;
    this.#sampling = 0;
    this.#rounding = 0;

    for (const list of this.#closed) list.clear();
    this.#terms.clear();
    addClosedTerms(this.prepared, this.#k, at, this.#smallGap, this.#terms);
    for (let n = 0; n < this.#terms.count; n++) {
      const base = n * COEFFICIENTS + quantity;
      const { coefficient, delay, waveform, geometry } = this.#terms;
      const q = scale * coefficient[base + CHARGE]!;
      const w = scale * coefficient[base + CURRENT]!;
      const slope = scale * coefficient[base + SLOPE]!;
      this.#closed[waveform[n]!]!.add((first - delay[n]!) / this.grid.step, q, w, slope);
      this.#count(waveform[n]!, q, w, slope, geometry[n]!);
    }
    this.evaluations += this.#terms.count;
    this.#addHistories(closed, this.#closed);
    const closedSize = [this.#size, this.#sampling, this.#rounding] as const;

    if (this.#integrals.length === 0) return this.#sampling + this.#rounding;
    const views = this.#integrals.map((integral) => ({ integral, view: viewOf(integral.piece, at) }));
    for (let round = 0, grading = 1; ; round++, grading /= 2) {
      out.set(closed);
      [this.#size, this.#sampling, this.#rounding] = closedSize;
      this.#front = 0;
      for (const list of [...this.#nodes, ...this.#differences]) list.clear();
      for (const { integral, view } of views) this.#addNodes(integral, view, quantity, scale, first, grading, out);
      this.#addHistories(out, this.#nodes);
      const error = new Float64Array(out.length);
      this.#addHistories(error, this.#differences);
      const quadrature = largest(error);
      // A component that vanishes by symmetry is measured against what cancels in it.
      const limit = this.tolerance * Math.max(largest(out), 1e-3 * this.#size);
      if (quadrature <= limit || round === REFINEMENTS)
        return quadrature + this.#sampling + this.#rounding + this.#front;
    }
  }

  #addHistories(out: Float64Array, lists: readonly ElementList[]): void {
    lists.forEach((list, waveform) => {
      this.grid.addHistory(out, waveform, list);
    });
  }

  #count(waveform: number, q: number, w: number, slope: number, geometry: number): void {
    const { peak, error } = this.grid.errors[waveform]!;
    const size = Math.abs(q) * peak[0] + Math.abs(w) * peak[1] + Math.abs(slope) * peak[2];
    this.#size += size;
    this.#sampling += Math.abs(q) * error[0] + Math.abs(w) * error[1] + Math.abs(slope) * error[2];
    this.#rounding += Number.EPSILON * (8 + geometry + this.#instant[waveform]!) * size;
  }

  /** The element at the place that `view` looks at, arc length s. */
  #look({ x, y, z, sx, sy, sz }: PieceView, slowness: number, profile: Profile | undefined, s: number): void {
    const [amplitude, gradient] = profile ? [profile.value(s), profile.slope(s)] : [1, 0];
    filamentElement(this.#k, x, y, z, sx, sy, sz, slowness, amplitude, gradient, this.#element);
  }

  /** Nodes of one integral, and the fronts of a jump, which go to `out` directly. */
  #addNodes(
    integral: Integral,
    view: PieceView,
    quantity: number,
    scale: number,
    first: number,
    grading: number,
    out: Float64Array,
  ): void {
    const { grid } = this;
    const waveform = this.prepared.waveforms[integral.waveform]!;
    const { speed } = this.#k;
    const element = this.#element;
    const kept = this.#nodes[integral.waveform]!;
    const differing = this.#differences[integral.waveform]!;
    const jump = onset(this.prepared, integral);
    for (const term of integral.terms) {
      const { factor, delay, slowness, profile } = term;
      const place = (s: number) => {
        view.look(s);
        return (first - delay - slowness * s - view.r / speed) / grid.step;
      };
      const stations =
        grid.rule.kind === 'centred'
          ? [view.start, view.end]
          : cellBounds(view, place, grid.rule.bounds, slowness * speed, (first - delay) * speed, grid.step * speed);
      const breaks = (profile?.breaks ?? []).filter((s) => s > view.start && s < view.end);
      const bounds = breaks.length === 0 ? stations : [...stations, ...breaks].sort((a, b) => a - b);
      const longest = grading * longestPart(term, waveform.timeScale, speed);
      const cuts: number[] = [];
      for (let m = 1; m < bounds.length; m++)
        if (bounds[m]! > bounds[m - 1]!) gradedCuts(view, bounds[m - 1]!, bounds[m]!, grading, longest, cuts);
      let from = view.start;
      for (const to of cuts) {
        const half = (to - from) / 2;
        const reach =
          (delay + Math.min(slowness * from, slowness * to) + view.distance(from, to) / speed - first) / grid.step;
        if (half > 0 && reach < grid.count) {
          const extent = (Math.abs(from) + Math.abs(to)) / view.distance(from, to);
          for (let m = 0; m < KRONROD_POINTS; m++) {
            const s = from + half * (1 + kronrod.nodes[m]!);
            const at = place(s);
            this.#look(view, slowness, profile, s);
            const gain = scale * factor * half;
            const q = gain * element[CHARGE + quantity]!;
            const w = gain * element[CURRENT + quantity]!;
            const slope = gain * element[SLOPE + quantity]!;
            const weight = kronrod.weights[m]!;
            const off = kronrod.differences[m]!;
            kept.add(at, weight * q, weight * w, weight * slope);
            differing.add(at, off * q, off * w, off * slope);
            this.#count(integral.waveform, weight * q, weight * w, weight * slope, extent);
          }
          this.evaluations += KRONROD_POINTS;
        }
        from = to;
      }
      if (jump === 0) continue;
      for (const s of stations.slice(1, -1)) {
        const at = place(s);
        const n = -Math.round(at);
        if (Math.abs(at + n) > 1e-6 || n < 0 || n >= grid.count) continue;
        const rate = delayRate(view, s, slowness, speed);
        if (rate === 0) continue;
        this.#look(view, slowness, profile, s);
        const front = (scale * factor * jump * element[SLOPE + quantity]!) / rate;
        out[n]! += front;
        this.#front = Math.max(this.#front, Math.abs(front) * frontRounding(view, rate, first + n * grid.step, speed));
      }
    }
  }
}

/**
 * Arc lengths at which a term's place F passes a bound of a cell's part, with the piece's ends and the turns of its
 * delay, ascending: between them no instant's retarded front of a kink lies inside.
 */
function cellBounds(
  view: PieceView,
  place: (s: number) => number,
  bounds: readonly number[],
  bend: number,
  reach: number,
  cell: number,
): number[] {
  const stations = [view.start, ...view.turns(bend), view.end];
  const found = [view.start];
  for (let m = 1; m < stations.length; m++) {
    const to = stations[m]!;
    const a = place(stations[m - 1]!);
    const b = place(to);
    const targets: number[] = [];
    for (let n = Math.floor(Math.min(a, b)); n <= Math.max(a, b); n++)
      for (const bound of bounds.slice(0, -1))
        if (n + bound > Math.min(a, b) && n + bound < Math.max(a, b)) targets.push(n + bound);
    if (a > b) targets.reverse();
    for (const target of targets) {
      const s = crossing(view, bend, reach - target * cell, found.at(-1)!, to);
      if (s !== undefined && s > found.at(-1)!) found.push(s);
    }
    if (to > found.at(-1)!) found.push(to);
  }
  return found;
}

function largest(values: Float64Array): number {
  let most = 0;
  for (const value of values) most = Math.max(most, Math.abs(value));
  return most;
}
