import { AXES, cellOffset, fieldAddress, type Layout } from './layout.ts';
import type { GridProblem } from './problem.ts';

/** Entries sorted by row (j + ny·k) of the lattice: entries of a row are rowStart[row] … rowStart[row + 1] − 1. */
export interface ByRow {
  readonly rowStart: Uint32Array;
  /** the original number of each sorted entry */
  readonly order: Uint32Array;
}

/** Sorts entries by row, keeping the order of entries within a row (a counting sort). */
export function sortByRow(rows: Uint32Array, rowCount: number): ByRow {
  const rowStart = new Uint32Array(rowCount + 1);
  for (const row of rows) rowStart[row + 1]!++;
  for (let r = 0; r < rowCount; r++) rowStart[r + 1]! += rowStart[r]!;
  const next = rowStart.slice();
  const order = new Uint32Array(rows.length);
  rows.forEach((row, n) => {
    order[next[row]!++] = n;
  });
  return { rowStart, order };
}

/** The row of a lattice cell. */
export function rowOf(layout: Layout, j: number, k: number): number {
  return j + layout.cells[1] * k;
}

/**
 * Source edges as the kernel wants them: sorted by row, with the address of each edge's e.
 * @throws RangeError for an edge that is not inside the lattice (on a wall tangential E is not driven)
 */
export function sourceTable(problem: GridProblem, layout: Layout): ByRow & { readonly addresses: Uint32Array } {
  const { currents } = problem;
  const rows = new Uint32Array(currents.count);
  const addresses = new Uint32Array(currents.count);
  for (let e = 0; e < currents.count; e++) {
    const axis = currents.axis[e]!;
    const cell = AXES.map((a) => currents.node[3 * e + a]! + layout.offset[a]);
    const inside = AXES.every((a) => (a === axis ? cell[a]! >= 0 : cell[a]! >= 1) && cell[a]! < layout.cells[a]);
    if (!inside)
      throw new RangeError(
        `source edge ${e} along ${'xyz'[axis]} at node (${currents.node.subarray(3 * e, 3 * e + 3).join(', ')}) is not ` +
          `inside the outer walls; move the source away from the wall or enlarge grid.box.`,
      );
    rows[e] = rowOf(layout, cell[1]!, cell[2]!);
    addresses[e] = fieldAddress(layout, axis, cell[0]!, cell[1]!, cell[2]!);
  }
  const { rowStart, order } = sortByRow(rows, layout.cells[1] * layout.cells[2]);
  return { rowStart, order, addresses: addresses.map((_, n) => addresses[order[n]!]!) };
}

/** I_e(t) = Σ weight · w(t − delay), A, straight from the waveforms. */
export function edgeCurrent({ currents }: GridProblem, edge: number, t: number): number {
  let sum = 0;
  for (let p = currents.pairStart[edge]!; p < currents.pairStart[edge + 1]!; p++) {
    const u = t - currents.delay[p]!;
    if (u >= 0) sum += currents.weight[p]! * currents.waveforms[currents.waveform[p]!]!.value(u);
  }
  return sum;
}

/**
 * What edge e, along axis a, loses in the step from n to n + 1: c_a·η·I_e((n + ½)Δt), V. Ampère's law in scaled fields:
 * (Δt/ε)·J·d_a with J = I/(area of the dual face).
 */
export function sourceVoltage(problem: GridProblem, layout: Layout, edge: number, step: number): number {
  const coefficient = layout.coefficients[problem.currents.axis[edge]!]!;
  return coefficient * problem.medium.impedance * edgeCurrent(problem, edge, (step + 0.5) * problem.timeStep);
}

/**
 * Offsets of sample cells, sorted by row.
 * @throws RangeError for a cell whose components do not all lie inside the lattice
 */
export function sampleTable(cell: Int32Array, layout: Layout): ByRow & { readonly offsets: Uint32Array } {
  const count = cell.length / 3;
  const rows = new Uint32Array(count);
  const offsets = new Uint32Array(count);
  for (let p = 0; p < count; p++) {
    const [i, j, k] = AXES.map((a) => cell[3 * p + a]! + layout.offset[a]) as [number, number, number];
    if (Math.min(i, j, k) < 0 || i >= layout.cells[0] || j >= layout.cells[1] || k >= layout.cells[2])
      throw new RangeError(
        `sample cell (${cell.subarray(3 * p, 3 * p + 3).join(', ')}) is outside the lattice, whose cells run from ` +
          `(${layout.offset.map((o) => -o).join(', ')}) to (${AXES.map((a) => layout.cells[a] - layout.offset[a] - 1).join(', ')}).`,
      );
    rows[p] = rowOf(layout, j, k);
    offsets[p] = cellOffset(layout, i, j, k);
  }
  const { rowStart, order } = sortByRow(rows, layout.cells[1] * layout.cells[2]);
  return { rowStart, order, offsets: offsets.map((_, n) => offsets[order[n]!]!) };
}
