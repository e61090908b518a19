/**
 * What is done on the six walls beyond holding tangential e there.
 *
 * A linear wall (Mur, Higdon, Liao): with e_l tangential e l cells inward,
 *   e_0^{n+1} ← Σ_l older_l e_l^{n−1} + Σ_l old_l e_l^n + Σ_{l=1,2} now_l e_l^{n+1}
 *               + Σ_{l=0,1} Σ_a across_a (e_l^n one cell up along a + one cell down)      (Mur 2 alone)
 * for both tangential components. The stencil leaves a wall's tangential e alone (its coefficient is zero there). So the
 * plane is noted before it changes, when every e_l is that of step n: the wall's `notes` become the sums over older and
 * old values, and what this step will contribute as the older one is kept in `older` for the next. After the plane has
 * changed and been driven it is closed: the new values are added. A rim, shared by two faces, belongs to the later axis,
 * so x faces are closed first, then y faces, then z faces.
 *
 * Noting and closing need every layer that the wall reads in one piece, whatever the schedule:
 *   - rows 0 … reach of a low y face go together, and so do rows n − reach … n of a high one: cuts between tiles jump
 *     over them (`electricCut`, `magneticCut`; ./schedule.ts says why a cut may jump downwards);
 *   - planes 0 … reach of a low z face go together, when the wavefront has come to the last of them (`waiting`);
 *   - at a high z face the next steps, a plane behind each other, have overtaken this one two planes below the wall.
 *     Those planes are copied aside as each step passes them (`deep`), four steps in turn.
 * Neighbours along the wall may be in planes, rows or threads that are already a step further. They are kept aside too,
 * when a step is over, even and odd steps apart (`sides`).
 *
 * A mirror (a magnetic conductor): tangential h of the outermost half cell is minus that of the next one; see `mirror`.
 */
import { CELL, EX, EY, EZ, HX, HY, HZ, nx, ny, nz, planeBytes, rowBytes, rowOffset } from './memory';

/** Faces by number: x low, x high, y low, …; of sets of faces, one bit each. */
const Z_LOW = 4;
const Z_HIGH = 5;
let linear: i32 = 0;
let mirrored: i32 = 0;
/** Faces whose walls look sideways. */
let sideways: i32 = 0;

/** A wall's record, FACE_BYTES each, written by src/fdtd/wallTables.ts; the one of its rims is RIM_BYTES behind. */
const FACE_BYTES: usize = 512;
const RIM_BYTES: usize = 256;
let records: usize = 0;
/** Layers that are read: 1, 2 or 4 cells inward. */
const REACH: usize = 0;
/** Layers whose new values are read: 0, 1 or 2. */
const NEWEST: usize = 4;
/** Addresses of what is described above; 0 where a wall has no such thing. */
const NOTES: usize = 8;
const OLDER: usize = 12;
const SIDES: usize = 16;
const DEEP: usize = 20;
/** Whether the point's own mirror image is its neighbour at the ends of a line, and beyond the first and last line. */
const IMAGE_ALONG_LOW: usize = 24;
const IMAGE_ALONG_HIGH: usize = 28;
const IMAGE_ACROSS_LOW: usize = 32;
const IMAGE_ACROSS_HIGH: usize = 36;
/** Coefficients. */
const OLD_TERMS: usize = 64;
const OLDER_TERMS: usize = OLD_TERMS + 5 * CELL;
const NOW_TERMS: usize = OLD_TERMS + 10 * CELL;
const ACROSS_TERMS: usize = OLD_TERMS + 12 * CELL;

/** Rows and planes that go together at the low and the high end; see above. */
let lowY: i32 = 1;
let highY: i32 = 1;
let lowZ: i32 = 0;
let highZ: i32 = 1;
/** Twice the value that all fields start from. */
let twiceBias: Real = 0;

export function walls(linearFaces: i32, mirroredFaces: i32, table: usize, bias: f64): void {
  linear = linearFaces;
  mirrored = mirroredFaces;
  records = table;
  twiceBias = 2 * <Real>bias;
  sideways = 0;
  for (let face = 0; face < 6; face++) if (linear & (1 << face) && load<u32>(record(face), SIDES)) sideways |= 1 << face;
  lowY = max(1, reach(2));
  highY = max(1, reach(3));
  // Plane 0 is over when plane 1 is, where the end of a step is looked at.
  lowZ = max(reach(Z_LOW), i32(sideways != 0));
  highZ = max(1, reach(Z_HIGH));
}

