/**
 * A part of a filament at one observer and instant: integrands of E, B, φ and A at Kronrod's 15 nodes, two at a time, with
 * their sum, what they hold of high degrees (the quadrature's error) and what they are rounded to.
 *
 * Nodes lie in 16 places, each with its mirror image eight places on: 0 … 7 from the lower end to the middle, 8 … 15 from
 * the upper end to the middle, which is there twice with half its weight. Even and odd parts of an integrand are then sums
 * and differences of whole vectors. `panel` is where the host keeps it all:
 *
 *   tables    16 nodes, 16 weights, and 8 × 8 numbers that pick degrees 7 … 14 out of odd and even parts in turn
 *   geometry  16 of each: arc length, R, 1/R; on a line R·ŝ, else R and ŝ; amplitude of the current and its gradient
 *   waves     16 of each: source time of the term at hand; Σ of q, w, w′ over terms, and what the source time's rounding
 *             does to q and w
 *   samples   16 of each of ten components, without 1/(4πε) and μ/(4π)
 *
 * On a straight line R = P + (R·ŝ) ŝ with one P for all nodes, E lies along P and ŝ, B along ŝ×P and A along ŝ: five
 * components are all there is, E_P and B in units of P. On other curves there are ten.
 *
 *   4πε E = (λ/R³ + λ̇/(vR²)) R − ŝ İ/(v²R),   4π/μ B = (I/R³ + İ/(vR²)) ŝ×R,   4πε φ = λ/R,   4π/μ A = ŝ I/R
 *   I = a w,   λ = a p w − a′ q         (as in src/retarded/elements.ts)
 */

const NODES: usize = 0;
const WEIGHTS: usize = 0x80;
const DEGREES: usize = 0x100;
const ARC: usize = 0x300;
const DISTANCE: usize = 0x380;
const INVERSE: usize = 0x400;
/** On a line R·ŝ, else the first of R's components; the others follow, and then those of ŝ. */
const X: usize = 0x480;
const Y: usize = 0x500;
const Z: usize = 0x580;
const SX: usize = 0x600;
const SY: usize = 0x680;
const SZ: usize = 0x700;
const AMPLITUDE: usize = 0x780;
const GRADIENT: usize = 0x800;
const INSTANT: usize = 0x880;
const CHARGE: usize = 0x900;
const CURRENT: usize = 0x980;
const SLOPE: usize = 0xa00;
const CHARGE_MOVED: usize = 0xa80;
const CURRENT_MOVED: usize = 0xb00;
const SAMPLES: usize = 0xb80;
/** Of E, B, φ and A: Σ weight·rounding, apart from that of the formulas. */
const NOISE: usize = 0x1080;
/** Σ weight·sample by component. */
const SUMS: usize = 0x10a0;
/**
 * Of E, B, φ and A: Σ weight·|sample|, with the sum of components for the size of a vector and terms of different slowness
 * taken one by one; and eight squares, of degrees 7 … 14.
 */
const SIZES: usize = 0x1100;
const SQUARES: usize = 0x1120;
/** The earliest and the latest source time. */
const LOWEST: usize = 0x1220;
const HIGHEST: usize = 0x1228;

/** Bytes of 16 numbers. */
const ROW: usize = 0x80;

let panel: usize = 0;
/** 1/v */
let perSpeed: f64 = 0;

export function setPanel(address: usize, slownessOfLight: f64): void {
  panel = address;
  perSpeed = slownessOfLight;
}

@inline
function sumOf(v: v128): f64 {
  return f64x2.extract_lane(v, 0) + f64x2.extract_lane(v, 1);
}

/** Two sums over lanes, one in each lane. */
@inline
function sumsOf(a: v128, b: v128): v128 {
  return f64x2.add(v128.shuffle<f64>(a, b, 0, 2), v128.shuffle<f64>(a, b, 1, 3));
}

