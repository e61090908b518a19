import { instantiate } from '../elementary/wasm.ts';
import bytes from '../kernels/retarded.ts';
import type { Profile, WaveTerm } from '../scenario/model.ts';
import type { Waveform } from '../scenario/waveform.ts';
import type { Constants } from './elements.ts';
import { instantRounding } from './panels.ts';
import type { PlaceView } from './pieceView.ts';
import { DEGREES, expansions, KRONROD_POINTS, kronrod, kronrodError } from './quadrature.ts';
import { Shelf, scalesOf, Windows } from './windows.ts';

/** The part of the kernel that sums at one instant (assembly/retarded/panel.ts); addresses in bytes. */
interface Kernel {
  readonly memory: WebAssembly.Memory;
  heapBase(): number;
  setPanel(address: number, perSpeed: number): void;
  lookAlong(foot: number, rho2: number, middle: number, half: number, late: number, slowness: number): void;
  lookBack(late: number, slowness: number): void;
  addTerm(window: number, factor: number, shift: number, charged: boolean, fresh: boolean): void;
  addLine(
    slowness: number,
    rho: number,
    fields: boolean,
    potentials: boolean,
    shaped: boolean,
    fresh: boolean,
    charge: number,
    current: number,
    slope: number,
  ): void;
  addCurve(
    slowness: number,
    fields: boolean,
    potentials: boolean,
    shaped: boolean,
    fresh: boolean,
    charge: number,
    current: number,
    slope: number,
  ): void;
  foldLine(rho: number, fields: boolean, potentials: boolean): void;
  foldCurve(fields: boolean, potentials: boolean): void;
}

/** Places of the kernel's numbers in its panel, in numbers; see the kernel. */
const PLACES = 16;
const NODES = 0;
const WEIGHTS = 16;
const TABLE = 32;
const ARC = TABLE + (DEGREES * PLACES) / 2;
const DISTANCE = ARC + PLACES;
const INVERSE = DISTANCE + PLACES;
const VECTOR = INVERSE + PLACES;
const AMPLITUDE = VECTOR + 6 * PLACES;
const GRADIENT = AMPLITUDE + PLACES;
const INSTANT = GRADIENT + PLACES;
const CHARGE = INSTANT + PLACES;
const CURRENT = CHARGE + PLACES;
const SLOPE = CURRENT + PLACES;
const CHARGE_MOVED = SLOPE + PLACES;
const CURRENT_MOVED = CHARGE_MOVED + PLACES;
const SAMPLES = CURRENT_MOVED + PLACES;
const NOISE = SAMPLES + 10 * PLACES;
const SUMS = NOISE + 4;
const SIZES = NOISE + 16;
const SQUARES = SIZES + 4;
const LOWEST = SQUARES + 32;
const PANEL_NUMBERS = LOWEST + 2;

/** Polynomials of waveforms, numbers: some thousand windows. */
const SHELF_NUMBERS = 1 << 18;

/** Even and odd degrees, and the node in the middle, which is there twice. */
const MIDDLE = 7;

/** What a part adds to the field: ten quantities (elements.ts), and of E, B, φ and A the error and the rounding. */
export const PART_NUMBERS = 18;
export const PART_ERROR = 10;
export const PART_ROUNDING = 14;

/** Roundings of one product of the formulas, generously counted. */
export const ROUNDINGS = 8 * Number.EPSILON;

/** Of which quantities a part is wanted. */
export interface Wanted {
  readonly fields: boolean;
  readonly potentials: boolean;
}

/** Terms of one current on a piece, in order of slowness. */
export interface Carried {
  readonly terms: readonly WaveTerm[];
  readonly waveform: Waveform;
}

/**
 * Gauss–Kronrod over parts of filaments: integrands of E, B, φ and A at 15 nodes, by the kernel; where no polynomial
 * follows a waveform, at the start of a broken power of time, it is asked node by node.
 */
export class PartSums {
  readonly #kernel = instantiate(bytes, {}) as unknown as Kernel;
  readonly #numbers: Float64Array;
  readonly #shelf: Shelf;
  readonly #windows = new WeakMap<Waveform, Windows>();
  readonly #squares: readonly Float64Array[];
  #perSpeed = Number.NaN;
  readonly #panel: number;

