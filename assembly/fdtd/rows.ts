/**
 * The stencil: Yee's update of whole rows, with stretched coordinates where an absorbing layer asks for them.
 *
 * With e_a = E_a·d_a and h_a = η·H_a·d_a (volts), Ampère's and Faraday's laws are one and the same update (Yee 1966):
 *   e_x ← e_x + c_x [(h_z − h_z(j−1)) − (h_y − h_y(k−1))]
 *   h_x ← h_x + c_x [(e_z − e_z(j+1)) − (e_y − e_y(k+1))]         c_x = vΔt·dx/(dy·dz), and cyclic,
 * so one function serves both. Below, a are the fields that change and b those that drive them, and a difference is
 * always `own − neighbour`, the neighbour one cell back for e and one cell ahead for h.
 *
 * In an absorbing layer each difference Δ is replaced by Δ/κ + ψ, with ψ ← bψ + aΔ (Roden & Gedney 2000).
 */
import { CELL, EX, EY, EZ, HX, HY, HZ, VECTOR, ny, nz, planeBytes, rowBytes, rowOffset } from './memory';

/** Compile-time switches: type arguments that `isFloat` tells apart, so that a branch not taken is never compiled. */
export type On = f32;
export type Off = i32;
/** Which fields change. */
export type Electric = f32;
export type Magnetic = i32;

/** Which of a pair of memory variables: `offsetof` of a type may be an immediate of a load, a parameter may not. */
class First {}
class Second {
  low: u64;
  high: u64;
}

/**
 * Ends of a row: vectors [0, windowLow) and from windowHigh on. Each has WINDOW_BYTES in a table: 1 for lanes whose y
 * and z components lie inside the lattice and 0 for the others, then b, a and 1/κ of the stretch along x. (The x
 * component of a lane beyond the wall may change: nothing inside reads it.)
 */
const WINDOW_BYTES: usize = 4 * VECTOR;
let windowLow: i32 = 0;
let windowHigh: i32 = 0;
let windowsElectric: usize = 0;
let windowsMagnetic: usize = 0;

export function windows(low: i32, high: i32, tableElectric: usize, tableMagnetic: usize): void {
  windowLow = low;
  windowHigh = high;
  windowsElectric = tableElectric;
  windowsMagnetic = tableMagnetic;
}

/** Memory variables: two components a vector, interleaved, so that one pointer serves both. */
const PAIR: usize = 2 * VECTOR;
/** b, a, 1/κ and a spare for each layer across y or z, the low face's layers first. */
const PROFILE_BYTES: usize = 4 * CELL;

/** Bytes of ψ of the windows of one row; 0 where no x face absorbs. */
let memoryRowX: usize = 0;
let memoryElectricX: usize = 0;
let memoryMagneticX: usize = 0;

/** Where x faces absorb: bytes of ψ a row, and ψ of the electric and of the magnetic update by row (j + ny·k). */
export function layersX(rowMemory: usize, memoryElectric: usize, memoryMagnetic: usize): void {
  memoryRowX = rowMemory;
  memoryElectricX = memoryElectric;
  memoryMagneticX = memoryMagnetic;
}

let lowY: i32 = 0;
let highY: i32 = 0;
let profileElectricY: usize = 0;
let profileMagneticY: usize = 0;
let memoryElectricY: usize = 0;
let memoryMagneticY: usize = 0;

/** Layers at the y faces; ψ by row: layer + (low + high)·k. */
export function layersY(
  low: i32, high: i32, profileElectric: usize, profileMagnetic: usize, memoryElectric: usize, memoryMagnetic: usize,
): void {
  lowY = low;
  highY = high;
  profileElectricY = profileElectric;
  profileMagneticY = profileMagnetic;
  memoryElectricY = memoryElectric;
  memoryMagneticY = memoryMagnetic;
}

let lowZ: i32 = 0;
let highZ: i32 = 0;
let profileElectricZ: usize = 0;
let profileMagneticZ: usize = 0;
let memoryElectricZ: usize = 0;
let memoryMagneticZ: usize = 0;

/** Layers at the z faces; ψ by row: j + ny·layer. */
export function layersZ(
  low: i32, high: i32, profileElectric: usize, profileMagnetic: usize, memoryElectric: usize, memoryMagnetic: usize,
): void {
  lowZ = low;
  highZ = high;
  profileElectricZ = profileElectric;
  profileMagneticZ = profileMagnetic;
  memoryElectricZ = memoryElectric;
  memoryMagneticZ = memoryMagnetic;
}

/** Δ → Δ/κ + ψ with ψ ← bψ + aΔ; ψ is member C of the pair at q. */
@inline
function stretched<C>(difference: v128, q: usize, b: v128, a: v128, inverseKappa: v128): v128 {
  const psi = v128.add<Real>(
    v128.mul<Real>(b, v128.load(q, offsetof<C>())),
    v128.mul<Real>(a, difference),
  );
  v128.store(q, psi, offsetof<C>());
  return v128.add<Real>(v128.mul<Real>(difference, inverseKappa), psi);
}

