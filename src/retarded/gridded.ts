import { exp, log } from '../elementary/elementary.ts';
import type { GriddedSources, Pairs } from '../gridding/edges.ts';
import type { LinePiece } from '../scenario/curve.ts';
import type { Axis, Medium, Vec3 } from '../scenario/model.ts';
import type { Instants, SamplePoints } from '../trace/trace.ts';
import { DelayGrid } from './delayGrid.ts';
import { constantsOf } from './elements.ts';
import { fieldOf } from './field.ts';
import { stepOf } from './history.ts';
import { prepareGridded } from './prepare.ts';
import { gaussLegendre } from './quadrature.ts';
import { WaveformSet } from './terms.ts';

export interface GriddedOptions {
  /** error asked of interpolation in time and of integration along edges, each relative to the peak; default 1e-8 */
  readonly accuracy?: number;
  /** instants that are checked against adaptive quadrature; default 8 */
  readonly checks?: number;
}

export interface GriddedHistory {
  /** laid out as in FieldHistory: (point·6 + component)·count + n; V/m for E, A/m for H */
  readonly values: Float64Array;
  /** what the checks found: the largest difference, relative to the peak of the vector (E or H) at that point */
  readonly difference: number;
  readonly checks: number;
  /** pairs of weight and delay summed at one point, each of which serves all instants */
  readonly evaluations: number;
}

/**
 * The exact field of currents on grid edges, one component at each site of a Yee grid: every edge a uniform filament
 *   4π/μ B = Σ_edges ∫ (I/R³ + İ/(vR²)) ŝ×R ds,   4πε E = Σ_nodes (Q/R³ + Q̇/(vR²)) R − Σ_edges ∫ ŝ İ/(v²R) ds,
 * with its charges at its two nodes, which are summed beforehand. Edges are integrated by Gauss's rule, with 4 points from
 * about two cells on and more nearby, and where a waveform has kinks in stretches between their retarded fronts.
 *
 * A jump w(0⁺) ≠ 0 counts in w and q but its front, an impulse from each edge, does not: no instant would sample it.
 * @param origin position of node (0, 0, 0), m
 * @throws RangeError where a site lies on an edge or a charged node, or where instants are not equidistant
 */
export function griddedHistory(
  gridded: GriddedSources,
  origin: Vec3,
  cellSize: Vec3,
  medium: Medium,
  points: SamplePoints,
  instants: Instants,
  options: GriddedOptions = {},
): GriddedHistory {
  const integrator = new GriddedIntegrator(gridded, origin, cellSize, medium, instants, options.accuracy ?? 1e-8);
  try {
    return integrator.history(points, options.checks ?? 8);
  } finally {
    integrator.release();
  }
}

/** Of the adaptive quadrature that checks are made with; it is relative to the vector, of which one component is used. */
const CHECK_TOLERANCE = 1e-11;

const axisOf = ({ direction }: LinePiece): Axis => (direction[0] !== 0 ? 0 : direction[1] !== 0 ? 1 : 2);

/** In cells. */
const ON_EDGE = 1e-6;

/** The order in which the kernel is given entries: charges, then edges along x, y, z. */
const GROUPS = 4;

const ENTRY_BYTES = 32;
const PAIR_BYTES = 16;
const RULE_BYTES = 24;

/** Points of the rules along an edge, from far to near. */
const EDGE_POINTS = [4, 6, 8, 12, 16, 24, 32, 48, 64, 96, 128];

/** Gridded currents laid out for the kernel, for one run of instants. Call `release` when done. */
export class GriddedIntegrator {
  readonly #gridded: GriddedSources;
  readonly #origin: Vec3;
  readonly #cellSize: Vec3;
  readonly #medium: Medium;
  readonly #instants: Instants;
  readonly #grid: DelayGrid;
  /** first entry of each group, by waveform: bounds[waveform·5 + group] */
  readonly #bounds: readonly number[];
  readonly #waveforms: number;
  readonly #pairs: number;
  readonly #reachAt: number;

