import type { Axis, Grid, Medium, Vec3 } from './model.ts';

/** A fraction of a cell that is taken for rounding: positions within it of a node, a wall or a tie are on it. */
export const CELL_SLACK = 1e-9;

/** Δt = S / (v √(1/dx² + 1/dy² + 1/dz²)), s; S = `courant`. Courant, Friedrichs, Lewy 1928; Yee 1966. */
export function timeStepOf(grid: Pick<Grid, 'cellSize' | 'courant'>, medium: Medium): number {
  const [dx, dy, dz] = grid.cellSize;
  return grid.courant / (medium.speed * Math.sqrt(1 / (dx * dx) + 1 / (dy * dy) + 1 / (dz * dz)));
}

/** Time steps that cover a duration: the last instant of E is the first at or after it. */
export function stepsOf(duration: number, timeStep: number): number {
  return Math.ceil(duration / timeStep - CELL_SLACK);
}

/**
 * The cell whose six components an observer reads: that of its nearest node, ties to the lower index. On the upper
 * walls it is the last cell, since the next one's staggered sites lie beyond the box.
 */
export function observerCell(grid: Grid, at: Vec3): [number, number, number] {
  const index = (a: Axis) => {
    const node = Math.ceil((at[a] - grid.box.from[a]) / grid.cellSize[a] - 0.5 - CELL_SLACK);
    return Math.min(Math.max(node, 0), grid.cells[a] - 1);
  };
  return [index(0), index(1), index(2)];
}

/** The middle of cell p of a list of cells, three indices each, m. */
export function cellCentre(
  { box, cellSize }: Pick<Grid, 'box' | 'cellSize'>,
  cells: ArrayLike<number>,
  p: number,
): Vec3 {
  const at = (a: Axis) => box.from[a] + (cells[3 * p + a]! + 0.5) * cellSize[a];
  return [at(0), at(1), at(2)];
}