/** What was there before is kept, or nothing. */
@inline
function kept(before: v128, keep: v128): v128 {
  return v128.and(before, keep);
}

@inline
function maskOf(fresh: bool): v128 {
  return i64x2.splat(fresh ? 0 : -1);
}

/**
 * Nodes of a stretch of a straight line, and source times of a first term.
 * @param foot arc length of the foot of the observer's perpendicular
 * @param rho2 squared length of the perpendicular
 */
export function lookAlong(foot: f64, rho2: f64, middle: f64, half: f64, late: f64, slowness: f64): void {
  const centre = f64x2.splat(middle);
  const scale = f64x2.splat(half);
  const base = f64x2.splat(foot);
  const square = f64x2.splat(rho2);
  const one = f64x2.splat(1);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const s = f64x2.add(centre, f64x2.mul(scale, v128.load(at, NODES)));
    const along = f64x2.sub(base, s);
    const r = f64x2.sqrt(f64x2.add(square, f64x2.mul(along, along)));
    v128.store(at, s, ARC);
    v128.store(at, along, X);
    v128.store(at, r, DISTANCE);
    v128.store(at, f64x2.div(one, r), INVERSE);
  }
  lookBack(late, slowness);
}

/** Source times t − delay − p s − R/v of all nodes. @param late t − delay */
export function lookBack(late: f64, slowness: f64): void {
  const start = f64x2.splat(late);
  const p = f64x2.splat(slowness);
  const v1 = f64x2.splat(perSpeed);
  let lowest = f64x2.splat(Infinity);
  let highest = f64x2.splat(-Infinity);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const launched = f64x2.sub(start, f64x2.mul(p, v128.load(at, ARC)));
    const u = f64x2.sub(launched, f64x2.mul(v128.load(at, DISTANCE), v1));
    v128.store(at, u, INSTANT);
    lowest = f64x2.pmin(lowest, u);
    highest = f64x2.pmax(highest, u);
  }
  store<f64>(panel, Math.min(f64x2.extract_lane(lowest, 0), f64x2.extract_lane(lowest, 1)), LOWEST);
  store<f64>(panel, Math.max(f64x2.extract_lane(highest, 0), f64x2.extract_lane(highest, 1)), HIGHEST);
}

/**
 * Adds factor·wave to a sum of waves, and |wave|·shift to what the rounding of u does to the integral of that wave.
 * @param begun all bits where the waveform has begun, else none
 * @param moved 0 for the charge, whose integral nothing asks for
 */
@inline
function addWave(
  at: usize,
  wave: v128,
  begun: v128,
  factor: v128,
  shift: v128,
  fresh: bool,
  into: usize,
  moved: usize,
): void {
  const felt = v128.and(wave, begun);
  const added = f64x2.mul(factor, felt);
  const place = at + into;
  v128.store(place, fresh ? added : f64x2.add(v128.load(place), added));
  if (moved == 0) return;
  const shaken = f64x2.mul(shift, f64x2.abs(felt));
  const rounded = at + moved;
  v128.store(rounded, fresh ? shaken : f64x2.add(v128.load(rounded), shaken));
}

/**
 * Adds a term at the source times of the nodes to the sums of waves. A window (src/retarded/windows.ts) is: middle, 1/half
 * width, degree as i32, and from byte 32 on the coefficients of w, w′ and q in x = (u − middle)/half, of falling powers,
 * three by three.
 * @param shift |factor| times what u is rounded to, s
 * @param charged whether q is asked for
 * @param fresh whether the sums begin with this term
 */
export function addTerm(window: usize, factor: f64, shift: f64, charged: bool, fresh: bool): void {
  if (fresh) addTermTo(window, factor, shift, charged, true);
  else addTermTo(window, factor, shift, charged, false);
}

