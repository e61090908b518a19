import { cos, sin } from '../elementary/elementary.ts';
import type { EdgeCurrents } from '../gridding/edges.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { COMPONENTS, type Instants, type SamplePoints } from '../trace/trace.ts';
import { DelaySpread } from './delaySpread.ts';
import { leadingWavenumberError, wavenumberError } from './dispersion.ts';
import { EdgeResponse } from './edgeResponse.ts';
import type { Lattice } from './lattice.ts';
import { delayRange, forEachEdge, forEachSite, type Quantity, stride } from './predict.ts';
import { SIX } from './radialOperator.ts';

/**
 * The lattice's field with the exact numerical phase, by frequency. The time form's phase is the first term of a series
 * in the phase error κr, κ = k_num − k in the edge's direction; here the series is summed. With X, C, T the polynomials
 * in jω of the point element, of the lattice's second-order part and of the time step, the time form is
 * (X + C + T) e^(−jkr), of which −jκ₂r X is the phase to leading order; so
 *   field(ω) = (X + C + T + jκ₂r X) e^(−j(k + κ)r) W(ω),
 *   error(ω) = field(ω) − (X + Φ) e^(−jkr) W(ω),   Φ the filament's part.
 * Nothing propagates above the cut-off, where the lattice's field is dropped. The point element's own field, and the
 * static part of what is added to it, are summed in time. So faint lines matter to the correction only, and the pole of
 * the charge, 1/(jω), is left with the factor e^(−jκr) − 1, which removes it.
 *
 * The correction needs w alone, not its derivatives. Where a kink radiates more than a lattice resolves, the error's size
 * is still right (within 20 % for a double exponential of 5 steps' rise, 5 to 25 cells away), its shape is not.
 */

/**
 * As `predictGridField`, with the exact numerical phase: for far observers, coarse grids and waveforms with kinks.
 * Takes some ten times longer.
 * @returns values in the layout of `FieldHistory`; V/m and A/m
 * @throws RangeError when a sample lies on a driven edge, or when the instants are not evenly spaced by whole time steps
 */
export function predictGridFieldBySpectrum(
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  return predict('field', currents, lattice, points, instants);
}

/** As `predictLatticeError`, with the exact numerical phase; see `predictGridFieldBySpectrum`. */
export function predictLatticeErrorBySpectrum(
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  return predict('error', currents, lattice, points, instants);
}

function predict(
  quantity: Quantity,
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  const values = new Float64Array(points.count * COMPONENTS.length * instants.count);
  if (currents.count === 0) return values;
  const every = stride(instants, lattice.timeStep);
  const delays = delayRange(currents, lattice, points);
  const lines = new Lines(currents, lattice, instants, delays);
  const spreads = [instants.E, instants.H].map(
    (at) => new DelaySpread(currents.waveforms, at[0]!, every, instants.count, lattice.timeStep, delays),
  );
  const response = new EdgeResponse(lattice);
  const bracket = new Bracket(quantity, response, lattice);
  forEachSite(points, (point, site) => {
    const spread = spreads[site < 3 ? 0 : 1]!;
    spread.clear();
    lines.clear();
    forEachEdge(currents, points, point, site, response, (edge) => {
      bracket.take();
      lines.addEdge(edge, bracket);
      const travel = response.distance / lattice.medium.speed;
      for (let p = currents.pairStart[edge]!; p < currents.pairStart[edge + 1]!; p++)
        spread.add(currents.waveform[p]!, travel + currents.delay[p]!, currents.weight[p]!, bracket.direct);
    });
    const offset = (point * COMPONENTS.length + site) * instants.count;
    spread.addHistory(values, offset);
    lines.addHistory(values, offset, instants.count, every, (site < 3 ? instants.E : instants.H)[0]!);
  });
  return values;
}

/** One edge's correction at one site, a spectrum without the factors W(ω) and e^(−jkr). */
class Bracket {
  re = 0;
  im = 0;
  /** coefficients of what is left to the time domain, as those of EdgeResponse */
  readonly direct = new Float64Array(SIX);
  readonly #total = new Float64Array(SIX);
  readonly #added = new Float64Array(SIX);
  readonly #scratch = new Float64Array(2);

  constructor(
    readonly quantity: Quantity,
    readonly response: EdgeResponse,
    readonly lattice: Lattice,
  ) {}

