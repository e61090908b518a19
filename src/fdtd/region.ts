import { AXES, latticeCells } from './layout.ts';
import type { GridProblem } from './problem.ts';

/** A box of lattice cells, `to` not included; counted from the lattice's own corner. */
export interface CellBox {
  readonly from: readonly [number, number, number];
  readonly to: readonly [number, number, number];
}

/** The cells that step n (0 … steps − 1) updates, both E^n → E^{n+1} and H^{n+½} → H^{n+3/2}. */
export type Region = (step: number) => CellBox;

/** All cells, at every step. */
export function wholeLattice(problem: GridProblem): Region {
  const box: CellBox = { from: [0, 0, 0], to: latticeCells(problem) };
  return () => box;
}

/**
 * The active region: cells that the front can have reached, |x − source| ≤ s(n + 3/2) + m, and that can still reach a
 * sample, |x − sample| ≤ s(N − n + ½) + m, in cells and along each axis, with s = `speed`·vΔt/h and m the margin. A front
 * on the lattice has precursors that run ahead of s, one cell a step at most: the margin makes them negligible, and with
 * s = 1 on every axis (`speed` Infinity) nothing is lost at all.
 *
 * Each bound first moves outwards and then inwards, so a cell that was left is never entered again: the wavefront
 * schedule relies on that.
 */
export function activeRegion(problem: GridProblem, margin: number, speed = 1): Region {
  const cells = latticeCells(problem);
  const sources = boundsOf(problem.currents.node, problem.currents.count);
  const samples = problem.samples
    .map((group) => boundsOf(group.cell, group.cell.length / 3))
    .reduce((all, some) => ({
      from: all.from.map((x, a) => Math.min(x, some.from[a]!)),
      to: all.to.map((x, a) => Math.max(x, some.to[a]!)),
    }));
  const perStep = AXES.map((a) => Math.min(1, (speed * problem.medium.speed * problem.timeStep) / problem.cellSize[a]));
  const offset = [problem.pad['x-'], problem.pad['y-'], problem.pad['z-']];

  return (step) => {
    const from = [0, 0, 0];
    const to = [0, 0, 0];
    for (const a of AXES) {
      const reached = perStep[a]! * (step + 1.5) + margin;
      const matters = perStep[a]! * (problem.steps - step + 0.5) + margin;
      const low = Math.max(sources.from[a]! - reached, samples.from[a]! - matters) + offset[a]!;
      const high = Math.min(sources.to[a]! + reached, samples.to[a]! + matters) + offset[a]! + 1;
      from[a] = Math.max(0, Math.floor(low));
      to[a] = Math.min(cells[a], Math.ceil(high));
      // Nothing to do along one axis is nothing to do at all.
      if (from[a]! >= to[a]!) return { from: [0, 0, 0], to: [0, 0, 0] };
    }
    return { from, to } as unknown as CellBox;
  };
}

/** The region that a problem asks for. */
export function regionOf(problem: GridProblem): Region {
  return problem.activeRegion && problem.currents.count > 0 && problem.samples.length > 0
    ? activeRegion(problem, problem.activeRegion.margin)
    : wholeLattice(problem);
}

/** Smallest and largest index along each axis. */
function boundsOf(indices: Int32Array, count: number): { from: number[]; to: number[] } {
  const from = [Infinity, Infinity, Infinity];
  const to = [-Infinity, -Infinity, -Infinity];
  for (let n = 0; n < count; n++)
    for (let a = 0; a < 3; a++) {
      from[a] = Math.min(from[a]!, indices[3 * n + a]!);
      to[a] = Math.max(to[a]!, indices[3 * n + a]!);
    }
  return { from, to };
}

/**
 * Cell updates of a run, E and H of a cell together as one, counted without running it.
 * @param steps how many steps are marched, all of them unless the run is to stop early
 */
export function countCellUpdates(problem: GridProblem, steps = problem.steps): number {
  const region = regionOf(problem);
  let count = 0;
  for (let n = 0; n < steps; n++) {
    const { from, to } = region(n);
    count += (to[0] - from[0]) * (to[1] - from[1]) * (to[2] - from[2]);
  }
  return count;
}