@inline
function record(face: i32): usize {
  return records + <usize>face * FACE_BYTES;
}

/** How far inward a face reads. */
function reach(face: i32): i32 {
  if (mirrored & (1 << face)) return 2;
  return linear & (1 << face) ? load<i32>(record(face), REACH) : 0;
}

// --------------------------------------------------------------------------------------------- what must go together

/** A cut between rows, moved off those that go together in an update of e. */
@inline
export function electricCut(row: i32): i32 {
  return row <= lowY ? 0 : row > ny - highY ? ny : row;
}

/** The same for h, whose row is needed with the row of e above it. */
@inline
export function magneticCut(row: i32): i32 {
  return row < lowY ? 0 : row > ny - highY ? ny : row;
}

/** Whether the rows below a cut are all rows there are, because of those that go together. */
@inline
export function reachesHighWall(cut: i32): bool {
  return cut > ny - highY;
}

/** A cut between planes, for threads that share a step. */
export function planeCut(plane: i32): i32 {
  return plane <= lowZ ? 0 : plane > nz - highZ ? nz : plane;
}

/** Planes below this one wait for it in an update of e; those of h wait for the one before it. */
@inline
export function waiting(): i32 {
  return lowZ;
}

// ------------------------------------------------------------------------------------------------------ points of a wall

const NOTE = 0;
const CLOSE = 1;
const KEEP = 2;

/** Points of a line, and lines, of each component: the nodes of the lattice along and across. */
@inline
function linePoints(face: i32): usize {
  return <usize>(face < 2 ? ny + 1 : nx + 1);
}
@inline
function lineCount(face: i32): usize {
  return <usize>(face < 4 ? nz + 1 : ny + 1);
}

/** Bytes from the start of a wall's table to a point: component c, line q, point m. */
@inline
function pointAt(face: i32, c: i32, q: i32, m: i32): usize {
  return ((<usize>c * lineCount(face) + <usize>q) * linePoints(face) + <usize>m) * CELL;
}

/** All points of one layer, both components. */
@inline
function layerBytes(face: i32): usize {
  return 2 * lineCount(face) * linePoints(face) * CELL;
}

/** x and y faces, as far as they lie on rows [j0, j1) of plane k. */
function sideFaces(phase: i32, faces: i32, k: i32, j0: i32, j1: i32, n: i32): void {
  for (let high = 0; high < 2; high++) {
    if (!(faces & (1 << high))) continue;
    const wall = rowOffset(j0, k) + (high ? <usize>nx * CELL : 0);
    const inward = high ? <usize>0 - CELL : CELL;
    if (phase == KEEP) {
      line(phase, high, 0, EY + wall, inward, rowBytes, k, j0, j1, n);
      line(phase, high, 1, EZ + wall, inward, rowBytes, k, j0, j1 + i32(j1 == ny), n);
      continue;
    }
    // e_y of plane 0 is a rim of a z face, e_z of row 0 a rim of a y face.
    const skip = i32(j0 == 0);
    if (k > 0) line(phase, high, 0, EY + wall, inward, rowBytes, k, j0, j1, n);
    line(phase, high, 1, EZ + wall + <usize>skip * rowBytes, inward, rowBytes, k, j0 + skip, j1, n);
  }
  for (let high = 0; high < 2; high++) {
    if (!(faces & (4 << high)) || (high ? j1 != ny : j0 != 0)) continue;
    const wall = rowOffset(high ? ny : 0, k);
    const inward = high ? 0 - rowBytes : rowBytes;
    if (k > 0 || phase == KEEP) line(phase, 2 + high, 0, EX + wall, inward, CELL, k, 0, nx, n);
    line(phase, 2 + high, 1, EZ + wall, inward, CELL, k, 0, nx + 1, n);
  }
}

/** One of the z faces, on rows [j0, j1). */
function endFace(phase: i32, face: i32, j0: i32, j1: i32, n: i32): void {
  const plane = face == Z_HIGH ? nz : 0;
  const inward = face == Z_HIGH ? 0 - planeBytes : planeBytes;
  for (let j = j0; j < j1 + i32(j1 == ny); j++) {
    line(phase, face, 0, EX + rowOffset(j, plane), inward, CELL, j, 0, nx, n);
  }
  for (let j = j0; j < j1; j++) line(phase, face, 1, EY + rowOffset(j, plane), inward, CELL, j, 0, nx + 1, n);
}