@inline
function addTermTo(window: usize, factor: f64, shift: f64, charged: bool, fresh: bool): void {
  const middle = f64x2.splat(load<f64>(window));
  const perHalf = f64x2.splat(load<f64>(window, 8));
  const first = window + 32;
  const end = first + <usize>load<i32>(window, 16) * 24;
  const gain = f64x2.splat(factor);
  const shaken = f64x2.splat(shift);
  const zero = f64x2.splat(0);
  for (let at = panel, last = at + ROW; at < last; at += 64) {
    const u0 = v128.load(at, INSTANT);
    const begun0 = f64x2.ge(u0, zero);
    const x0 = f64x2.mul(f64x2.sub(u0, middle), perHalf);
    const u1 = v128.load(at, INSTANT + 16);
    const begun1 = f64x2.ge(u1, zero);
    const x1 = f64x2.mul(f64x2.sub(u1, middle), perHalf);
    const u2 = v128.load(at, INSTANT + 32);
    const begun2 = f64x2.ge(u2, zero);
    const x2 = f64x2.mul(f64x2.sub(u2, middle), perHalf);
    const u3 = v128.load(at, INSTANT + 48);
    const begun3 = f64x2.ge(u3, zero);
    const x3 = f64x2.mul(f64x2.sub(u3, middle), perHalf);
    let w0 = v128.load_splat<f64>(first);
    let w1 = w0;
    let w2 = w0;
    let w3 = w0;
    let d0 = v128.load_splat<f64>(first, 8);
    let d1 = d0;
    let d2 = d0;
    let d3 = d0;
    for (let next = first; next < end; ) {
      next += 24;
      const c = v128.load_splat<f64>(next);
      w0 = f64x2.add(f64x2.mul(w0, x0), c);
      w1 = f64x2.add(f64x2.mul(w1, x1), c);
      w2 = f64x2.add(f64x2.mul(w2, x2), c);
      w3 = f64x2.add(f64x2.mul(w3, x3), c);
      const e = v128.load_splat<f64>(next, 8);
      d0 = f64x2.add(f64x2.mul(d0, x0), e);
      d1 = f64x2.add(f64x2.mul(d1, x1), e);
      d2 = f64x2.add(f64x2.mul(d2, x2), e);
      d3 = f64x2.add(f64x2.mul(d3, x3), e);
    }
    addWave(at, w0, begun0, gain, shaken, fresh, CURRENT, CHARGE_MOVED);
    addWave(at + 16, w1, begun1, gain, shaken, fresh, CURRENT, CHARGE_MOVED);
    addWave(at + 32, w2, begun2, gain, shaken, fresh, CURRENT, CHARGE_MOVED);
    addWave(at + 48, w3, begun3, gain, shaken, fresh, CURRENT, CHARGE_MOVED);
    addWave(at, d0, begun0, gain, shaken, fresh, SLOPE, CURRENT_MOVED);
    addWave(at + 16, d1, begun1, gain, shaken, fresh, SLOPE, CURRENT_MOVED);
    addWave(at + 32, d2, begun2, gain, shaken, fresh, SLOPE, CURRENT_MOVED);
    addWave(at + 48, d3, begun3, gain, shaken, fresh, SLOPE, CURRENT_MOVED);
    if (!charged) continue;
    let q0 = v128.load_splat<f64>(first, 16);
    let q1 = q0;
    let q2 = q0;
    let q3 = q0;
    for (let next = first; next < end; ) {
      next += 24;
      const c = v128.load_splat<f64>(next, 16);
      q0 = f64x2.add(f64x2.mul(q0, x0), c);
      q1 = f64x2.add(f64x2.mul(q1, x1), c);
      q2 = f64x2.add(f64x2.mul(q2, x2), c);
      q3 = f64x2.add(f64x2.mul(q3, x3), c);
    }
    addWave(at, q0, begun0, gain, shaken, fresh, CHARGE, 0);
    addWave(at + 16, q1, begun1, gain, shaken, fresh, CHARGE, 0);
    addWave(at + 32, q2, begun2, gain, shaken, fresh, CHARGE, 0);
    addWave(at + 48, q3, begun3, gain, shaken, fresh, CHARGE, 0);
  }
}