  /** Takes up the response that was computed last. */
  take(): void {
    const { element, lattice, filament } = this.response;
    for (let k = 0; k < SIX; k++) {
      this.#total[k] = element[k]! + lattice[k]!;
      this.#added[k] = lattice[k]! - (this.quantity === 'error' ? filament[k]! : 0);
      this.direct[k] = this.quantity === 'field' ? element[k]! : 0;
    }
    this.direct[0]! += this.#added[0]!;
    this.#added[0] = 0;
  }

  /**
   * (e − 1) Σ total_k (jω)^k + Σ_{k≥0} added_k (jω)^k + jκ₂r e Σ X_k (jω)^k with e = e^(−jκr), in `re` and `im`: the
   * module's formulas, arranged so that small errors are not differences of large fields.
   */
  at(omega: number): void {
    const { response, lattice } = this;
    const r = response.distance;
    this.#polynomial(this.#added, omega);
    this.re = this.#scratch[0]!;
    this.im = this.#scratch[1]!;
    // At ω = 0, e = 1 and κ₂ = 0.
    if (omega === 0) return;
    const kappa = wavenumberError(omega, response.direction, lattice);
    this.#polynomial(this.#total, omega);
    const re = this.#scratch[0]!;
    const im = this.#scratch[1]!;
    if (kappa === undefined) {
      this.re -= re;
      this.im -= im;
      return;
    }
    const s = sin((kappa * r) / 2);
    const c = cos((kappa * r) / 2);
    // e^(−jx) − 1 = −2 sin²(x/2) − 2j sin(x/2) cos(x/2)
    const lagRe = -2 * s * s;
    const lagIm = -2 * s * c;
    this.re += lagRe * re - lagIm * im;
    this.im += lagRe * im + lagIm * re;
    this.#polynomial(response.element, omega);
    const leading = r * leadingWavenumberError(omega / lattice.medium.speed, response.direction, lattice);
    const turnRe = -leading * lagIm;
    const turnIm = leading * (1 + lagRe);
    this.re += turnRe * this.#scratch[0]! - turnIm * this.#scratch[1]!;
    this.im += turnRe * this.#scratch[1]! + turnIm * this.#scratch[0]!;
  }

  /** Σ_k coefficients[k + 1] (jω)^k, k = −1 … 4 */
  #polynomial(coefficients: Float64Array, omega: number): void {
    const square = omega * omega;
    this.#scratch[0] = coefficients[1]! - square * (coefficients[3]! - square * coefficients[5]!);
    this.#scratch[1] = omega * (coefficients[2]! - square * coefficients[4]!);
    if (omega > 0) this.#scratch[1]! -= coefficients[0]! / omega;
  }
}

/** Lines above the frequency where |ω W| has fallen to this level of its peak are left out of the correction. */
const FAINTEST = 1e-6;

/** A current whose slope has fallen to this level of its peak radiates nothing that matters here. */
const SPENT = 1e-6;

/** Beyond its last instant of interest a current is tapered over this fraction, so that one still flowing has an end. */
const TAPER = 0.25;

/** Room for what the lattice delays beyond r/v, as a fraction of the period. */
const LAG = 0.1;

/** Spectral lines of the currents, over a period long enough that nothing wraps around into the instants. */
class Lines {
  /** samples of the period, one a time step */
  readonly #period: number;
  readonly #step: number;
  readonly #count: number;
  readonly #speed: number;
  readonly #cosine: Float64Array;
  readonly #sine: Float64Array;
  /** current of each edge: [edge · count + line] */
  readonly #edgeRe: Float64Array;
  readonly #edgeIm: Float64Array;
  readonly #sumRe: Float64Array;
  readonly #sumIm: Float64Array;

