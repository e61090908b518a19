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
/** Of E, B, φ and A: Σ weight·rounding. */
const NOISE: usize = 0x1080;
/** Σ weight·sample by component. */
const SUMS: usize = 0x10a0;
/** Of E, B, φ and A: Σ weight·|sample|, and eight squares, of degrees 7 … 14. */
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

/** Begins a part: no samples, no noise, no waves. */
export function begin(): void {
  memory.fill(panel + CHARGE, 0, SUMS - CHARGE);
}

/**
 * Nodes of a stretch of a straight line.
 * @param foot arc length of the foot of the observer's perpendicular
 * @param rho2 squared length of the perpendicular
 */
export function lookAlong(foot: f64, rho2: f64, middle: f64, half: f64): void {
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const s = f64x2.add(f64x2.splat(middle), f64x2.mul(f64x2.splat(half), v128.load(at, NODES)));
    const along = f64x2.sub(f64x2.splat(foot), s);
    const r = f64x2.sqrt(f64x2.add(f64x2.splat(rho2), f64x2.mul(along, along)));
    v128.store(at, s, ARC);
    v128.store(at, along, X);
    v128.store(at, r, DISTANCE);
    v128.store(at, f64x2.div(f64x2.splat(1), r), INVERSE);
  }
}

/** Source times t − delay − p s − R/v of all nodes. @param late t − delay */
export function lookBack(late: f64, slowness: f64): void {
  let lowest = f64x2.splat(Infinity);
  let highest = f64x2.splat(-Infinity);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const launched = f64x2.sub(f64x2.splat(late), f64x2.mul(f64x2.splat(slowness), v128.load(at, ARC)));
    const u = f64x2.sub(launched, f64x2.mul(v128.load(at, DISTANCE), f64x2.splat(perSpeed)));
    v128.store(at, u, INSTANT);
    lowest = f64x2.min(lowest, u);
    highest = f64x2.max(highest, u);
  }
  store<f64>(panel, Math.min(f64x2.extract_lane(lowest, 0), f64x2.extract_lane(lowest, 1)), LOWEST);
  store<f64>(panel, Math.max(f64x2.extract_lane(highest, 0), f64x2.extract_lane(highest, 1)), HIGHEST);
}

/**
 * Adds factor·wave(u) to one of the sums of waves; before the waveform's start it is 0. A waveform is a polynomial about
 * there, in x = (u − middle)·perHalf.
 * @param coefficients of falling powers, `degree` + 1 of them
 * @param into CHARGE, CURRENT or SLOPE
 * @param moved where |wave|·shift is added: what the rounding of u does to the integral of this one
 */
@inline
function addPolynomial(
  coefficients: usize,
  degree: i32,
  middle: f64,
  perHalf: f64,
  factor: f64,
  into: usize,
  shift: f64,
  moved: usize,
): void {
  const end = coefficients + (<usize>degree << 3);
  const zero = f64x2.splat(middle);
  const scale = f64x2.splat(perHalf);
  for (let at = panel, last = at + ROW; at < last; at += 64) {
    const x0 = f64x2.mul(f64x2.sub(v128.load(at, INSTANT), zero), scale);
    const x1 = f64x2.mul(f64x2.sub(v128.load(at, INSTANT + 16), zero), scale);
    const x2 = f64x2.mul(f64x2.sub(v128.load(at, INSTANT + 32), zero), scale);
    const x3 = f64x2.mul(f64x2.sub(v128.load(at, INSTANT + 48), zero), scale);
    let y0 = v128.load_splat<f64>(coefficients);
    let y1 = y0;
    let y2 = y0;
    let y3 = y0;
    for (let next = coefficients; next < end; ) {
      next += 8;
      const c = v128.load_splat<f64>(next);
      y0 = f64x2.add(f64x2.mul(y0, x0), c);
      y1 = f64x2.add(f64x2.mul(y1, x1), c);
      y2 = f64x2.add(f64x2.mul(y2, x2), c);
      y3 = f64x2.add(f64x2.mul(y3, x3), c);
    }
    addWave(at, y0, factor, into, shift, moved);
    addWave(at + 16, y1, factor, into, shift, moved);
    addWave(at + 32, y2, factor, into, shift, moved);
    addWave(at + 48, y3, factor, into, shift, moved);
  }
}

@inline
function addWave(at: usize, wave: v128, factor: f64, into: usize, shift: f64, moved: usize): void {
  const felt = v128.and(wave, f64x2.ge(v128.load(at, INSTANT), f64x2.splat(0)));
  v128.store(at + into, f64x2.add(v128.load(at + into), f64x2.mul(f64x2.splat(factor), felt)));
  if (moved == 0) return;
  const change = f64x2.mul(f64x2.splat(shift), f64x2.abs(felt));
  v128.store(at + moved, f64x2.add(v128.load(at + moved), change));
}

export function addCharge(q: usize, degree: i32, middle: f64, perHalf: f64, factor: f64): void {
  addPolynomial(q, degree, middle, perHalf, factor, CHARGE, 0, 0);
}