/** a + c (first − second); in the FUSED build product and sum share one rounding where the processor can. */
@inline
function accumulated(a: v128, c: v128, first: v128, second: v128): v128 {
  if (FUSED) return v128.relaxed_madd<Real>(c, v128.sub<Real>(first, second), a);
  return v128.add<Real>(a, v128.mul<Real>(c, v128.sub<Real>(first, second)));
}

/**
 * One vector of all three components at p, its neighbours across rows and planes at py and pz. F: which fields change;
 * W: the vector lies in a window, whose entry is at w; X, Y, Z: the coordinate is stretched, with ψ at qx, qy, qz. The
 * three components are done one after the other, each stored before the next is begun: measured 8 % faster than
 * taking all differences first.
 */
@inline
function advance<F, W, X, Y, Z>(
  p: usize, py: usize, pz: usize, cx: v128, cy: v128, cz: v128, w: usize,
  qx: usize, qy: usize, bY: v128, aY: v128, iY: v128, qz: usize, bZ: v128, aZ: v128, iZ: v128,
): void {
  const bx = v128.load(p, isFloat<F>() ? HX : EX);
  const by = v128.load(p, isFloat<F>() ? HY : EY);
  const bz = v128.load(p, isFloat<F>() ? HZ : EZ);
  let bX = cx, aX = cx, iX = cx;
  if (isFloat<X>()) {
    bX = v128.load(w, VECTOR);
    aX = v128.load(w, 2 * VECTOR);
    iX = v128.load(w, 3 * VECTOR);
  }
  if (isFloat<W>()) {
    const inside = v128.load(w);
    cy = v128.mul<Real>(cy, inside);
    cz = v128.mul<Real>(cz, inside);
  }

  let dyBz = v128.sub<Real>(bz, v128.load(py, isFloat<F>() ? HZ : EZ));
  let dzBy = v128.sub<Real>(by, v128.load(pz, isFloat<F>() ? HY : EY));
  if (isFloat<Y>()) dyBz = stretched<First>(dyBz, qy, bY, aY, iY);
  if (isFloat<Z>()) dzBy = stretched<First>(dzBy, qz, bZ, aZ, iZ);
  const ax = v128.load(p, isFloat<F>() ? EX : HX);
  v128.store(p, accumulated(ax, cx, dyBz, dzBy), isFloat<F>() ? EX : HX);

  let dzBx = v128.sub<Real>(bx, v128.load(pz, isFloat<F>() ? HX : EX));
  let dxBz = v128.sub<Real>(bz, v128.load(p, isFloat<F>() ? HZ - CELL : EZ + CELL));
  if (isFloat<Z>()) dzBx = stretched<Second>(dzBx, qz, bZ, aZ, iZ);
  if (isFloat<X>()) dxBz = stretched<First>(dxBz, qx, bX, aX, iX);
  const ay = v128.load(p, isFloat<F>() ? EY : HY);
  v128.store(p, accumulated(ay, cy, dzBx, dxBz), isFloat<F>() ? EY : HY);

  let dxBy = v128.sub<Real>(by, v128.load(p, isFloat<F>() ? HY - CELL : EY + CELL));
  let dyBx = v128.sub<Real>(bx, v128.load(py, isFloat<F>() ? HX : EX));
  if (isFloat<X>()) dxBy = stretched<Second>(dxBy, qx, bX, aX, iX);
  if (isFloat<Y>()) dyBx = stretched<Second>(dyBx, qy, bY, aY, iY);
  const az = v128.load(p, isFloat<F>() ? EZ : HZ);
  v128.store(p, accumulated(az, cz, dxBy, dyBx), isFloat<F>() ? EZ : HZ);
}

/** `bytes` of a row from p on, all with the same switches; nothing when there are none. */
@inline
function span<F, W, X, Y, Z>(
  p: usize, bytes: i32, cx: v128, cy: v128, cz: v128, w: usize,
  qx: usize, qy: usize, bY: v128, aY: v128, iY: v128, qz: usize, bZ: v128, aZ: v128, iZ: v128,
): void {
  const toY = isFloat<F>() ? <usize>0 - rowBytes : rowBytes;
  const toZ = isFloat<F>() ? <usize>0 - planeBytes : planeBytes;
  for (const end = p + <usize>max(bytes, 0); p < end; p += VECTOR) {
    advance<F, W, X, Y, Z>(p, p + toY, p + toZ, cx, cy, cz, w, qx, qy, bY, aY, iY, qz, bZ, aZ, iZ);
    if (isFloat<W>()) w += WINDOW_BYTES;
    if (isFloat<X>()) qx += PAIR;
    if (isFloat<Y>()) qy += PAIR;
    if (isFloat<Z>()) qz += PAIR;
  }
}