  constructor() {
    const { memory } = this.#kernel;
    const from = 8 * Math.ceil(this.#kernel.heapBase() / 64);
    const total = 8 * (from + PANEL_NUMBERS + SHELF_NUMBERS);
    const missing = total - memory.buffer.byteLength;
    if (missing > 0) memory.grow(Math.ceil(missing / 65536));
    this.#panel = 8 * from;
    this.#numbers = new Float64Array(memory.buffer, this.#panel, PANEL_NUMBERS);
    this.#shelf = new Shelf(memory.buffer, from + PANEL_NUMBERS);
    this.#squares = [0, 1, 2, 3].map((g) => this.#numbers.subarray(SQUARES + g * DEGREES, SQUARES + (g + 1) * DEGREES));
    for (let m = 0; m <= MIDDLE; m++) {
      const mirrored = m + PLACES / 2;
      const share = m === MIDDLE ? 1 / 2 : 1;
      this.#numbers[NODES + m] = kronrod.nodes[m]!;
      this.#numbers[NODES + mirrored] = kronrod.nodes[KRONROD_POINTS - 1 - m]!;
      for (const place of [m, mirrored]) this.#numbers[WEIGHTS + place] = share * kronrod.weights[m]!;
      for (let n = 0; n < DEGREES; n++)
        this.#numbers[TABLE + (n * PLACES) / 2 + m] = share * expansions[n * KRONROD_POINTS + m]!;
    }
  }

  /**
   * Writes the integral over arc lengths from `from` to `to` at t into out[at …]: ten quantities, four errors, four roundings.
   * What is not wanted is 0.
   */
  integrate(
    k: Constants,
    { terms, waveform }: Carried,
    view: PlaceView,
    from: number,
    to: number,
    t: number,
    wanted: Wanted,
    out: Float64Array,
    at: number,
  ): void {
    const kernel = this.#kernel;
    const { fields, potentials } = wanted;
    const perSpeed = 1 / k.speed;
    if (perSpeed !== this.#perSpeed) {
      kernel.setPanel(this.#panel, perSpeed);
      this.#perSpeed = perSpeed;
    }
    const { line } = view;
    const middle = (from + to) / 2;
    const half = (to - from) / 2;
    const [ofCharge, ofCurrent, ofSlope] = scalesOf(waveform);
    const extent = Math.abs(from) + Math.abs(to) + view.reach;
    // What rounding of places does to instants.
    const placed = Number.EPSILON * extent * perSpeed;
    const nearest = view.distance(from, to);
    const farthest = (nearest + 2 * half) * perSpeed;
    const longest = Math.max(Math.abs(from), Math.abs(to));
    const rho = line ? Math.sqrt(line.rho2) : 0;
    if (!line) this.#look(view, middle, half);
    let factors = 0;
    let bends = 0;
    let samples = false;
    for (let n = 0; n < terms.length; n++) {
      const { factor, delay, slowness, profile } = terms[n]!;
      if (line && n === 0) kernel.lookAlong(line.foot, line.rho2, middle, half, t - delay, slowness);
      else kernel.lookBack(t - delay, slowness);
      if (this.#numbers[LOWEST + 1]! >= 0) {
        const shift = Math.abs(factor) * (placed + instantRounding(t, delay, slowness * longest, farthest));
        bends += shift * this.#addTerm(waveform, factor, shift, profile !== undefined, factors === 0);
        factors += Math.abs(factor);
      }
      // Terms come in order of slowness, and those of one slowness and profile share their elements.
      const next = terms[n + 1];
      if (factors === 0 || (next?.slowness === slowness && next.profile === profile)) continue;
      const shaped = profile !== undefined;
      if (shaped) this.#shape(profile);
      const noise = ROUNDINGS * factors;
      const [q, w, d] = [noise * ofCharge, noise * ofCurrent, noise * ofSlope + bends];
      if (line) kernel.addLine(slowness, rho, fields, potentials, shaped, !samples, q, w, d);
      else kernel.addCurve(slowness, fields, potentials, shaped, !samples, q, w, d);
      samples = true;
      factors = 0;
      bends = 0;
    }
    if (!samples || !fields || !potentials) out.fill(0, at, at + PART_NUMBERS);
    if (!samples) return;
    if (line) kernel.foldLine(rho, fields, potentials);
    else kernel.foldCurve(fields, potentials);
    this.#take(k, view, half, ROUNDINGS + (Number.EPSILON * extent) / nearest, wanted, out, at);
  }

  /** Amplitudes at the nodes, and their gradients. */
  #shape(profile: Profile): void {
    const numbers = this.#numbers;
    for (let place = 0; place < PLACES; place++) {
      const s = numbers[ARC + place]!;
      numbers[AMPLITUDE + place] = profile.value(s);
      numbers[GRADIENT + place] = profile.slope(s);
    }
  }

  /** Places of the nodes on a curve. */
  #look(view: PlaceView, middle: number, half: number): void {
    const numbers = this.#numbers;
    for (let place = 0; place < PLACES; place++) {
      const s = middle + half * numbers[NODES + place]!;
      view.look(s);
      numbers[ARC + place] = s;
      numbers[DISTANCE + place] = view.r;
      numbers[INVERSE + place] = 1 / view.r;
      numbers[VECTOR + place] = view.x;
      numbers[VECTOR + PLACES + place] = view.y;
      numbers[VECTOR + 2 * PLACES + place] = view.z;
      numbers[VECTOR + 3 * PLACES + place] = view.sx;
      numbers[VECTOR + 4 * PLACES + place] = view.sy;
      numbers[VECTOR + 5 * PLACES + place] = view.sz;
    }
  }