/** @param shift |factor| times what u is rounded to, s */
export function addCurrent(w: usize, degree: i32, middle: f64, perHalf: f64, factor: f64, shift: f64): void {
  addPolynomial(w, degree, middle, perHalf, factor, CURRENT, shift, CHARGE_MOVED);
}

export function addSlope(slope: usize, degree: i32, middle: f64, perHalf: f64, factor: f64, shift: f64): void {
  addPolynomial(slope, degree, middle, perHalf, factor, SLOPE, shift, CURRENT_MOVED);
}

/** What q, w and w′ of the terms that share an element are rounded to, the last with what moves it. */
let noiseOfCharge: f64 = 0;
let noiseOfCurrent: f64 = 0;
let noiseOfSlope: f64 = 0;

export function setNoise(charge: f64, current: f64, slope: f64): void {
  noiseOfCharge = charge;
  noiseOfCurrent = current;
  noiseOfSlope = slope;
}

@inline
function addSample(at: usize, component: usize, sample: v128): void {
  const place = at + component * ROW;
  v128.store(place, f64x2.add(v128.load(place, SAMPLES), sample), SAMPLES);
}

@inline
function addNoise(group: usize, noise: v128): void {
  const place = panel + (group << 3);
  store<f64>(place, load<f64>(place, NOISE) + sumOf(noise), NOISE);
}

/**
 * E and B of the sums of waves, which are of terms with one slowness and one amplitude along the wire.
 * @param straight the part is one of a line: components 0 E_P, 1 E_s, 2 B; else 0 … 2 E, 3 … 5 B
 * @param rho length of P, m
 */
@inline
function addFieldsOf(straight: bool, slowness: f64, rho: f64): void {
  const v1 = f64x2.splat(perSpeed);
  const p = f64x2.splat(slowness);
  const width = f64x2.splat(rho);
  const slopeNoise = f64x2.splat(noiseOfSlope);
  let noiseE = f64x2.splat(0);
  let noiseB = f64x2.splat(0);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const inverse = v128.load(at, INVERSE);
    const r = v128.load(at, DISTANCE);
    const a = v128.load(at, AMPLITUDE);
    const gradient = v128.load(at, GRADIENT);
    const q = v128.load(at, CHARGE);
    const w = v128.load(at, CURRENT);
    const d = v128.load(at, SLOPE);
    const weight = v128.load(at, WEIGHTS);
    const inverse2 = f64x2.mul(inverse, inverse);
    const near = f64x2.mul(inverse2, inverse);
    const far = f64x2.mul(inverse2, v1);
    const carried = f64x2.mul(a, p);
    const charge = f64x2.sub(f64x2.mul(carried, w), f64x2.mul(gradient, q));
    const chargeRate = f64x2.sub(f64x2.mul(carried, d), f64x2.mul(gradient, w));
    const radial = f64x2.add(f64x2.mul(charge, near), f64x2.mul(chargeRate, far));
    const induced = f64x2.mul(a, f64x2.mul(f64x2.mul(inverse, v1), v1));
    const magnetic = f64x2.mul(a, f64x2.add(f64x2.mul(w, near), f64x2.mul(d, far)));
    // Coefficients of q, w and w′ in E and in B, their sizes.
    const still = f64x2.mul(f64x2.abs(gradient), inverse2);
    const moving = f64x2.mul(f64x2.abs(f64x2.sub(f64x2.mul(carried, near), f64x2.mul(gradient, far))), r);
    const carriedFar = f64x2.mul(carried, far);
    let radiated: v128;
    let turn: v128;
    if (straight) {
      const along = v128.load(at, X);
      addSample(at, 0, radial);
      addSample(at, 1, f64x2.sub(f64x2.mul(radial, along), f64x2.mul(induced, d)));
      addSample(at, 2, magnetic);
      radiated = f64x2.add(
        f64x2.mul(f64x2.abs(carriedFar), width),
        f64x2.abs(f64x2.sub(f64x2.mul(carriedFar, along), induced)),
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
      addSample(at, 0, f64x2.sub(f64x2.mul(radial, x), f64x2.mul(drawn, sx)));
      addSample(at, 1, f64x2.sub(f64x2.mul(radial, y), f64x2.mul(drawn, sy)));
      addSample(at, 2, f64x2.sub(f64x2.mul(radial, z), f64x2.mul(drawn, sz)));
      addSample(at, 3, f64x2.mul(magnetic, cx));
      addSample(at, 4, f64x2.mul(magnetic, cy));
      addSample(at, 5, f64x2.mul(magnetic, cz));
      radiated = f64x2.add(f64x2.mul(f64x2.abs(carriedFar), r), induced);
      turn = f64x2.add(f64x2.add(f64x2.abs(cx), f64x2.abs(cy)), f64x2.abs(cz));
    }
    const chargeNoise = f64x2.add(f64x2.splat(noiseOfCharge), v128.load(at, CHARGE_MOVED));
    const currentNoise = f64x2.add(f64x2.splat(noiseOfCurrent), v128.load(at, CURRENT_MOVED));
    const electric = f64x2.add(
      f64x2.add(f64x2.mul(still, chargeNoise), f64x2.mul(moving, currentNoise)),
      f64x2.mul(radiated, slopeNoise),
    );
    const around = f64x2.mul(
      f64x2.mul(f64x2.abs(a), turn),
      f64x2.add(f64x2.mul(near, currentNoise), f64x2.mul(far, slopeNoise)),
    );
    noiseE = f64x2.add(noiseE, f64x2.mul(weight, electric));
    noiseB = f64x2.add(noiseB, f64x2.mul(weight, around));
  }
  addNoise(0, noiseE);
  addNoise(1, noiseB);
}

