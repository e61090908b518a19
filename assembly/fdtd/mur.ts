/**
 * Mur's first condition (1981) on any of the six faces: with e0 on the wall, e1 one cell inward and s = vΔt/h,
 *   e0 ← e1 + (s − 1)/(s + 1) (e1′ − e0),   e1′ the new value of e1,
 * for both tangential components. The stencil leaves a wall's tangential e alone (its coefficient is zero there), so e0
 * is still the old value when the plane is closed; e1 must be noted before the plane is updated.
 *
 * A rim, shared by two faces, belongs to the later axis. So x faces are closed first, then y faces, then z faces, and
 * the result does not depend on the schedule, as long as row 0 travels with row 1, and plane 0 is closed with plane 1.
 */
import { CELL, EX, EY, EZ, nx, ny, nz, planeBytes, rowBytes, rowOffset } from './memory';

/** Faces with this condition, one bit each. */
let faces: i32 = 0;
const X_LOW = 1;
const X_HIGH = 2;
const Y_LOW = 4;
const Y_HIGH = 8;
const Z_LOW = 16;
const Z_HIGH = 32;

/** (s − 1)/(s + 1) by axis. */
let factorX: Real = 0;
let factorY: Real = 0;
let factorZ: Real = 0;

/** This thread's notes of e1: 4·ny for the x faces, 4·(nx + 1) for the y faces, 2·(nx + 1)(ny + 1) for a z face. */
let notesX: usize = 0;
let notesY: usize = 0;
let notesZ: usize = 0;

export function murWalls(which: i32, x: f64, y: f64, z: f64, notes: usize): void {
  faces = which;
  factorX = <Real>x;
  factorY = <Real>y;
  factorZ = <Real>z;
  notesX = notes;
  notesY = notesX + <usize>(4 * ny) * CELL;
  notesZ = notesY + <usize>(4 * (nx + 1)) * CELL;
}

/** Notes `count` values of e1, `step` bytes apart. */
function note(inward: usize, step: usize, count: i32, notes: usize): void {
  for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, inward += step) {
    store<Real>(notes, load<Real>(inward));
  }
}

/** e0 ← e1 + factor (e1′ − e0) for `count` values, e1′ lying `inward` bytes from e0. */
function close(wall: usize, inward: usize, step: usize, count: i32, notes: usize, factor: Real): void {
  for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, wall += step) {
    store<Real>(wall, load<Real>(notes) + factor * (load<Real>(wall + inward) - load<Real>(wall)));
  }
}

/** Before e changes on rows [j0, j1) of plane k. */
// @ts-ignore: decorator
@inline
export function noteWalls(k: i32, j0: i32, j1: i32): void {
  if (faces) noteFaces(k, j0, j1);
}

function noteFaces(k: i32, j0: i32, j1: i32): void {
  const first = rowOffset(j0, k);
  const rows = j1 - j0;
  const column = <usize>ny * CELL;
  if (faces & X_LOW) {
    note(EY + first + CELL, rowBytes, rows, notesX);
    note(EZ + first + CELL, rowBytes, rows, notesX + column);
  }
  if (faces & X_HIGH) {
    const beside = first + <usize>(nx - 1) * CELL;
    note(EY + beside, rowBytes, rows, notesX + 2 * column);
    note(EZ + beside, rowBytes, rows, notesX + 3 * column);
  }
  const row = <usize>(nx + 1) * CELL;
  if (faces & Y_LOW && j0 == 0) {
    note(EX + rowOffset(1, k), CELL, nx, notesY);
    note(EZ + rowOffset(1, k), CELL, nx + 1, notesY + row);
  }
  if (faces & Y_HIGH && j1 == ny) {
    note(EX + rowOffset(ny - 1, k), CELL, nx, notesY + 2 * row);
    note(EZ + rowOffset(ny - 1, k), CELL, nx + 1, notesY + 3 * row);
  }
  if ((faces & Z_LOW && k == 1) || (faces & Z_HIGH && k == nz - 1)) {
    const plane = row * <usize>(ny + 1);
    for (let j = j0; j < j1 + i32(j1 == ny); j++) note(EX + rowOffset(j, k), CELL, nx, notesZ + <usize>j * row);
    for (let j = j0; j < j1; j++) note(EY + rowOffset(j, k), CELL, nx + 1, notesZ + plane + <usize>j * row);
  }
}

/** After e has changed on rows [j0, j1) of plane k, sources included. */
// @ts-ignore: decorator
@inline
export function closeWalls(k: i32, j0: i32, j1: i32): void {
  if (faces) closeFaces(k, j0, j1);
}

function closeFaces(k: i32, j0: i32, j1: i32): void {
  const first = rowOffset(j0, k);
  const rows = j1 - j0;
  const column = <usize>ny * CELL;
  const back = <usize>0 - CELL;
  // e_z of row 0 is a rim of a y face, e_y of plane 0 a rim of a z face.
  const skip = i32(j0 == 0);
  const below = <usize>skip * CELL;
  const second = first + <usize>skip * rowBytes;
  const width = <usize>nx * CELL;
  if (faces & X_LOW) {
    if (k > 0) close(EY + first, CELL, rowBytes, rows, notesX, factorX);
    close(EZ + second, CELL, rowBytes, rows - skip, notesX + column + below, factorX);
  }
  if (faces & X_HIGH) {
    if (k > 0) close(EY + first + width, back, rowBytes, rows, notesX + 2 * column, factorX);
    close(EZ + second + width, back, rowBytes, rows - skip, notesX + 3 * column + below, factorX);
  }
  const row = <usize>(nx + 1) * CELL;
  if (faces & Y_LOW && j0 == 0) {
    if (k > 0) close(EX + rowOffset(0, k), rowBytes, CELL, nx, notesY, factorY);
    close(EZ + rowOffset(0, k), rowBytes, CELL, nx + 1, notesY + row, factorY);
  }
  if (faces & Y_HIGH && j1 == ny) {
    if (k > 0) close(EX + rowOffset(ny, k), 0 - rowBytes, CELL, nx, notesY + 2 * row, factorY);
    close(EZ + rowOffset(ny, k), 0 - rowBytes, CELL, nx + 1, notesY + 3 * row, factorY);
  }
  if (faces & Z_LOW && k == 1) closeZ(j0, j1, 0, planeBytes);
  if (faces & Z_HIGH && k == nz - 1) closeZ(j0, j1, nz, 0 - planeBytes);
}

function closeZ(j0: i32, j1: i32, wall: i32, inward: usize): void {
  const row = <usize>(nx + 1) * CELL;
  const plane = row * <usize>(ny + 1);
  for (let j = j0; j < j1 + i32(j1 == ny); j++) {
    close(EX + rowOffset(j, wall), inward, CELL, nx, notesZ + <usize>j * row, factorZ);
  }
  for (let j = j0; j < j1; j++) {
    close(EY + rowOffset(j, wall), inward, CELL, nx + 1, notesZ + plane + <usize>j * row, factorZ);
  }
}