/** Vectors [x0, x1) of rows [j0, j1) of plane k, all with the same switches. */
function rows<F, X, Y, Z>(k: i32, j0: i32, j1: i32, x0: i32, x1: i32, cellX: Real, cellY: Real, cellZ: Real): void {
  const cx = v128.splat<Real>(cellX);
  const cy = v128.splat<Real>(cellY);
  const cz = v128.splat<Real>(cellZ);

  // Where low window, middle and high window of these vectors start, and their bytes (none where not positive).
  const fromMiddle = max(x0, windowLow);
  const fromHigh = max(x0, windowHigh);
  const low = (min(x1, windowLow) - x0) << 4;
  const middle = (min(x1, windowHigh) - fromMiddle) << 4;
  const high = (x1 - fromHigh) << 4;
  // Entries of the high window follow those of the low one.
  const entryHigh = fromHigh - windowHigh + windowLow;
  const entries = isFloat<F>() ? windowsElectric : windowsMagnetic;

  let memoryX: usize = 0, memoryY: usize = 0, memoryZ: usize = 0, profileY: usize = 0;
  let bY = cx, aY = cx, iY = cx, bZ = cx, aZ = cx, iZ = cx;
  const memoryRow = (rowBytes - VECTOR) << 1;
  if (isFloat<X>()) {
    memoryX = isFloat<F>() ? memoryElectricX : memoryMagneticX;
    memoryX += <usize>(k * ny + j0) * memoryRowX;
  }
  if (isFloat<Y>()) {
    const layer = j0 < lowY ? j0 : j0 - ny + lowY + highY;
    profileY = (isFloat<F>() ? profileElectricY : profileMagneticY) + <usize>layer * PROFILE_BYTES;
    memoryY = isFloat<F>() ? memoryElectricY : memoryMagneticY;
    memoryY += <usize>(k * (lowY + highY) + layer) * memoryRow;
  }
  if (isFloat<Z>()) {
    const layer = k < lowZ ? k : k - nz + lowZ + highZ;
    const profile = (isFloat<F>() ? profileElectricZ : profileMagneticZ) + <usize>layer * PROFILE_BYTES;
    bZ = v128.load_splat<Real>(profile);
    aZ = v128.load_splat<Real>(profile, CELL);
    iZ = v128.load_splat<Real>(profile, 2 * CELL);
    memoryZ = isFloat<F>() ? memoryElectricZ : memoryMagneticZ;
    memoryZ += <usize>(layer * ny + j0) * memoryRow;
  }

  let row = rowOffset(j0, k);
  for (let j = j0; j < j1; j++) {
    if (isFloat<Y>()) {
      bY = v128.load_splat<Real>(profileY);
      aY = v128.load_splat<Real>(profileY, CELL);
      iY = v128.load_splat<Real>(profileY, 2 * CELL);
    }
    let v = <usize>x0;
    span<F, On, X, Y, Z>(
      row + (v << 4), low, cx, cy, cz, entries + v * WINDOW_BYTES,
      memoryX + (v << 5), memoryY + (v << 5), bY, aY, iY, memoryZ + (v << 5), bZ, aZ, iZ,
    );
    v = <usize>fromMiddle;
    span<F, Off, Off, Y, Z>(
      row + (v << 4), middle, cx, cy, cz, 0,
      0, memoryY + (v << 5), bY, aY, iY, memoryZ + (v << 5), bZ, aZ, iZ,
    );
    v = <usize>fromHigh;
    span<F, On, X, Y, Z>(
      row + (v << 4), high, cx, cy, cz, entries + <usize>entryHigh * WINDOW_BYTES,
      memoryX + (<usize>entryHigh << 5), memoryY + (v << 5), bY, aY, iY, memoryZ + (v << 5), bZ, aZ, iZ,
    );
    row += rowBytes;
    if (isFloat<X>()) memoryX += memoryRowX;
    if (isFloat<Y>()) {
      profileY += PROFILE_BYTES;
      memoryY += memoryRow;
    }
    if (isFloat<Z>()) memoryZ += memoryRow;
  }
}

/** Rows [j0, j1) split where the layers of the y faces end. */
function bands<F, X, Z>(k: i32, j0: i32, j1: i32, x0: i32, x1: i32, cx: Real, cy: Real, cz: Real): void {
  const innerFrom = max(j0, lowY);
  const innerTo = min(j1, ny - highY);
  if (j0 < lowY) rows<F, X, On, Z>(k, j0, min(j1, lowY), x0, x1, cx, cy, cz);
  if (innerFrom < innerTo) rows<F, X, Off, Z>(k, innerFrom, innerTo, x0, x1, cx, cy, cz);
  if (j1 > ny - highY) rows<F, X, On, Z>(k, max(j0, ny - highY), j1, x0, x1, cx, cy, cz);
}

/**
 * Updates vectors [x0, x1) of rows [j0, j1), j0 < j1, of plane k, with coefficients c_x, c_y, c_z (0 for a component
 * that a wall holds).
 */
@inline
export function update<F>(k: i32, j0: i32, j1: i32, x0: i32, x1: i32, cx: Real, cy: Real, cz: Real): void {
  const layered = k < lowZ || k >= nz - highZ;
  if (memoryRowX) {
    if (layered) bands<F, On, On>(k, j0, j1, x0, x1, cx, cy, cz);
    else bands<F, On, Off>(k, j0, j1, x0, x1, cx, cy, cz);
  } else {
    if (layered) bands<F, Off, On>(k, j0, j1, x0, x1, cx, cy, cz);
    else bands<F, Off, Off>(k, j0, j1, x0, x1, cx, cy, cz);
  }
}