/** φ and A of the sums of waves: components 3 φ and 4 A along a line, else 6 φ and 7 … 9 A. */
@inline
function addPotentialsOf(straight: bool, slowness: f64): void {
  const p = f64x2.splat(slowness);
  let noisePhi = f64x2.splat(0);
  let noiseA = f64x2.splat(0);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    const inverse = v128.load(at, INVERSE);
    const a = v128.load(at, AMPLITUDE);
    const gradient = v128.load(at, GRADIENT);
    const w = v128.load(at, CURRENT);
    const weight = v128.load(at, WEIGHTS);
    const carried = f64x2.mul(a, p);
    const charge = f64x2.sub(f64x2.mul(carried, w), f64x2.mul(gradient, v128.load(at, CHARGE)));
    const current = f64x2.mul(f64x2.mul(a, w), inverse);
    addSample(at, straight ? 3 : 6, f64x2.mul(charge, inverse));
    if (straight) addSample(at, 4, current);
    else {
      addSample(at, 7, f64x2.mul(current, v128.load(at, SX)));
      addSample(at, 8, f64x2.mul(current, v128.load(at, SY)));
      addSample(at, 9, f64x2.mul(current, v128.load(at, SZ)));
    }
    const chargeNoise = f64x2.add(f64x2.splat(noiseOfCharge), v128.load(at, CHARGE_MOVED));
    const currentNoise = f64x2.add(f64x2.splat(noiseOfCurrent), v128.load(at, CURRENT_MOVED));
    const scalar = f64x2.add(
      f64x2.mul(f64x2.abs(gradient), chargeNoise),
      f64x2.mul(f64x2.abs(carried), currentNoise),
    );
    const weighed = f64x2.mul(weight, inverse);
    noisePhi = f64x2.add(noisePhi, f64x2.mul(weighed, scalar));
    noiseA = f64x2.add(noiseA, f64x2.mul(weighed, f64x2.mul(f64x2.abs(a), currentNoise)));
  }
  addNoise(2, noisePhi);
  addNoise(3, noiseA);
}

/** Fields of the sums of waves, which are of terms with one slowness and one amplitude; the sums begin anew after it. */
export function addLine(slowness: f64, rho: f64, fields: bool, potentials: bool): void {
  if (fields) addFieldsOf(true, slowness, rho);
  if (potentials) addPotentialsOf(true, slowness);
  memory.fill(panel + CHARGE, 0, SAMPLES - CHARGE);
}

export function addCurve(slowness: f64, fields: bool, potentials: bool): void {
  if (fields) addFieldsOf(false, slowness, 0);
  if (potentials) addPotentialsOf(false, slowness);
  memory.fill(panel + CHARGE, 0, SAMPLES - CHARGE);
}

/** Two sums over lanes, one in each lane. */
@inline
function sumsOf(a: v128, b: v128): v128 {
  return f64x2.add(v128.shuffle<f64>(a, b, 0, 2), v128.shuffle<f64>(a, b, 1, 3));
}

@inline
function dot(table: usize, offset: usize, a: v128, b: v128, c: v128, d: v128): v128 {
  return f64x2.add(
    f64x2.add(f64x2.mul(v128.load(table + offset), a), f64x2.mul(v128.load(table + offset, 16), b)),
    f64x2.add(f64x2.mul(v128.load(table + offset, 32), c), f64x2.mul(v128.load(table + offset, 48), d)),
  );
}

/**
 * One quantity of a part, of `count` components: their sums, Σ weight·|quantity| and squares of its parts of high degree.
 * @param metric what the square of the first component counts
 */
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

  let size = f64x2.splat(0);
  for (let at = panel, end = at + ROW; at < end; at += 16) {
    let from = at + first * ROW;
    const sample = v128.load(from, SAMPLES);
    let squared = f64x2.mul(f64x2.splat(metric), f64x2.mul(sample, sample));
    for (let component: usize = 1; component < count; component++) {
      from += ROW;
      const other = v128.load(from, SAMPLES);
      squared = f64x2.add(squared, f64x2.mul(other, other));
    }
    size = f64x2.add(size, f64x2.mul(v128.load(at, WEIGHTS), f64x2.sqrt(squared)));
  }
  store<f64>(panel + (group << 3), sumOf(size), SIZES);
}

export function foldLine(rho2: f64, fields: bool, potentials: bool): void {
  if (fields) {
    fold(0, 0, 2, rho2);
    fold(1, 2, 1, rho2);
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