@inline
function addSample(at: usize, component: usize, sample: v128, keep: v128): void {
  const place = at + component * ROW;
  v128.store(place, f64x2.add(kept(v128.load(place, SAMPLES), keep), sample), SAMPLES);
}

/** Adds sums over lanes to those of two quantities, from `group` on. */
@inline
function addPair(place: usize, group: usize, first: v128, second: v128, keep: v128): void {
  const at = panel + place + (group << 3);
  v128.store(at, f64x2.add(kept(v128.load(at), keep), sumsOf(first, second)));
}

/**
 * E and B of the sums of waves, which are of terms with one slowness and one amplitude along the wire.
 * @param straight the part is one of a line: components 0 E_P, 1 E_s, 2 B; else 0 … 2 E, 3 … 5 B
 * @param shaped the amplitude is not 1 throughout
 * @param rho length of P, m
 */
@inline
function addFieldsOf(
  straight: bool,
  shaped: bool,
  slowness: f64,
  rho: f64,
  fresh: bool,
  noiseOfCharge: f64,
  noiseOfCurrent: f64,
  noiseOfSlope: f64,
): void {
  const v1 = f64x2.splat(perSpeed);
  const v2 = f64x2.splat(perSpeed * perSpeed);
  const p = f64x2.splat(slowness);
  const sizeOfP = f64x2.splat(Math.abs(slowness));
  const width = f64x2.splat(rho);
  const noiseQ = f64x2.splat(noiseOfCharge);
  const noiseW = f64x2.splat(noiseOfCurrent);
  const noiseD = f64x2.splat(noiseOfSlope);
  const keep = maskOf(fresh);
  let noiseE = f64x2.splat(0);
  let noiseB = noiseE;
  let sizeE = noiseE;
  let sizeB = noiseE;
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const inverse = v128.load(at, INVERSE);
    const r = v128.load(at, DISTANCE);
    const w = v128.load(at, CURRENT);
    const d = v128.load(at, SLOPE);
    const inverse2 = f64x2.mul(inverse, inverse);
    let near = f64x2.mul(inverse2, inverse);
    let far = f64x2.mul(inverse2, v1);
    let induced = f64x2.mul(inverse, v2);
    let radial: v128;
    let magnetic: v128;
    let rounded = f64x2.add(noiseW, v128.load(at, CURRENT_MOVED));
    let electric: v128;
    if (shaped) {
      const a = v128.load(at, AMPLITUDE);
      const gradient = v128.load(at, GRADIENT);
      const stays = f64x2.abs(gradient);
      const nearCharge = f64x2.mul(f64x2.mul(stays, inverse2), f64x2.add(noiseQ, v128.load(at, CHARGE_MOVED)));
      electric = f64x2.add(nearCharge, f64x2.mul(f64x2.mul(f64x2.mul(stays, far), r), rounded));
      const left = f64x2.add(f64x2.mul(v128.load(at, CHARGE), near), f64x2.mul(w, far));
      near = f64x2.mul(a, near);
      far = f64x2.mul(a, far);
      induced = f64x2.mul(a, induced);
      magnetic = f64x2.add(f64x2.mul(w, near), f64x2.mul(d, far));
      radial = f64x2.sub(f64x2.mul(p, magnetic), f64x2.mul(gradient, left));
      near = f64x2.abs(near);
    } else {
      electric = f64x2.splat(0);
      magnetic = f64x2.add(f64x2.mul(w, near), f64x2.mul(d, far));
      radial = f64x2.mul(p, magnetic);
    }
    const carried = f64x2.mul(p, far);
    let radiated: v128;
    let turn: v128;
    let size: v128;
    if (straight) {
      const along = v128.load(at, X);
      const axial = f64x2.sub(f64x2.mul(radial, along), f64x2.mul(induced, d));
      addSample(at, 0, radial, keep);
      addSample(at, 1, axial, keep);
      addSample(at, 2, magnetic, keep);
      size = f64x2.add(f64x2.mul(f64x2.abs(radial), width), f64x2.abs(axial));
      radiated = f64x2.add(
        f64x2.abs(f64x2.mul(carried, width)),
        f64x2.abs(f64x2.sub(f64x2.mul(carried, along), induced)),
      );
      turn = width;
    } else {
      const x = v128.load(at, X);
      const y = v128.load(at, Y);
      const z = v128.load(at, Z);
      const sx = v128.load(at, SX);
      const sy = v128.load(at, SY);
      const sz = v128.load(at, SZ);
      const cx = f64x2.sub(f64x2.mul(sy, z), f64x2.mul(sz, y));
      const cy = f64x2.sub(f64x2.mul(sz, x), f64x2.mul(sx, z));
      const cz = f64x2.sub(f64x2.mul(sx, y), f64x2.mul(sy, x));
      const drawn = f64x2.mul(induced, d);
      const ex = f64x2.sub(f64x2.mul(radial, x), f64x2.mul(drawn, sx));
      const ey = f64x2.sub(f64x2.mul(radial, y), f64x2.mul(drawn, sy));
      const ez = f64x2.sub(f64x2.mul(radial, z), f64x2.mul(drawn, sz));
      addSample(at, 0, ex, keep);
      addSample(at, 1, ey, keep);
      addSample(at, 2, ez, keep);
      size = f64x2.add(f64x2.add(f64x2.abs(ex), f64x2.abs(ey)), f64x2.abs(ez));
      addSample(at, 3, f64x2.mul(magnetic, cx), keep);
      addSample(at, 4, f64x2.mul(magnetic, cy), keep);
      addSample(at, 5, f64x2.mul(magnetic, cz), keep);
      radiated = f64x2.add(f64x2.abs(f64x2.mul(carried, r)), f64x2.abs(induced));
      turn = f64x2.add(f64x2.add(f64x2.abs(cx), f64x2.abs(cy)), f64x2.abs(cz));
    }
    const weight = v128.load(at, WEIGHTS);
    const nearNoise = f64x2.mul(near, rounded);
    const farNoise = f64x2.mul(f64x2.abs(far), noiseD);
    electric = f64x2.add(electric, f64x2.mul(f64x2.mul(sizeOfP, r), nearNoise));
    electric = f64x2.add(electric, f64x2.mul(radiated, noiseD));
    noiseE = f64x2.add(noiseE, f64x2.mul(weight, electric));
    noiseB = f64x2.add(noiseB, f64x2.mul(weight, f64x2.mul(turn, f64x2.add(nearNoise, farNoise))));
    sizeE = f64x2.add(sizeE, f64x2.mul(weight, size));
    sizeB = f64x2.add(sizeB, f64x2.mul(weight, f64x2.mul(turn, f64x2.abs(magnetic))));
  }
  addPair(NOISE, 0, noiseE, noiseB, keep);
  addPair(SIZES, 0, sizeE, sizeB, keep);
}

