import type { Curve } from '../scenario/curve.ts';
import type { Axis, Dipole, Filament, Grid, Gridding, Source, Vec3, WaveTerm } from '../scenario/model.ts';
import type { Waveform } from '../scenario/waveform.ts';
import type { GriddedSources, NodeCharges, Pairs } from './edges.ts';
import { gaussLegendre } from './gaussLegendre.ts';

/** Where the nodes of a grid lie: node (i, j, k) at origin + (i dx, j dy, k dz), cells 0 … cells − 1 along each axis. */
export interface NodeGrid {
  readonly origin: Vec3;
  readonly cellSize: Vec3;
  readonly cells: readonly [number, number, number];
  /** how currents are put on its edges; trilinear when absent */
  readonly gridding?: Gridding;
}

export const nodeGridOf = (grid: Grid): NodeGrid => ({
  origin: grid.box.from,
  cellSize: grid.cellSize,
  cells: grid.cells,
  gridding: grid.gridding,
});

/** A coordinate nearer than this (in cells) to a grid plane is taken to lie on it, so that a wire on a grid line stays on it. */
const SNAP = 1e-9;

/** What is left of terms that cancel: the rounding of arc lengths, up to a few hundred cells long, in units of a cell. */
const CANCELLED = 1e-13;

/**
 * Puts the designed currents on grid edges.
 *
 * Trilinear, the default, conserves charge. A filament is cut at every grid plane; each piece drives, along each axis a, the four edges around it with
 *   I_e = (1/h_a) ∫ I(s, t) w_b w_c (t̂·â) ds,  w = 1 − |Δ|/h
 * (the lowest-order edge element: Whitney 1957; Bossavit, IEE Proc. A 135, 1988, from memory). The integral is a
 * Gauss–Legendre sum whose nodes become (weight, delay) pairs. A point dipole is spread linearly along its own axis over
 * the two nearest collinear edges and bilinearly across, so that its centroid is where it was designed to be.
 *
 * Two cruder ways stand in for solvers that use them (common practice, no source): `nearest` drops the current of every
 * piece on the nearest edge of its direction, w = 1 there and 0 elsewhere, and so leaves charge wherever it changes edge;
 * `staircase` walks along edges from nearest node to nearest node, and so conserves charge but moves the wire by up to
 * half a cell. Both put a point dipole on the nearest edges.
 *
 * The charges at the nodes follow from the edge currents by continuity, Σ_out I_e = −dQ/dt, term by term.
 */
export function gridSources(sources: readonly Source[], grid: NodeGrid): GriddedSources {
  const waveforms = sources.map((source) => source.waveform);
  const edges = new PairCollector(grid, 3);
  sources.forEach((source, index) => {
    if (source.type === 'dipole') gridDipole(source, index, grid, edges);
    else if (grid.gridding === 'staircase') gridStaircase(source, index, grid, edges);
    else gridFilament(source, index, grid, edges);
  });
  const collected = edges.finish(waveforms);
  const currents = { ...collected.pairs, axis: Uint8Array.from(collected.kinds) };
  return { edges: currents, charges: chargesOf(currents, grid) };
}

function gridFilament(filament: Filament, index: number, grid: NodeGrid, edges: PairCollector): void {
  const point = new Float64Array(3);
  const tangent = new Float64Array(3);
  const cell = [0, 0, 0] as [number, number, number];
  const fraction = [0, 0, 0] as [number, number, number];
  const nearest = grid.gridding === 'nearest';
  const weightOf = (upper: 0 | 1, f: number) => {
    if (nearest) return upper === (f > 0.5 ? 1 : 0) ? 1 : 0;
    return upper ? f : 1 - f;
  };
  const slowest = Math.max(...filament.terms.map((term) => Math.abs(term.slowness)));
  const finest = Math.min(...filament.terms.map(({ profile }) => profile?.scale ?? Number.POSITIVE_INFINITY));
  const breaks = filament.terms.flatMap(({ profile }) => profile?.breaks ?? []);
  for (const { piece, from, to } of cutAtPlanes(filament.curve, grid, nearest ? [0, 0.5] : [0], breaks)) {
    // Points are cheap where a profile is all that varies: pairs of one delay are merged.
    const change = (to - from) * (slowest / filament.waveform.timeScale + 2 / finest);
    const { nodes, weights } = gaussLegendre(pointsFor(piece.kind, change));
    piece.point((from + to) / 2, point);
    for (let a = 0; a < 3; a++) cell[a] = Math.floor(snap((point[a]! - grid.origin[a]!) / grid.cellSize[a]!));
    for (let m = 0; m < nodes.length; m++) {
      const s = from + nodes[m]! * (to - from);
      piece.point(s, point);
      piece.tangent(s, tangent);
      for (let a = 0; a < 3; a++) fraction[a] = snap((point[a]! - grid.origin[a]!) / grid.cellSize[a]! - cell[a]!);
      for (const axis of AXES) {
        const along = (weights[m]! * (to - from) * tangent[axis]!) / grid.cellSize[axis];
        if (along === 0) continue;
        const b = ((axis + 1) % 3) as Axis;
        const c = ((axis + 2) % 3) as Axis;
        for (const db of UPPER)
          for (const dc of UPPER) {
            const across = weightOf(db, fraction[b]) * weightOf(dc, fraction[c]);
            if (across === 0) continue;
            const node: [number, number, number] = [cell[0], cell[1], cell[2]];
            node[b] += db;
            node[c] += dc;
            for (const term of filament.terms)
              edges.add(axis, node, along * across * factorAt(term, s), term.delay + term.slowness * s, index);
          }
      }
    }
  }
}

