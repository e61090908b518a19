/**
 * One plane of one half step, with everything that happens on it. Both schedules call these two and nothing else.
 */
import { Electric, Magnetic, update } from './rows';
import { sample } from './samples';
import { drive } from './sources';
import { planeFrom, planeTo, rowFrom, rowTo, stepNumber, vectorFrom, vectorTo } from './step';
import {
  closePlane, closeTogether, electricCut, magneticCut, mirror, notePlane, noteTogether, waiting,
} from './walls';

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
 * E^n → E^{n+1} on plane k, as far as it lies in rows [j0, j1) and among the step's cells. Rows that go together at a wall
 * go with whichever tile has the last of them; planes that do, with the last of them.
 */
export function electric(k: i32, j0: i32, j1: i32, step: usize): void {
  if (k < planeFrom(step) || k >= planeTo(step) || k < waiting()) return;
  const from = max(electricCut(j0), rowFrom(step));
  const to = min(electricCut(j1), rowTo(step));
  if (from >= to) return;
  const first = k == waiting() ? 0 : k;
  const n = stepNumber(step);
  noteTogether(k, from, to, n);
  for (let plane = first; plane <= k; plane++) electricPlane(plane, from, to, n, step);
  closeTogether(first, k, from, to, n);
}

function electricPlane(k: i32, from: i32, to: i32, n: i32, step: usize): void {
  const x0 = vectorFrom(step);
  const x1 = vectorTo(step);
  // On the walls at plane 0 and row 0 the tangential components are held.
  const heldX = k == 0 ? <Real>0 : cx;
  const heldY = k == 0 ? <Real>0 : cy;
  notePlane(k, from, to, n);
  if (from == 0) update<Electric>(k, 0, 1, x0, x1, 0, heldY, 0);
  update<Electric>(k, max(1, from), to, x0, x1, heldX, heldY, cz);
  drive(k, from, to, step);
  closePlane(k, from, to, n);
}

/** H^{n+½} → H^{n+3/2} on plane k, as far as it lies in rows [j0, j1) and among the step's cells; then its samples. */
export function magnetic(k: i32, j0: i32, j1: i32, step: usize): void {
  // Planes of e that go together have all that these need one plane earlier.
  const waits = max(waiting() - 1, 0);
  if (k < planeFrom(step) || k >= planeTo(step) || k < waits) return;
  const from = max(magneticCut(j0), rowFrom(step));
  const to = min(magneticCut(j1), rowTo(step));
  if (from >= to) return;
  const first = k == waits ? 0 : k;
  for (let plane = first; plane <= k; plane++) {
    update<Magnetic>(plane, from, to, vectorFrom(step), vectorTo(step), cx, cy, cz);
  }
  mirror(first, k, from, to);
  for (let plane = first; plane <= k; plane++) sample(plane, from, to, step);
}