/** φ and A of the sums of waves: components 3 φ and 4 A along a line, else 6 φ and 7 … 9 A. */
@inline
function addPotentialsOf(
  straight: bool,
  shaped: bool,
  slowness: f64,
  fresh: bool,
  noiseOfCharge: f64,
  noiseOfCurrent: f64,
): void {
  const p = f64x2.splat(slowness);
  const sizeOfP = f64x2.splat(Math.abs(slowness));
  const noiseQ = f64x2.splat(noiseOfCharge);
  const noiseW = f64x2.splat(noiseOfCurrent);
  const keep = maskOf(fresh);
  let noisePhi = f64x2.splat(0);
  let noiseA = noisePhi;
  let sizePhi = noisePhi;
  let sizeA = noisePhi;
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const inverse = v128.load(at, INVERSE);
    const rounded = f64x2.add(noiseW, v128.load(at, CURRENT_MOVED));
    let current = v128.load(at, CURRENT);
    let carried = f64x2.mul(p, current);
    let noiseOfThis = rounded;
    let scalar = f64x2.mul(sizeOfP, rounded);
    if (shaped) {
      const a = v128.load(at, AMPLITUDE);
      const size = f64x2.abs(a);
      const gradient = v128.load(at, GRADIENT);
      const left = f64x2.mul(f64x2.abs(gradient), f64x2.add(noiseQ, v128.load(at, CHARGE_MOVED)));
      carried = f64x2.sub(f64x2.mul(a, carried), f64x2.mul(gradient, v128.load(at, CHARGE)));
      current = f64x2.mul(a, current);
      noiseOfThis = f64x2.mul(size, rounded);
      scalar = f64x2.add(f64x2.mul(size, scalar), left);
    }
    const scalarSample = f64x2.mul(carried, inverse);
    const vector = f64x2.mul(current, inverse);
    addSample(at, straight ? 3 : 6, scalarSample, keep);
    if (straight) addSample(at, 4, vector, keep);
    else {
      addSample(at, 7, f64x2.mul(vector, v128.load(at, SX)), keep);
      addSample(at, 8, f64x2.mul(vector, v128.load(at, SY)), keep);
      addSample(at, 9, f64x2.mul(vector, v128.load(at, SZ)), keep);
    }
    const weight = v128.load(at, WEIGHTS);
    sizePhi = f64x2.add(sizePhi, f64x2.mul(weight, f64x2.abs(scalarSample)));
    sizeA = f64x2.add(sizeA, f64x2.mul(weight, f64x2.abs(vector)));
    const weighed = f64x2.mul(weight, inverse);
    noisePhi = f64x2.add(noisePhi, f64x2.mul(weighed, scalar));
    noiseA = f64x2.add(noiseA, f64x2.mul(weighed, noiseOfThis));
  }
  addPair(NOISE, 2, noisePhi, noiseA, keep);
  addPair(SIZES, 2, sizePhi, sizeA, keep);
}