/** factor · a(s) */
const factorAt = ({ factor, profile }: WaveTerm, s: number): number => (profile ? factor * profile.value(s) : factor);

/**
 * The staircase of a filament: it is cut where its nearest node changes, and there the edge between the two nodes carries
 * I(s, t) of the cut, so that the charge at a node is what flows in less what flows out. Where two or three coordinates
 * change at once, x goes before y before z.
 */
function gridStaircase(filament: Filament, index: number, grid: NodeGrid, edges: PairCollector): void {
  const point = new Float64Array(3);
  const walk = (from: readonly number[], to: readonly number[], s: number) => {
    const node = [...from] as [number, number, number];
    for (const axis of AXES)
      while (node[axis] !== to[axis]) {
        const sign = to[axis]! > node[axis] ? 1 : -1;
        if (sign < 0) node[axis]--;
        for (const term of filament.terms)
          edges.add(axis, node, sign * factorAt(term, s), term.delay + term.slowness * s, index);
        if (sign > 0) node[axis]++;
      }
  };
  let first: number[] | null = null;
  let last: number[] = [];
  for (const { piece, from, to } of cutAtPlanes(filament.curve, grid, [0.5])) {
    piece.point((from + to) / 2, point);
    const node = AXES.map((a) => Math.round(snap((point[a]! - grid.origin[a]) / grid.cellSize[a])));
    if (first === null) first = node;
    else walk(last, node, from);
    last = node;
  }
  // A closed curve whose first point lies on a cut begins and ends at different nodes.
  if (filament.curve.closed) walk(last, first!, filament.curve.length);
}

function gridDipole(dipole: Dipole, index: number, grid: NodeGrid, edges: PairCollector): void {
  const linear = grid.gridding === undefined || grid.gridding === 'trilinear';
  for (const axis of AXES) {
    const moment = dipole.length * dipole.direction[axis];
    if (moment === 0) continue;
    const weightsAt = AXES.map((a) => {
      const u = snap((dipole.at[a] - grid.origin[a]) / grid.cellSize[a] - (a === axis ? 0.5 : 0));
      // Edges end at the box: nearer than half a cell to a wall the linear rule is continued, which keeps the centroid.
      const last = a === axis ? grid.cells[a] - 1 : grid.cells[a];
      if (!linear) return { lower: Math.min(Math.max(Math.round(u), 0), last), fraction: 0 };
      const lower = Math.min(Math.max(Math.floor(u), 0), Math.max(last - 1, 0));
      return { lower, fraction: u - lower };
    });
    for (const dx of UPPER)
      for (const dy of UPPER)
        for (const dz of UPPER) {
          const step = [dx, dy, dz];
          let weight = moment / grid.cellSize[axis];
          const node: [number, number, number] = [0, 0, 0];
          for (const a of AXES) {
            const { lower, fraction } = weightsAt[a]!;
            weight *= step[a] ? fraction : 1 - fraction;
            node[a] = lower + step[a]!;
          }
          if (weight !== 0) edges.add(axis, node, weight, 0, index);
        }
  }
}

/** Node charges by continuity: an edge takes q from its lower node and gives it to its upper one. */
function chargesOf(edges: Pairs & { readonly axis: Uint8Array }, grid: NodeGrid): NodeCharges {
  const collector = new PairCollector(grid, 1);
  for (let e = 0; e < edges.count; e++) {
    const lower: [number, number, number] = [edges.node[3 * e]!, edges.node[3 * e + 1]!, edges.node[3 * e + 2]!];
    const upper: [number, number, number] = [...lower];
    upper[edges.axis[e]!]! += 1;
    for (let p = edges.pairStart[e]!; p < edges.pairStart[e + 1]!; p++) {
      collector.add(0, lower, -edges.weight[p]!, edges.delay[p]!, edges.waveform[p]!);
      collector.add(0, upper, edges.weight[p]!, edges.delay[p]!, edges.waveform[p]!);
    }
  }
  return collector.finish(edges.waveforms).pairs;
}

/**
 * The curve in intervals of arc length that no plane cuts: planes through the nodes (offset 0, so that each interval lies
 * in one cell), half a cell beside them (0.5, so that each has one nearest node), or both; and cut at `breaks`.
 */
