import type { GriddedSources, Pairs } from '../gridding/edges.ts';
import { type FieldValue, fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Medium, Source, Vec3 } from '../scenario/model.ts';

/**
 * Equations that the exact field must satisfy whatever the sources are, each with what is left of it, relative to the
 * largest of its terms at that point: checks of the integral by itself. Derivatives are central differences of fourth
 * order in steps of a hundredth of the shorter of distance and pulse, which leave some 1e-8 of their own.
 */
export interface Residuals {
  /** Lorenz gauge, ∇·A + εμ ∂φ/∂t = 0 */
  readonly gauge: number;
  /** ∇²φ = εμ ∂²φ/∂t² and ∇²A = εμ ∂²A/∂t² off the sources */
  readonly wave: number;
  /** E = −∇φ − ∂A/∂t and B = ∇×A */
  readonly potentials: number;
}

/** At offsets of −2, −1, 1, 2 steps: the first derivative, and (with −5/2 at 0) the second, of fourth order. */
const OFFSETS = [-2, -1, 1, 2] as const;
const FIRST = [1 / 12, -2 / 3, 2 / 3, -1 / 12] as const;
const SECOND = [-1 / 12, 4 / 3, 4 / 3, -1 / 12] as const;
const SECOND_HERE = -5 / 2;

/** Instants within the window at which equations are tried. */
const INSTANTS = 6;

/** Points that are tried, at most. */
const MOST_POINTS = 3;

type Known = Pick<FieldValue, 'E' | 'B' | 'phi' | 'A'>;

/**
 * The largest residuals over some points and instants.
 * @returns null where no field reaches any of the points
 */
export function residualsOf(
  sources: readonly Source[],
  medium: Medium,
  points: readonly Vec3[],
  duration: number,
): Residuals | null {
  const at = fieldOf(prepareSources(sources, medium, 'best'), { tolerance: 1e-11 });
  const pulse = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  let worst: Residuals | null = null;
  for (const point of points.slice(0, MOST_POINTS)) {
    const step = 0.01 * Math.min(distanceToSources(sources, point), medium.speed * pulse);
    if (!(step > 0)) continue;
    const instants = Array.from({ length: INSTANTS }, (_, m) => (duration * (m + 1)) / (INSTANTS + 1));
    const found = residualsAt(at, medium, point, instants, step);
    if (found)
      worst = worst
        ? {
            gauge: Math.max(worst.gauge, found.gauge),
            wave: Math.max(worst.wave, found.wave),
            potentials: Math.max(worst.potentials, found.potentials),
          }
        : found;
  }
  return worst;
}

/**
 * Residuals at one point, each over the instants against its largest term there.
 * @param step m; in time step/v
 */
export function residualsAt(
  at: (point: Vec3, t: number) => Known,
  { speed }: Medium,
  point: Vec3,
  instants: readonly number[],
  step: number,
): Residuals | null {
  const gauge = new Worst();
  const wave = new Worst();
  const potentials = new Worst();
  for (const t of instants) {
    const here = at(point, t);
    const along = [0, 1, 2].map((a) =>
      OFFSETS.map((m) => at(point.map((x, b) => (a === b ? x + m * step : x)) as unknown as Vec3, t)),
    );
    const later = OFFSETS.map((m) => at(point, t + (m * step) / speed));
    const slope = (list: readonly Known[], read: (v: Known) => number) =>
      list.reduce((sum, v, m) => sum + FIRST[m]! * read(v), 0) / step;
    const bend = (list: readonly Known[], read: (v: Known) => number) =>
      list.reduce((sum, v, m) => sum + SECOND[m]! * read(v), SECOND_HERE * read(here)) / (step * step);
    // In units of φ: A times v, times as lengths.
    const phi = (v: Known) => v.phi;
    const vA = (a: number) => (v: Known) => speed * v.A[a]!;

    gauge.add([...along.map((list, a) => slope(list, vA(a))), slope(later, phi)]);
    for (const read of [phi, vA(0), vA(1), vA(2)])
      wave.add([...along.map((list) => bend(list, read)), -bend(later, read)]);
    for (let a = 0; a < 3; a++) {
      const [b, c] = [(a + 1) % 3, (a + 2) % 3];
      potentials.add([here.E[a]!, slope(along[a]!, phi), slope(later, vA(a))]);
      potentials.add([speed * here.B[a]!, -slope(along[b]!, vA(c)), slope(along[c]!, vA(b))]);
    }
  }
  return gauge.largest > 0 ? { gauge: gauge.residual, wave: wave.residual, potentials: potentials.residual } : null;
}

/** The largest sum of some terms that ought to be 0, relative to the largest term. */
class Worst {
  largest = 0;
  #sum = 0;

  add(terms: readonly number[]): void {
    this.#sum = Math.max(this.#sum, Math.abs(terms.reduce((sum, x) => sum + x, 0)));
    this.largest = Math.max(this.largest, ...terms.map(Math.abs));
  }

  get residual(): number {
    return this.#sum / this.largest;
  }
}

/**
 * What is left of continuity at the nodes of the grid, Σ I (out of the node) + dQ/dt = 0, for the currents and charges that
 * the grid and the integral of gridded currents are given: relative to the largest current, over some instants.
 */
export function continuityResidual({ edges, charges }: GriddedSources, duration: number): number {
  let worst = 0;
  let largest = 0;
  for (let m = 1; m <= INSTANTS; m++) {
    const t = (duration * m) / (INSTANTS + 1);
    const out = new Map<string, number>();
    const add = (node: readonly number[], current: number) => {
      const key = node.join();
      out.set(key, (out.get(key) ?? 0) + current);
    };
    for (let e = 0; e < edges.count; e++) {
      const current = rateOf(edges, e, t);
      largest = Math.max(largest, Math.abs(current));
      const node = [...edges.node.subarray(3 * e, 3 * e + 3)];
      add(node, current);
      node[edges.axis[e]!]! += 1;
      add(node, -current);
    }
    for (let n = 0; n < charges.count; n++) add([...charges.node.subarray(3 * n, 3 * n + 3)], rateOf(charges, n, t));
    for (const left of out.values()) worst = Math.max(worst, Math.abs(left));
  }
  return largest > 0 ? worst / largest : 0;
}

/** Σ weight · w(t − delay): an edge's current, or the rate of a node's charge. */
function rateOf(pairs: Pairs, entry: number, t: number): number {
  let sum = 0;
  for (let p = pairs.pairStart[entry]!; p < pairs.pairStart[entry + 1]!; p++)
    sum += pairs.weight[p]! * pairs.waveforms[pairs.waveform[p]!]!.value(t - pairs.delay[p]!);
  return sum;
}
