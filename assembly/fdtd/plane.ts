/**
 * One plane of one half step, with everything that happens on it. Both schedules call these two and nothing else.
 */
import { ny, nz } from './memory';
import { closeWalls, noteWalls } from './mur';
import { Electric, Magnetic, update } from './rows';
import { sample } from './samples';
import { drive } from './sources';
import { planeFrom, planeTo, rowFrom, rowTo, vectorFrom, vectorTo } from './step';

/** c_x, c_y, c_z of ./rows. */
let cx: Real = 0;
let cy: Real = 0;
let cz: Real = 0;

export function coefficients(x: f64, y: f64, z: f64): void {
  cx = <Real>x;
  cy = <Real>y;
  cz = <Real>z;
}

/**
 * E^n → E^{n+1} on plane k, as far as it lies in rows [j0, j1) and among the step's cells. Row 0 travels with row 1 (a
 * wall is closed from the row beside it), whichever tile that is in.
 */
export function electric(k: i32, j0: i32, j1: i32, step: usize): void {
  if (k < planeFrom(step) || k >= planeTo(step)) return;
  const from = max(j0, rowFrom(step));
  const to = min(j1, rowTo(step));
  if (from >= to || to < 2) return;
  const x0 = vectorFrom(step);
  const x1 = vectorTo(step);
  // On the walls at plane 0 and row 0 the tangential components are held.
  const heldX = k == 0 ? <Real>0 : cx;
  const heldY = k == 0 ? <Real>0 : cy;
  if (from > 1) {
    noteWalls(k, from, to);
    update<Electric>(k, from, to, x0, x1, heldX, heldY, cz);
    drive(k, from, to, step);
    closeWalls(k, from, to);
  } else {
    noteWalls(k, 0, to);
    update<Electric>(k, 0, 1, x0, x1, 0, heldY, 0);
    update<Electric>(k, 1, to, x0, x1, heldX, heldY, cz);
    drive(k, 0, to, step);
    closeWalls(k, 0, to);
  }
}

/** H^{n+½} → H^{n+3/2} on plane k, as far as it lies in rows [j0, j1) and among the step's cells; then its samples. */
export function magnetic(k: i32, j0: i32, j1: i32, step: usize): void {
  if (k < planeFrom(step) || k >= planeTo(step)) return;
  const from = max(j0, rowFrom(step));
  const to = min(j1, rowTo(step));
  if (from >= to) return;
  update<Magnetic>(k, from, to, vectorFrom(step), vectorTo(step), cx, cy, cz);
  sample(k, from, to, step);
}