/** Points [from, to) of a line, the first of them at p, `step` bytes apart. Component 0 lies along the line. */
function line(
  phase: i32, face: i32, c: i32, p: usize, inward: usize, step: usize, q: i32, from: i32, to: i32, n: i32,
): void {
  const wall = record(face);
  if (from >= to) return;
  if (phase == KEEP) return keep(wall, face, c, p, inward, step, q, from, to, n);
  if (!load<u32>(wall, SIDES)) return part(phase, wall, face, c, p, inward, step, q, from, to, n);
  // Points with a neighbour on all four sides, be it their own image; the others are rims.
  const along = face < 2 ? ny : nx;
  const across = face < 4 ? nz : ny;
  let first = 1, last = along - 1, firstLine = 1, lastLine = across - 1;
  if (c == 0) {
    first = 1 - load<i32>(wall, IMAGE_ALONG_LOW);
    last = along - 2 + load<i32>(wall, IMAGE_ALONG_HIGH);
  } else {
    firstLine = 1 - load<i32>(wall, IMAGE_ACROSS_LOW);
    lastLine = across - 2 + load<i32>(wall, IMAGE_ACROSS_HIGH);
  }
  const inner = q >= firstLine && q <= lastLine;
  const innerFrom = inner ? min(max(from, first), to) : to;
  const innerTo = inner ? max(min(to, last + 1), innerFrom) : to;
  const rim = wall + RIM_BYTES;
  part(phase, rim, face, c, p, inward, step, q, from, innerFrom, n);
  part(phase, wall, face, c, p + <usize>(innerFrom - from) * step, inward, step, q, innerFrom, innerTo, n);
  part(phase, rim, face, c, p + <usize>(innerTo - from) * step, inward, step, q, innerTo, to, n);
}

/** The same of points that share a record. */
function part(
  phase: i32, wall: usize, face: i32, c: i32, p: usize, inward: usize, step: usize, q: i32, from: i32, to: i32, n: i32,
): void {
  if (from >= to) return;
  const at = pointAt(face, c, q, from);
  const notes = <usize>load<u32>(wall, NOTES) + at;
  const count = to - from;
  if (phase == CLOSE) return close(wall, p, inward, step, count, notes);
  let older = <usize>load<u32>(wall, OLDER);
  if (older) older += at;
  let deep = p + 2 * inward;
  let deeper = inward;
  if (face == Z_HIGH && load<i32>(wall, REACH) > 1) {
    deeper = layerBytes(face);
    deep = <usize>load<u32>(wall, DEEP) + <usize>(3 * (n & 3)) * deeper + at;
  }
  note(wall, p, inward, deep, deeper, step, count, notes, older);
  if (load<u32>(wall, SIDES)) lookSideways(wall, face, c, q, from, to, n, notes);
}

/** The sums over older and old values of `count` points; e_2 lies at `deep`, e_3 and e_4 each `deeper` bytes on. */
function note(
  wall: usize, p: usize, inward: usize, deep: usize, deeper: usize, step: usize, count: i32, notes: usize, older: usize,
): void {
  const layers = load<i32>(wall, REACH);
  const a0 = load<Real>(wall, OLD_TERMS);
  const a1 = load<Real>(wall, OLD_TERMS + CELL);
  if (layers == 1 && !older) {
    // Mur's first order: the same sum without the questions.
    for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, p += step) {
      store<Real>(notes, <Real>0 + a1 * load<Real>(p + inward) + a0 * load<Real>(p));
    }
    return;
  }
  const a2 = load<Real>(wall, OLD_TERMS + 2 * CELL);
  const a3 = load<Real>(wall, OLD_TERMS + 3 * CELL);
  const a4 = load<Real>(wall, OLD_TERMS + 4 * CELL);
  const b0 = load<Real>(wall, OLDER_TERMS);
  const b1 = load<Real>(wall, OLDER_TERMS + CELL);
  const b2 = load<Real>(wall, OLDER_TERMS + 2 * CELL);
  const b3 = load<Real>(wall, OLDER_TERMS + 3 * CELL);
  const b4 = load<Real>(wall, OLDER_TERMS + 4 * CELL);
  let e2: Real = 0, e3: Real = 0, e4: Real = 0;
  for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, p += step) {
    const e0 = load<Real>(p);
    const e1 = load<Real>(p + inward);
    if (layers > 1) {
      e2 = load<Real>(deep);
      if (layers > 2) {
        e3 = load<Real>(deep + deeper);
        e4 = load<Real>(deep + 2 * deeper);
      }
      deep += step;
    }
    let sum: Real = 0;
    if (older) {
      sum = load<Real>(older);
      let next: Real = 0;
      if (layers > 2) next = next + b4 * e4 + b3 * e3;
      if (layers > 1) next = next + b2 * e2;
      store<Real>(older, next + b1 * e1 + b0 * e0);
      older += CELL;
    }
    if (layers > 2) sum = sum + a4 * e4 + a3 * e3;
    if (layers > 1) sum = sum + a2 * e2;
    store<Real>(notes, sum + a1 * e1 + a0 * e0);
  }
}