@inline
function dot(table: usize, offset: usize, a: v128, b: v128, c: v128, d: v128): v128 {
  return f64x2.add(
    f64x2.add(f64x2.mul(v128.load(table + offset), a), f64x2.mul(v128.load(table + offset, 16), b)),
    f64x2.add(f64x2.mul(v128.load(table + offset, 32), c), f64x2.mul(v128.load(table + offset, 48), d)),
  );
}

/**
 * One quantity of a part, of `count` components: their sums, and squares of what is in it of high degrees.
 * @param metric what the square of the first component counts
 */
@inline
function fold(group: usize, first: usize, count: usize, metric: f64): void {
  const table = panel;
  let square0 = f64x2.splat(0);
  let square1 = square0;
  let square2 = square0;
  let square3 = square0;
  let weight = f64x2.splat(metric);
  const one = f64x2.splat(1);
  for (let component = first; component < first + count; component++) {
    const at = panel + component * ROW;
    const low0 = v128.load(at, SAMPLES);
    const low1 = v128.load(at, SAMPLES + 16);
    const low2 = v128.load(at, SAMPLES + 32);
    const low3 = v128.load(at, SAMPLES + 48);
    const high0 = v128.load(at, SAMPLES + 64);
    const high1 = v128.load(at, SAMPLES + 80);
    const high2 = v128.load(at, SAMPLES + 96);
    const high3 = v128.load(at, SAMPLES + 112);
    const even0 = f64x2.add(low0, high0);
    const even1 = f64x2.add(low1, high1);
    const even2 = f64x2.add(low2, high2);
    const even3 = f64x2.add(low3, high3);
    const odd0 = f64x2.sub(low0, high0);
    const odd1 = f64x2.sub(low1, high1);
    const odd2 = f64x2.sub(low2, high2);
    const odd3 = f64x2.sub(low3, high3);
    store<f64>(panel + (component << 3), sumOf(dot(table, WEIGHTS, even0, even1, even2, even3)), SUMS);
    const part0 = sumsOf(
      dot(table, DEGREES, odd0, odd1, odd2, odd3),
      dot(table, DEGREES + 64, even0, even1, even2, even3),
    );
    const part1 = sumsOf(
      dot(table, DEGREES + 128, odd0, odd1, odd2, odd3),
      dot(table, DEGREES + 192, even0, even1, even2, even3),
    );
    const part2 = sumsOf(
      dot(table, DEGREES + 256, odd0, odd1, odd2, odd3),
      dot(table, DEGREES + 320, even0, even1, even2, even3),
    );
    const part3 = sumsOf(
      dot(table, DEGREES + 384, odd0, odd1, odd2, odd3),
      dot(table, DEGREES + 448, even0, even1, even2, even3),
    );
    square0 = f64x2.add(square0, f64x2.mul(weight, f64x2.mul(part0, part0)));
    square1 = f64x2.add(square1, f64x2.mul(weight, f64x2.mul(part1, part1)));
    square2 = f64x2.add(square2, f64x2.mul(weight, f64x2.mul(part2, part2)));
    square3 = f64x2.add(square3, f64x2.mul(weight, f64x2.mul(part3, part3)));
    weight = one;
  }
  const to = panel + (group << 6);
  v128.store(to, square0, SQUARES);
  v128.store(to, square1, SQUARES + 16);
  v128.store(to, square2, SQUARES + 32);
  v128.store(to, square3, SQUARES + 48);
}