  constructor(
    gridded: GriddedSources,
    origin: Vec3,
    cellSize: Vec3,
    medium: Medium,
    instants: Instants,
    accuracy: number,
  ) {
    this.#gridded = gridded;
    this.#origin = origin;
    this.#cellSize = cellSize;
    this.#medium = medium;
    this.#instants = instants;
    const waveforms = new WaveformSet();
    const { edges, charges } = gridded;
    const indexOf = (pairs: Pairs) => pairs.waveforms.map((waveform) => waveforms.index(waveform));
    const indices = { edges: indexOf(edges), charges: indexOf(charges) };
    const step = stepOf(instants, { waveforms: waveforms.list });

    const layout = new EntryLayout(origin, cellSize, step);
    const bounds: number[] = [];
    for (let w = 0; w < waveforms.list.length; w++) {
      for (let group = 0; group < GROUPS; group++) {
        bounds.push(layout.entries);
        if (group === 0) layout.add(charges, () => true, indices.charges, w);
        else layout.add(edges, (e) => edges.axis[e] === group - 1, indices.edges, w);
      }
      bounds.push(layout.entries);
    }
    this.#bounds = bounds;
    this.#waveforms = waveforms.list.length;
    this.#pairs = layout.pairs;

    const rules = edgeRules(accuracy);
    const entryBytes = layout.entries * ENTRY_BYTES;
    const pairBytes = layout.pairs * PAIR_BYTES;
    const total = entryBytes + pairBytes + rules.bytes + 16;
    const latest = Math.max(instants.E.at(-1) ?? 0, instants.H.at(-1) ?? 0);
    this.#grid = new DelayGrid(waveforms.list, step, instants.count, latest, accuracy, total);
    const { held, kernel } = this.#grid;
    const memory = new DataView(kernel.memory.buffer);
    layout.write(memory, held, held + entryBytes);
    rules.write(memory, held + entryBytes + pairBytes);
    this.#reachAt = held + total - 16;
    kernel.setGridded(held, held + entryBytes, held + entryBytes + pairBytes);
  }