  constructor(currents: EdgeCurrents, lattice: Lattice, instants: Instants, delays: readonly [number, number]) {
    this.#step = lattice.timeStep;
    this.#speed = lattice.medium.speed;
    const spent = Math.max(...currents.waveforms.map((waveform) => waveform.lastActivity(SPENT)));
    const last = Math.min(instants.H[instants.count - 1]!, spent);
    const flowing = Math.ceil(((1 + TAPER) * last) / this.#step);
    this.#period = Math.ceil((1 + LAG) * (flowing + delays[1] / this.#step));
    this.#cosine = Float64Array.from({ length: this.#period }, (_, m) => cos((2 * Math.PI * m) / this.#period));
    this.#sine = Float64Array.from({ length: this.#period }, (_, m) => sin((2 * Math.PI * m) / this.#period));
    const highest = Math.max(...currents.waveforms.map((waveform) => waveform.highestFrequency(FAINTEST)));
    this.#count = 1 + Math.floor(Math.min(highest * this.#step, 0.5) * this.#period);
    const sampled = currents.waveforms.map((waveform) => this.#spectrum(waveform, last, flowing));
    this.#edgeRe = new Float64Array(currents.count * this.#count);
    this.#edgeIm = new Float64Array(currents.count * this.#count);
    this.#sumRe = new Float64Array(this.#count);
    this.#sumIm = new Float64Array(this.#count);
    for (let edge = 0; edge < currents.count; edge++)
      for (let p = currents.pairStart[edge]!; p < currents.pairStart[edge + 1]!; p++) {
        const { re, im } = sampled[currents.waveform[p]!]!;
        const weight = currents.weight[p]!;
        const delay = currents.delay[p]!;
        for (let m = 0; m < this.#count; m++) {
          const phase = this.#omega(m) * delay;
          const c = weight * cos(phase);
          const s = weight * sin(phase);
          this.#edgeRe[edge * this.#count + m]! += c * re[m]! + s * im[m]!;
          this.#edgeIm[edge * this.#count + m]! += c * im[m]! - s * re[m]!;
        }
      }
  }

  #omega(line: number): number {
    return (2 * Math.PI * line) / (this.#period * this.#step);
  }

  /** W(ω_m) = Δt Σ_n w((n + ½)Δt) e^(−jω_m (n + ½)Δt), of the very values that drive the lattice. */
  #spectrum(waveform: Waveform, last: number, flowing: number) {
    const re = new Float64Array(this.#count);
    const im = new Float64Array(this.#count);
    for (let n = 0; n < flowing; n++) {
      const t = (n + 0.5) * this.#step;
      const beyond = Math.max(0, (t - last) / (TAPER * last));
      const value = this.#step * waveform.value(t) * (0.5 + 0.5 * cos(Math.PI * beyond));
      if (value === 0) continue;
      for (let m = 0, turn = 0; m < this.#count; m++) {
        re[m]! += value * this.#cosine[turn]!;
        im[m]! -= value * this.#sine[turn]!;
        turn = (turn + n) % this.#period;
      }
    }
    for (let m = 0; m < this.#count; m++) {
      const phase = (this.#omega(m) * this.#step) / 2;
      const [x, y] = [re[m]!, im[m]!];
      re[m] = x * cos(phase) + y * sin(phase);
      im[m] = y * cos(phase) - x * sin(phase);
    }
    return { re, im };
  }

  clear(): void {
    this.#sumRe.fill(0);
    this.#sumIm.fill(0);
  }

  /** Adds an edge's spectrum: bracket · I_edge(ω) · e^(−jkr). */
  addEdge(edge: number, bracket: Bracket): void {
    const travel = bracket.response.distance / this.#speed;
    for (let m = 0; m < this.#count; m++) {
      const omega = this.#omega(m);
      bracket.at(omega);
      const c = cos(omega * travel);
      const s = sin(omega * travel);
      const re = bracket.re * c + bracket.im * s;
      const im = bracket.im * c - bracket.re * s;
      const currentRe = this.#edgeRe[edge * this.#count + m]!;
      const currentIm = this.#edgeIm[edge * this.#count + m]!;
      this.#sumRe[m]! += re * currentRe - im * currentIm;
      this.#sumIm[m]! += re * currentIm + im * currentRe;
    }
  }

  /**
   * Adds (1/period) Σ_m S(ω_m) e^(jω_m t) at t = start + n·every steps to out[offset + n], as long as t lies within the
   * period, after which nothing is left to add.
   */
  addHistory(out: Float64Array, offset: number, instants: number, every: number, start: number): void {
    const seconds = this.#period * this.#step;
    const within = Math.min(instants, Math.ceil((seconds - start) / (every * this.#step)));
    for (let m = 0; m < this.#count; m++) {
      const pair = (m === 0 ? 1 : 2) / seconds;
      const c = cos(this.#omega(m) * start);
      const s = sin(this.#omega(m) * start);
      const re = pair * (this.#sumRe[m]! * c - this.#sumIm[m]! * s);
      const im = pair * (this.#sumIm[m]! * c + this.#sumRe[m]! * s);
      const advance = (m * every) % this.#period;
      for (let n = 0, turn = 0; n < within; n++) {
        out[offset + n]! += re * this.#cosine[turn]! - im * this.#sine[turn]!;
        turn = (turn + advance) % this.#period;
      }
    }
  }
}