/**
 * Fields of the sums of waves on a line, which are of terms with one slowness and one amplitude.
 * @param fields whether E and B are asked for; `potentials`: φ and A
 * @param shaped the amplitude is not 1 throughout
 * @param fresh whether the samples begin with these
 * @param charge what Σ q of the terms is rounded to; `current`: Σ w; `slope`: Σ w′, with what moves it
 */
export function addLine(
  slowness: f64,
  rho: f64,
  fields: bool,
  potentials: bool,
  shaped: bool,
  fresh: bool,
  charge: f64,
  current: f64,
  slope: f64,
): void {
  if (fields) {
    if (shaped) addFieldsOf(true, true, slowness, rho, fresh, charge, current, slope);
    else addFieldsOf(true, false, slowness, rho, fresh, charge, current, slope);
  }
  if (potentials) {
    if (shaped) addPotentialsOf(true, true, slowness, fresh, charge, current);
    else addPotentialsOf(true, false, slowness, fresh, charge, current);
  }
}

/** The same on any other curve. */
export function addCurve(
  slowness: f64,
  fields: bool,
  potentials: bool,
  shaped: bool,
  fresh: bool,
  charge: f64,
  current: f64,
  slope: f64,
): void {
  if (fields) {
    if (shaped) addFieldsOf(false, true, slowness, 0, fresh, charge, current, slope);
    else addFieldsOf(false, false, slowness, 0, fresh, charge, current, slope);
  }
  if (potentials) {
    if (shaped) addPotentialsOf(false, true, slowness, fresh, charge, current);
    else addPotentialsOf(false, false, slowness, fresh, charge, current);
  }
}

/** Sums of the samples, and what they hold of high degrees. */
export function foldLine(rho: f64, fields: bool, potentials: bool): void {
  if (fields) {
    fold(0, 0, 2, rho * rho);
    fold(1, 2, 1, rho * rho);
  }
  if (potentials) {
    fold(2, 3, 1, 1);
    fold(3, 4, 1, 1);
  }
}

export function foldCurve(fields: bool, potentials: bool): void {
  if (fields) {
    fold(0, 0, 3, 1);
    fold(1, 3, 3, 1);
  }
  if (potentials) {
    fold(2, 6, 1, 1);
    fold(3, 7, 3, 1);
  }
}