  /** Adds a term at the source times left in the panel to the sums of waves; returns the largest |w″| met, A/s². */
  #addTerm(waveform: Waveform, factor: number, shift: number, charged: boolean, fresh: boolean): number {
    const numbers = this.#numbers;
    let windows = this.#windows.get(waveform);
    if (!windows) {
      windows = new Windows(waveform, this.#shelf);
      this.#windows.set(waveform, windows);
    }
    const window = windows.about(numbers[LOWEST]!, numbers[LOWEST + 1]!);
    if (window) {
      this.#kernel.addTerm(window.address, factor, shift, charged, fresh);
      return window.bend;
    }
    if (fresh) numbers.fill(0, CHARGE, SAMPLES);
    let bend = 0;
    for (let place = 0; place < PLACES; place++) {
      const u = numbers[INSTANT + place]!;
      if (!(u >= 0)) continue;
      waveform.at(u, 3, wave);
      numbers[CHARGE + place]! += factor * wave[0]!;
      numbers[CURRENT + place]! += factor * wave[1]!;
      numbers[SLOPE + place]! += factor * wave[2]!;
      numbers[CHARGE_MOVED + place]! += shift * Math.abs(wave[1]!);
      numbers[CURRENT_MOVED + place]! += shift * Math.abs(wave[2]!);
      bend = Math.max(bend, Math.abs(wave[3]!));
    }
    return bend;
  }

  /** From the kernel's sums to the ten quantities in SI units, with errors and roundings. */
  #take(
    { electric, magnetic, speed }: Constants,
    view: PlaceView,
    half: number,
    relative: number,
    { fields, potentials }: Wanted,
    out: Float64Array,
    at: number,
  ): void {
    const numbers = this.#numbers;
    const E = half * electric;
    const B = half * magnetic;
    if (view.line) {
      const { px, py, pz } = view.line;
      const { sx, sy, sz } = view;
      if (fields) {
        const across = E * numbers[SUMS]!;
        const along = E * numbers[SUMS + 1]!;
        const around = B * numbers[SUMS + 2]!;
        out[at] = across * px + along * sx;
        out[at + 1] = across * py + along * sy;
        out[at + 2] = across * pz + along * sz;
        out[at + 3] = around * (sy * pz - sz * py);
        out[at + 4] = around * (sz * px - sx * pz);
        out[at + 5] = around * (sx * py - sy * px);
      }
      if (potentials) {
        const carried = B * numbers[SUMS + 4]!;
        out[at + 6] = E * numbers[SUMS + 3]!;
        out[at + 7] = carried * sx;
        out[at + 8] = carried * sy;
        out[at + 9] = carried * sz;
      }
    } else
      for (let c = fields ? 0 : 6; c < (potentials ? 10 : 6); c++)
        out[at + c] = (c < 3 || c === 6 ? E : B) * numbers[SUMS + c]!;
    let size = 0;
    for (let g = fields ? 0 : 2; g < (potentials ? 4 : 2); g++) {
      const unit = g === 0 || g === 2 ? E : B;
      const own = unit * numbers[SIZES + g]!;
      // A rounding of a direction turns E into B.
      size = g === 1 ? Math.max(own, size / speed) : own;
      out[at + PART_ERROR + g] = unit * kronrodError(this.#squares[g]!);
      out[at + PART_ROUNDING + g] = relative * size + unit * numbers[NOISE + g]!;
    }
  }
}

const wave = new Float64Array(4);