  /** Histories of one component at each site; `checks` of their values are compared with adaptive quadrature. */
  history(points: SamplePoints, checks: number): GriddedHistory {
    const { count } = this.#instants;
    const values = new Float64Array(points.count * 6 * count);
    for (let m = 0; m < points.count * 6; m++) {
      const at = sitePosition(points, m);
      this.#refuseOnEdge(at);
      this.#site(at, m % 6, values.subarray(m * count, (m + 1) * count));
    }
    const difference = checks > 0 && points.count > 0 ? this.#check(points, values, checks) : 0;
    return { values, difference, checks, evaluations: this.#pairs };
  }

  release(): void {
    this.#grid.release();
  }

  #site(at: Vec3, component: number, out: Float64Array): void {
    const { kernel, step } = this.#grid;
    const k = constantsOf(this.#medium);
    const magnetic = component >= 3;
    const a = component % 3;
    const first = (magnetic ? this.#instants.H : this.#instants.E)[0]!;
    const perSpeed = 1 / k.speed;
    kernel.setObserver(at[0], at[1], at[2], first / step, perSpeed / step);
    const b = (a + 1) % 3;
    const c = (a + 2) % 3;
    const groups = magnetic ? [1 + b, 1 + c] : [0, 1 + a];
    for (let w = 0; w < this.#waveforms; w++) {
      const range = (group: number) => [this.#bounds[w * 5 + group]!, this.#bounds[w * 5 + group + 1]!] as const;
      const used = groups.filter((group) => range(group)[1] > range(group)[0]);
      if (used.length === 0) continue;
      let lowest = Number.POSITIVE_INFINITY;
      let highest = Number.NEGATIVE_INFINITY;
      for (const group of used) {
        kernel.reach(...range(group), group === 0 ? 0 : this.#cellSize[group - 1]!, this.#reachAt);
        const reach = new Float64Array(kernel.memory.buffer, this.#reachAt, 2);
        lowest = Math.min(lowest, reach[0]!);
        highest = Math.max(highest, reach[1]!);
      }
      this.#grid.correlateInto(
        out,
        w,
        this.#grid.window(lowest, highest),
        magnetic ? [1, 2] : [0, 1],
        !magnetic,
        () => {
          for (const group of used) {
            if (group === 0) kernel.spreadCharges(...range(0), a, perSpeed, k.electric);
            else {
              const axis = group - 1;
              const length = this.#cellSize[axis]!;
              // (e_b × R)_a = R_c and (e_c × R)_a = −R_b for a, b, c cyclic
              const across = axis === b ? c : b;
              const sign = axis === b ? 1 : -1;
              const scale = magnetic ? sign / (4 * Math.PI) : k.electric;
              kernel.spreadEdges(...range(group), axis, across, magnetic, length, perSpeed, scale);
            }
          }
        },
      );
    }
  }

  /** The largest difference from adaptive quadrature at places spread over sites and instants, relative to the peaks. */
  #check(points: SamplePoints, values: Float64Array, checks: number): number {
    const { E, H, count } = this.#instants;
    const prepared = prepareGridded(this.#gridded, this.#origin, this.#cellSize, this.#medium);
    // E is fed by edges along itself, H by edges across it; charges feed E alone.
    const fields = [0, 1, 2, 3, 4, 5].map((component) => {
      const feeds = (axis: Axis) => (component < 3 ? axis === component : axis !== component - 3);
      const integrals = prepared.integrals.filter(({ piece }) => feeds(axisOf(piece as LinePiece)));
      const charges = component < 3 ? prepared.charges : [];
      return fieldOf({ ...prepared, integrals, charges }, { potentials: false, tolerance: CHECK_TOLERANCE });
    });
    let worst = 0;
    for (let n = 0; n < checks; n++) {
      // Multiples of two irrational numbers spread over sites and instants without a pattern.
      const m = Math.floor((((n + 1) * 0.7548776662466927) % 1) * points.count * 6);
      const i = Math.floor((((n + 1) * 0.5698402909980532) % 1) * count);
      const component = m % 6;
      const exact = fields[component]!(sitePosition(points, m), component < 3 ? E[i]! : H[i]!);
      const own = (m - component) * count + (component < 3 ? 0 : 3 * count);
      let peak = 0;
      for (let j = own; j < own + 3 * count; j++) peak = Math.max(peak, Math.abs(values[j]!));
      const off = Math.abs(values[m * count + i]! - (component < 3 ? exact.E[component]! : exact.H[component - 3]!));
      if (off > 0) worst = Math.max(worst, off / peak);
    }
    return worst;
  }

  /** Distances are compared in cells: nodes and sites of a Yee grid are never nearer than half a cell, or on each other. */
  #refuseOnEdge(at: Vec3): void {
    const { axis, node, count } = this.#gridded.edges;
    const place = [0, 1, 2].map((a) => (at[a]! - this.#origin[a]!) / this.#cellSize[a]!);
    for (let e = 0; e < count; e++) {
      let square = 0;
      for (let a = 0; a < 3; a++) {
        const off = place[a]! - node[3 * e + a]!;
        const beyond = a !== axis[e] ? off : off < 0 ? off : off > 1 ? off - 1 : 0;
        square += beyond * beyond;
      }
      if (square < ON_EDGE * ON_EDGE)
        throw new RangeError(
          `site (${at.join(', ')}) m lies on the grid edge along ${'xyz'[axis[e]!]} at node ` +
            `(${node.subarray(3 * e, 3 * e + 3).join(', ')}), which carries current; its field is infinite there. Leave it out.`,
        );
    }
  }
}

const sitePosition = (points: SamplePoints, m: number): Vec3 => [
  points.position[3 * m]!,
  points.position[3 * m + 1]!,
  points.position[3 * m + 2]!,
];

/** Gathers entries of one waveform and kind, and writes them as the kernel reads them. */
class EntryLayout {
  readonly #nodes: number[] = [];
  readonly #ends: number[] = [];
  readonly #weights: number[] = [];
  readonly #delays: number[] = [];

  constructor(
    readonly origin: Vec3,
    readonly cellSize: Vec3,
    readonly step: number,
  ) {}

  get entries(): number {
    return this.#ends.length;
  }

  get pairs(): number {
    return this.#weights.length;
  }

  add(list: Pairs, include: (entry: number) => boolean, indices: readonly number[], waveform: number): void {
    for (let e = 0; e < list.count; e++) {
      if (!include(e)) continue;
      const before = this.#weights.length;
      for (let m = list.pairStart[e]!; m < list.pairStart[e + 1]!; m++) {
        if (indices[list.waveform[m]!] !== waveform) continue;
        this.#weights.push(list.weight[m]!);
        this.#delays.push(list.delay[m]! / this.step);
      }
      if (this.#weights.length === before) continue;
      for (let a = 0; a < 3; a++) this.#nodes.push(this.origin[a]! + list.node[3 * e + a]! * this.cellSize[a]!);
      this.#ends.push(this.#weights.length);
    }
  }

  write(memory: DataView, entryAt: number, pairAt: number): void {
    for (let e = 0; e < this.entries; e++) {
      const at = entryAt + e * ENTRY_BYTES;
      for (let a = 0; a < 3; a++) memory.setFloat64(at + 8 * a, this.#nodes[3 * e + a]!, true);
      memory.setInt32(at + 24, e === 0 ? 0 : this.#ends[e - 1]!, true);
      memory.setInt32(at + 28, this.#ends[e]!, true);
    }
    for (let m = 0; m < this.pairs; m++) {
      memory.setFloat64(pairAt + m * PAIR_BYTES, this.#weights[m]!, true);
      memory.setFloat64(pairAt + m * PAIR_BYTES + 8, this.#delays[m]!, true);
    }
  }
}

/**
 * Gauss rules for an edge of length h seen from distance d. 1/R is analytic within the ellipse through the observer,
 * whose half axes sum to ρ = x + √(x² + 1), x = 2d/h, and n points leave an error of about ρ^(−2n) (Trefethen,
 * Approximation Theory and Approximation Practice, 2013, ch. 19, from memory): n points serve from
 * d/h = sinh(ln(1/accuracy)/(2n))/2 on.
 */
function edgeRules(accuracy: number): { bytes: number; write(memory: DataView, at: number): void } {
  const total = EDGE_POINTS.reduce((sum, n) => sum + n, 0);
  return {
    bytes: EDGE_POINTS.length * RULE_BYTES + total * 16,
    write(memory, at) {
      let nodesAt = at + EDGE_POINTS.length * RULE_BYTES;
      EDGE_POINTS.forEach((n, m) => {
        const x = log(1 / accuracy) / (2 * n);
        const ratio = (exp(x) - exp(-x)) / 4;
        memory.setFloat64(at + m * RULE_BYTES, m === EDGE_POINTS.length - 1 ? 0 : ratio * ratio, true);
        memory.setInt32(at + m * RULE_BYTES + 8, n, true);
        memory.setUint32(at + m * RULE_BYTES + 16, nodesAt, true);
        const { nodes, weights } = gaussLegendre(n);
        for (let j = 0; j < n; j++) {
          memory.setFloat64(nodesAt, (1 + nodes[j]!) / 2, true);
          memory.setFloat64(nodesAt + 8, weights[j]! / 2, true);
          nodesAt += 16;
        }
      });
    },
  };
}