/** e_0 ← note + new values of e_2 and e_1. */
function close(wall: usize, p: usize, inward: usize, step: usize, count: i32, notes: usize): void {
  const newest = load<i32>(wall, NEWEST);
  const c1 = load<Real>(wall, NOW_TERMS);
  const c2 = load<Real>(wall, NOW_TERMS + CELL);
  if (newest == 1) {
    for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, p += step) {
      store<Real>(p, load<Real>(notes) + c1 * load<Real>(p + inward));
    }
    return;
  }
  for (const end = notes + <usize>count * CELL; notes < end; notes += CELL, p += step) {
    let sum = load<Real>(notes);
    if (newest > 1) sum = sum + c2 * load<Real>(p + 2 * inward) + c1 * load<Real>(p + inward);
    store<Real>(p, sum);
  }
}

/** Adds what the neighbours along the wall contribute to notes of points [from, to) of a line. */
function lookSideways(wall: usize, face: i32, c: i32, q: i32, from: i32, to: i32, n: i32, notes: usize): void {
  const along = load<Real>(wall, ACROSS_TERMS);
  const across = load<Real>(wall, ACROSS_TERMS + CELL);
  const kept = <usize>load<u32>(wall, SIDES) + <usize>(2 * (n & 1)) * layerBytes(face);
  const lastPoint = (face < 2 ? ny : nx) - i32(c == 0);
  const lastLine = (face < 4 ? nz : ny) - i32(c == 1);
  for (let l = 1; l >= 0; l--) {
    const layer = kept + <usize>l * layerBytes(face);
    const here = layer + pointAt(face, c, q, 0);
    const below = layer + pointAt(face, c, max(q - 1, 0), 0);
    const above = layer + pointAt(face, c, min(q + 1, lastLine), 0);
    for (let m = from; m < to; m++) {
      const down = load<Real>(here + <usize>max(m - 1, 0) * CELL);
      const up = load<Real>(here + <usize>min(m + 1, lastPoint) * CELL);
      const at = <usize>m * CELL;
      const note = notes + <usize>(m - from) * CELL;
      const sum = load<Real>(note) + along * (down + up);
      store<Real>(note, sum + across * (load<Real>(below + at) + load<Real>(above + at)));
    }
  }
}

/** Keeps e_0 and e_1 of points [from, to) as they are after step n. */
function keep(
  wall: usize, face: i32, c: i32, p: usize, inward: usize, step: usize, q: i32, from: i32, to: i32, n: i32,
): void {
  const at = <usize>load<u32>(wall, SIDES) + <usize>(2 * ((n + 1) & 1)) * layerBytes(face) + pointAt(face, c, q, from);
  for (let l = 0; l < 2; l++) {
    let point = p + <usize>l * inward;
    let into = at + <usize>l * layerBytes(face);
    for (const end = into + <usize>(to - from) * CELL; into < end; into += CELL, point += step) {
      store<Real>(into, load<Real>(point));
    }
  }
}

/** Copies rows [j0, j1) of plane k aside where a high z face will read it as e_2, e_3 or e_4 of step n. */
function keepDeep(k: i32, j0: i32, j1: i32, n: i32): void {
  const wall = record(Z_HIGH);
  const l = nz - k;
  if (l < 2 || l > load<i32>(wall, REACH)) return;
  const layer = <usize>load<u32>(wall, DEEP) + <usize>(3 * (n & 3) + l - 2) * layerBytes(Z_HIGH);
  for (let j = j0; j < j1 + i32(j1 == ny); j++) {
    memory.copy(layer + pointAt(Z_HIGH, 0, j, 0), EX + rowOffset(j, k), <usize>nx * CELL);
  }
  for (let j = j0; j < j1; j++) {
    memory.copy(layer + pointAt(Z_HIGH, 1, j, 0), EY + rowOffset(j, k), <usize>(nx + 1) * CELL);
  }
}