function* cutAtPlanes(curve: Curve, grid: NodeGrid, offsets: readonly number[], breaks: readonly number[] = []) {
  const end = new Float64Array(3);
  for (const piece of curve.pieces) {
    const inside = breaks.filter((s) => s > piece.s0 && s < piece.s0 + piece.length);
    const cuts = [piece.s0, piece.s0 + piece.length, ...inside];
    for (const axis of AXES) {
      const h = grid.cellSize[axis];
      let lower = Number.POSITIVE_INFINITY;
      let upper = Number.NEGATIVE_INFINITY;
      if (piece.kind === 'line') {
        for (const s of [piece.s0, piece.s0 + piece.length]) {
          piece.point(s, end);
          lower = Math.min(lower, end[axis]!);
          upper = Math.max(upper, end[axis]!);
        }
      } else {
        const reach = piece.radius * Math.sqrt(1 - piece.normal[axis] * piece.normal[axis]);
        lower = piece.centre[axis] - reach;
        upper = piece.centre[axis] + reach;
      }
      for (const offset of offsets) {
        const last = Math.floor((upper - grid.origin[axis]) / h - offset + SNAP);
        for (let i = Math.ceil((lower - grid.origin[axis]) / h - offset - SNAP); i <= last; i++)
          cuts.push(...piece.crossings(axis, grid.origin[axis] + (i + offset) * h));
      }
    }
    cuts.sort((a, b) => a - b);
    const least = SNAP * Math.min(...grid.cellSize);
    let from = cuts[0]!;
    for (let m = 1; m < cuts.length; m++) {
      const isEnd = m === cuts.length - 1;
      if (cuts[m]! - from < least && !isEnd) continue;
      yield { piece, from, to: cuts[m]! };
      from = cuts[m]!;
    }
  }
}

/**
 * Gauss–Legendre points for one cut of a filament: on a line the weights are quadratics in s, so that two points suffice
 * but for the travelling waveform and the profile, whose variation over the cut is `change` in units of their own scales; on an arc the
 * weights are trigonometric. The charges are exact by construction, whatever this number is.
 */
function pointsFor(kind: 'line' | 'arc', change: number): number {
  const still = kind === 'arc' ? 6 : 2;
  return change === 0 ? still : Math.min(16, still + 1 + Math.ceil(Math.min(change, 4) * 4));
}

/** Gathers pairs by entry (edge or node), merges those of equal delay and waveform, drops what cancels. */
class PairCollector {
  readonly #entries = new Map<number, { delay: number; waveform: number; weight: number }[]>();
  readonly #size: readonly [number, number, number];

  constructor(
    grid: NodeGrid,
    readonly kinds: number,
  ) {
    this.#size = [grid.cells[0] + 1, grid.cells[1] + 1, grid.cells[2] + 1];
  }

  add(kind: number, [i, j, k]: readonly [number, number, number], weight: number, delay: number, waveform: number) {
    if (weight === 0) return;
    const key = kind + this.kinds * (i + this.#size[0] * (j + this.#size[1] * k));
    const list = this.#entries.get(key);
    if (list) list.push({ delay, waveform, weight });
    else this.#entries.set(key, [{ delay, waveform, weight }]);
  }

  finish(waveforms: readonly Waveform[]): { pairs: Pairs; kinds: number[] } {
    const node: number[] = [];
    const kinds: number[] = [];
    const pairStart = [0];
    const weight: number[] = [];
    const delay: number[] = [];
    const waveform: number[] = [];
    for (const key of [...this.#entries.keys()].sort((a, b) => a - b)) {
      const list = this.#entries.get(key)!.sort((a, b) => a.waveform - b.waveform || a.delay - b.delay);
      const scale = list.reduce((largest, pair) => Math.max(largest, Math.abs(pair.weight)), 0);
      const before = weight.length;
      for (let m = 0; m < list.length; ) {
        const first = list[m]!;
        let sum = 0;
        for (; m < list.length && list[m]!.delay === first.delay && list[m]!.waveform === first.waveform; m++)
          sum += list[m]!.weight;
        if (Math.abs(sum) <= CANCELLED * scale) continue;
        weight.push(sum);
        delay.push(first.delay);
        waveform.push(first.waveform);
      }
      if (weight.length === before) continue;
      const place = Math.floor(key / this.kinds);
      kinds.push(key % this.kinds);
      node.push(
        place % this.#size[0],
        Math.floor(place / this.#size[0]) % this.#size[1],
        Math.floor(place / this.#size[0] / this.#size[1]),
      );
      pairStart.push(weight.length);
    }
    return {
      kinds,
      pairs: {
        count: kinds.length,
        node: Int32Array.from(node),
        pairStart: Int32Array.from(pairStart),
        weight: Float64Array.from(weight),
        delay: Float64Array.from(delay),
        waveform: Uint16Array.from(waveform),
        waveforms,
      },
    };
  }
}

function snap(x: number): number {
  const nearest = Math.round(x);
  return Math.abs(x - nearest) < SNAP ? nearest : x;
}

const AXES = [0, 1, 2] as const;
const UPPER = [0, 1] as const;