// ------------------------------------------------------------------------------------------------- when it is done

/** Before planes [first, k] of e, rows [j0, j1), take step n: all that go together are still as they were. */
@inline
export function noteTogether(k: i32, j0: i32, j1: i32, n: i32): void {
  if (linear & (1 << Z_LOW) && k == lowZ) endFace(NOTE, Z_LOW, j0, j1, n);
}

/** Before plane k of e does. */
@inline
export function notePlane(k: i32, j0: i32, j1: i32, n: i32): void {
  if (!linear) return;
  sideFaces(NOTE, linear, k, j0, j1, n);
  if (linear & (1 << Z_HIGH)) {
    if (k == nz - 1) endFace(NOTE, Z_HIGH, j0, j1, n);
    else keepDeep(k, j0, j1, n);
  }
}

/** After it has, sources included. */
@inline
export function closePlane(k: i32, j0: i32, j1: i32, n: i32): void {
  if (linear) sideFaces(CLOSE, linear, k, j0, j1, n);
}

/** After planes [first, k] of e have. */
@inline
export function closeTogether(first: i32, k: i32, j0: i32, j1: i32, n: i32): void {
  if (!linear) return;
  if (linear & (1 << Z_LOW) && k == lowZ) endFace(CLOSE, Z_LOW, j0, j1, n);
  if (linear & (1 << Z_HIGH) && k == nz - 1) endFace(CLOSE, Z_HIGH, j0, j1, n);
  if (sideways) keepSides(first, k, j0, j1, n);
}

function keepSides(first: i32, k: i32, j0: i32, j1: i32, n: i32): void {
  const last = k == nz - 1 ? nz : k;
  for (let plane = first; plane <= last; plane++) sideFaces(KEEP, sideways, plane, j0, j1, n);
  if (sideways & (1 << Z_LOW) && k == lowZ) endFace(KEEP, Z_LOW, j0, j1, n);
  if (sideways & (1 << Z_HIGH) && k == nz - 1) endFace(KEEP, Z_HIGH, j0, j1, n);
}

// ------------------------------------------------------------------------------------------------------------- mirrors

/**
 * After rows [j0, j1) of planes [first, k] of h have changed: h half a cell before the outermost node becomes minus h half
 * a cell behind the node beside it, so that tangential h vanishes on that node.
 */
@inline
export function mirror(first: i32, k: i32, j0: i32, j1: i32): void {
  if (mirrored) mirrorFaces(first, k, j0, j1);
}

function mirrorFaces(first: i32, k: i32, j0: i32, j1: i32): void {
  const lastCell = <usize>(nx - 1) * CELL;
  for (let plane = first; plane <= k; plane++) {
    const row = rowOffset(j0, plane);
    if (mirrored & 1) mirrorLine(HY + row, HZ + row, CELL, rowBytes, j1 - j0);
    if (mirrored & 2) mirrorLine(HY + row + lastCell, HZ + row + lastCell, 0 - CELL, rowBytes, j1 - j0);
    const top = rowOffset(ny - 1, plane);
    if (mirrored & 4 && j0 == 0) mirrorLine(HZ + row, HX + row, rowBytes, CELL, nx);
    if (mirrored & 8 && j1 == ny) mirrorLine(HZ + top, HX + top, 0 - rowBytes, CELL, nx);
  }
  for (let j = j0; j < j1; j++) {
    const bottom = rowOffset(j, 0);
    const top = rowOffset(j, nz - 1);
    if (mirrored & (1 << Z_LOW) && first == 0) mirrorLine(HX + bottom, HY + bottom, planeBytes, CELL, nx);
    if (mirrored & (1 << Z_HIGH) && k == nz - 1) mirrorLine(HX + top, HY + top, 0 - planeBytes, CELL, nx);
  }
}

function mirrorLine(p: usize, q: usize, inward: usize, step: usize, count: i32): void {
  for (let n = 0; n < count; n++, p += step, q += step) {
    store<Real>(p, twiceBias - load<Real>(p + inward));
    store<Real>(q, twiceBias - load<Real>(q + inward));
  }
}
