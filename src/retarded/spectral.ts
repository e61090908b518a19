import { cos, exp, sin } from '../elementary/elementary.ts';
import { firstArrival } from '../scenario/distance.ts';
import { JUMP_NOTED } from '../scenario/jump.ts';
import type { Dipole, Filament, Medium, Profile, Source, Vec3 } from '../scenario/model.ts';
import { carrying } from '../scenario/profiles.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { type FieldValue, refuseOnSource } from './field.ts';
import { longestPart } from './panels.ts';
import { viewOf } from './pieceView.ts';
import { prepareSources } from './prepare.ts';
import { gaussLegendre } from './quadrature.ts';
import { WaveformSet } from './terms.ts';
import { type Complex, type Drive, linesOf } from './waveformSpectrum.ts';

/**
 * The field of prescribed currents by frequency, a route of its own beside retarded integrals. At the complex frequency p
 * (of e^(pt)) the wave equation is the screened Poisson equation, whose Green's function is G = e^(−λR)/(4πR), λ = p/v:
 *   φ = 1/ε [∫ ρ G ds + Σ_ends Q G],  A = μ ∫ I ŝ G ds,  E = −∇φ − pA,  B = ∇×A,  ∇G = −(1 + λR) G R/R²
 * with ρ = −(∂I/∂s)/p along the wire and Q = ∓I/p at its ends, by continuity (Harrington, Time-Harmonic Electromagnetic
 * Fields, 1961, ch. 2, from memory). Nothing of the retarded route is used but the geometry of pieces.
 *
 * Back in time the inverse is taken along Re p = a > 0, where a net charge, whose spectrum has a pole at p = 0, is as
 * smooth as anything else:
 *   F(t) = e^(at) Δω/2π Σ_k F̂(a + jkΔω) e^(jkΔωt) − Σ_{m≥1} F(t + mT) e^(−maT),  T = 2π/Δω,
 * the last sum being what repetition adds (Poisson's summation; Dubner & Abate, J. ACM 15, 1968, from memory), e^(−aT) of
 * the field at later instants.
 */

/** The field at one instant and bounds on the Euclidean norm of its errors; SI units. */
export type SpectralValue = Pick<FieldValue, 'E' | 'H' | 'B' | 'phi' | 'A' | 'errorE' | 'errorH'>;

/** Periods of the line spectrum in a window: e^(at) rises over a window by the fourth root of 1/ALIAS. */
const PERIODS = 4;

/** e^(−aT): what is left of the next period. */
const ALIAS = 1e-15;

/** −ln ALIAS */
const DAMPING = 34.538776394910684;

/** A smooth pulse's spectrum is followed until it is this part of its peak. */
const SPECTRUM_LEVEL = 1e-16;

/** Lines at most: a kink's spectrum falls with a power of frequency and has no end. */
const MOST_LINES = 2048;

/** Points of the rule on each part of a wire and of a pulse, and of the weaker one that tells its error. */
const POINTS = 16;
const FEWER_POINTS = 11;

/** The largest phase across half a part: Gauss's 16 points integrate e^(jκx) on [−1, 1] to rounding up to κ = 4. */
const HALF_PHASE = 4;

/** Quantities in one vector of complex numbers (re, im): E, B, φ, A. */
const QUANTITIES = 10;
const WIDTH = 2 * QUANTITIES;
const PHI = 6;
const A = 7;

/** The field at one point at several instants, and its largest sizes there from the first arrival to the window's end. */
export interface SpectralField {
  readonly values: readonly SpectralValue[];
  /** computed when asked for */
  peaks(): Peaks;
}

/** V/m, A/m, V, V·s/m */
export interface Peaks {
  readonly E: number;
  readonly H: number;
  readonly phi: number;
  readonly A: number;
}

/** Instants of the window at which peaks are looked for. */
const PEAK_INSTANTS = 240;

/**
 * The time-domain field by spectra: what is returned gives the field at a point at each of some instants.
 * @param window s: the longest stretch from the first arrival at a point to the last instant asked for there
 * @throws (from `at`) RangeError where the point lies on a source, naming it, or an instant lies beyond the window
 */
export function fieldBySpectrum(
  sources: readonly Source[],
  medium: Medium,
  window: number,
): (point: Vec3, times: readonly number[]) => SpectralField {
  const prepared = prepareSources(sources, medium, 'quadrature');
  const waveforms = new WaveformSet();
  const owners = sources.map((source) => waveforms.index(source.waveform));
  const contour = contourOf(waveforms.list, window);
  const spectra = waveforms.list.map((waveform) => spectrumOf(waveform, contour));
  const top = contour.step * contour.lines;

  return (point, times) => {
    refuseOnSource(prepared, point);
    const start = firstArrival(sources, medium, point);
    const late = times.find((t) => t - start > window * (1 + 1e-9));
    if (late !== undefined)
      throw new RangeError(
        `instant ${late} s is ${late - start} s after the first arrival, beyond the window ${window} s.`,
      );
    const fine = nodesAt(sources, owners, medium, point, start, top, POINTS);
    const coarse = nodesAt(sources, owners, medium, point, start, top, FEWER_POINTS);
    const lines = new Float64Array((contour.lines + 1) * WIDTH);
    const other = new Float64Array(WIDTH);
    const rotors = new Rotors(fine, contour);
    const quadrature: [number, number] = [0, 0];
    const every = Math.max(1, Math.floor(contour.lines / CHECKED_LINES));
    for (let k = 0; k <= contour.lines; k++) {
      const own = lines.subarray(k * WIDTH, (k + 1) * WIDTH);
      const omega = k * contour.step;
      const weights = spectra.map((spectrum): Complex => [spectrum[2 * k]!, spectrum[2 * k + 1]!]);
      sumNodes(fine, medium, contour.damping, omega, weights, rotors, own);
      rotors.next();
      if (k % every !== 0) continue;
      sumNodes(coarse, medium, contour.damping, omega, weights, new Rotors(coarse, contour, k), other);
      for (let c = 0; c < WIDTH; c++) other[c]! -= own[c]!;
      quadrature[0] += every * norm(other, 0);
      quadrature[1] += every * norm(other, 1);
    }
    const inverse = new Inverse(lines, contour, medium, quadrature);
    return { values: inverse.at(times.map((t) => t - start)), peaks: () => peaksOf(inverse, window) };
  };
}

/**
 * What `fieldBySpectrum` would take, before it is asked.
 * @param window as there
 * @returns whether a waveform's spectrum has no end, so that it is cut off; and how many terms the lines at a point have
 */
export function spectralWork(
  sources: readonly Source[],
  medium: Medium,
  window: number,
): { readonly endless: boolean; terms(point: Vec3): number } {
  const waveforms = new WaveformSet();
  const owners = sources.map((source) => waveforms.index(source.waveform));
  const { step, lines } = contourOf(waveforms.list, window);
  return {
    endless: waveforms.list.some((waveform) => !isSmooth(waveform)),
    terms: (point) => lines * nodesAt(sources, owners, medium, point, 0, step * lines, POINTS).kind.length,
  };
}

function peaksOf(inverse: Inverse, window: number): Peaks {
  const over = Array.from({ length: PEAK_INSTANTS }, (_, n) => (window * (n + 1)) / PEAK_INSTANTS);
  const peaks = { E: 0, H: 0, phi: 0, A: 0 };
  for (const { E, H, phi, A } of inverse.at(over)) {
    peaks.E = Math.max(peaks.E, length(E));
    peaks.H = Math.max(peaks.H, length(H));
    peaks.phi = Math.max(peaks.phi, Math.abs(phi));
    peaks.A = Math.max(peaks.A, length(A));
  }
  return peaks;
}

/** Lines at which the quadrature's error is measured. */
const CHECKED_LINES = 16;

/** Complex amplitudes of e^(+jωt), (re, im) each; SI units. */
export interface SteadyValue {
  readonly E: readonly Complex[];
  readonly H: readonly Complex[];
  readonly B: readonly Complex[];
  readonly phi: Complex;
  readonly A: readonly Complex[];
  readonly errorE: number;
  readonly errorH: number;
}

/**
 * The field at one frequency, e^(+jωt): in the steady state, every waveform being amplitude · e^(+jωt), its amplitude that
 * of its specification, or its peak where the specification has none; or, with drive `pulse`, the Fourier integral
 * ∫ F e^(−jωt) dt of the field in time, in units of the field per hertz.
 * @throws (from what it returns) RangeError where the point lies on a source, or for a frequency that is not above 0,
 *   at which end charges would grow without bound, or where a current given by frequency is not known
 */
export function steadyField(
  sources: readonly Source[],
  medium: Medium,
  drive: Drive = 'steady',
): (point: Vec3, frequency: number) => SteadyValue {
  const prepared = prepareSources(sources, medium, 'quadrature');
  const waveforms = new WaveformSet();
  const owners = sources.map((source) => waveforms.index(source.waveform));
  const linesAt = linesOf(waveforms.list, drive);
  return (point, frequency) => {
    refuseOnSource(prepared, point);
    if (!(frequency > 0)) throw new RangeError(`frequency is ${frequency} Hz; a steady state needs one above 0.`);
    const omega = 2 * Math.PI * frequency;
    const lines = linesAt(frequency);
    const weights = lines.map(({ value }) => value);
    const inexact = lines.reduce(
      (worst, { value, error }) => (error > 0 ? Math.max(worst, error / length(value)) : worst),
      0,
    );
    const [fine, coarse] = [POINTS, FEWER_POINTS].map((points) => {
      const nodes = nodesAt(sources, owners, medium, point, 0, omega, points);
      const out = new Float64Array(WIDTH);
      sumNodes(nodes, medium, 0, omega, weights, new Rotors(nodes, { damping: 0, step: omega }, 1), out);
      const latest = nodes.delay.reduce((most, delay) => Math.max(most, Math.abs(delay)), 0);
      return { out, rounding: inexact + Number.EPSILON * (16 + 2 * omega * latest) };
    }) as [{ out: Float64Array; rounding: number }, { out: Float64Array; rounding: number }];
    const { out, rounding } = fine;
    const pair = (c: number): Complex => [out[2 * c]!, out[2 * c + 1]!];
    const errors = [0, 1].map(
      (g) =>
        norm(
          out.map((x, c) => x - coarse.out[c]!),
          g,
        ) +
        rounding * norm(out, g),
    );
    const H = (c: number): Complex => [out[2 * c]! / medium.permeability, out[2 * c + 1]! / medium.permeability];
    return {
      E: [pair(0), pair(1), pair(2)],
      H: [H(3), H(4), H(5)],
      B: [pair(3), pair(4), pair(5)],
      phi: pair(PHI),
      A: [pair(A), pair(A + 1), pair(A + 2)],
      errorE: errors[0]!,
      errorH: Math.max(errors[1]!, (rounding * norm(out, 0)) / medium.speed) / medium.permeability,
    };
  };
}

/** Norm of E (group 0) or B (group 1) in a vector of complex quantities. */
function norm(v: Float64Array, group: number): number {
  let sum = 0;
  for (let c = 6 * group; c < 6 * group + 6; c++) sum += v[c]! * v[c]!;
  return Math.sqrt(sum);
}

/** p = damping + j k·step, k = 0 … lines */
interface Contour {
  readonly damping: number;
  readonly step: number;
  readonly lines: number;
  /** part of the lines, from the highest down, by which the size of those left out is judged */
  readonly tail: number;
}

/** For a spectrum that falls all the way; and, for equidistant samples of a table, whose spectrum repeats itself as it falls. */
const TAIL = 1 / 16;
const TAIL_OF_SAMPLES = 1 / 4;

function contourOf(waveforms: readonly Waveform[], window: number): Contour {
  const period = PERIODS * Math.max(window, ...waveforms.map(({ timeScale }) => timeScale));
  const step = (2 * Math.PI) / period;
  const highest = Math.max(
    ...waveforms.map((waveform) =>
      isSmooth(waveform) ? 2 * Math.PI * waveform.highestFrequency(SPECTRUM_LEVEL) : Number.POSITIVE_INFINITY,
    ),
  );
  return {
    damping: DAMPING / period,
    step,
    lines: Math.min(MOST_LINES, Math.ceil(highest / step)),
    tail: waveforms.some(({ seams }) => seams.length > 0) ? TAIL_OF_SAMPLES : TAIL,
  };
}

/** Whether nothing but a jump too small to matter ends a waveform's spectrum later than its shape does. */
const isSmooth = ({ kinks, jump }: Waveform): boolean => kinks.length === 0 || (jump > 0 && jump <= JUMP_NOTED);

/**
 * W(p) = ∫₀^∞ w e^(−pt) dt on the contour's lines, (re, im) each, by Gauss's rule on parts that grow from each kink up to
 * the waveform's time scale or a part of a turn, and end at seams.
 */
function spectrumOf(waveform: Waveform, { damping, step, lines }: Contour): Float64Array {
  const { kinks, seams, timeScale } = waveform;
  const spent = isSmooth(waveform) ? waveform.lastActivity(SPECTRUM_LEVEL) : Number.POSITIVE_INFINITY;
  const last = Math.min(spent, DAMPING / damping);
  const longest = Math.min(timeScale, (2 * HALF_PHASE) / (step * lines));
  const { nodes, weights } = gaussLegendre(POINTS);
  const out = new Float64Array(2 * (lines + 1));
  const inside = [...kinks, ...seams].filter((t) => t < last);
  const stations = [...new Set([0, ...inside, last])].sort((a, b) => a - b);
  for (let m = 1; m < stations.length; m++) {
    const to = stations[m]!;
    let length = kinks.includes(stations[m - 1]!) ? longest * FIRST_PART : longest;
    for (let a = stations[m - 1]!; a < to; ) {
      const b = Math.min(to, a + length);
      nodes.forEach((x, n) => {
        const t = (a + b + (b - a) * x) / 2;
        let re = ((b - a) / 2) * weights[n]! * exp(-damping * t) * waveform.value(t);
        let im = 0;
        if (re === 0) return;
        const [turnRe, turnIm] = [cos(step * t), -sin(step * t)];
        for (let k = 0; k <= lines; k++) {
          out[2 * k]! += re;
          out[2 * k + 1]! += im;
          [re, im] = [re * turnRe - im * turnIm, re * turnIm + im * turnRe];
        }
      });
      a = b;
      length = Math.min(longest, 2 * length);
    }
  }
  return out;
}

/** Of a part: where the first one after a kink ends, for pulses that start as a broken power of time. */
const FIRST_PART = 2 ** -20;

/** Sources taken apart into points, as one observer sees them. */
class Nodes {
  /** of each node: R (3), |R|, direction (3: tangent or moment), what flows, how that changes along s, slowness */
  readonly geometry: number[] = [];
  /** instant at which a node's waveform starts at the observer, s */
  readonly delay: number[] = [];
  readonly waveform: number[] = [];
  readonly kind: number[] = [];

  add(kind: number, waveform: number, delay: number, ...geometry: readonly number[]): void {
    this.kind.push(kind);
    this.waveform.push(waveform);
    this.delay.push(delay);
    this.geometry.push(...geometry);
  }
}
const STRIDE = 10;
const FILAMENT = 0;
const CHARGE = 1;
const DIPOLE = 2;

/** @param start s: counted from here; @param top highest ω, rad/s; @param points of Gauss's rule on a part */
function nodesAt(
  sources: readonly Source[],
  owners: readonly number[],
  medium: Medium,
  point: Vec3,
  start: number,
  top: number,
  points: number,
): Nodes {
  const nodes = new Nodes();
  sources.forEach((source, n) => {
    if (source.type === 'dipole') addDipole(nodes, source, owners[n]!, medium, point, start);
    else addFilament(nodes, source, owners[n]!, medium, point, start, top, points);
  });
  return nodes;
}

function addDipole(nodes: Nodes, source: Dipole, owner: number, medium: Medium, point: Vec3, start: number): void {
  const R = source.at.map((x, a) => point[a]! - x);
  const r = length(R);
  const moment = source.direction.map((d) => source.length * d);
  nodes.add(DIPOLE, owner, r / medium.speed - start, ...R, r, ...moment, 0, 0, 0);
}

function addFilament(
  nodes: Nodes,
  source: Filament,
  owner: number,
  medium: Medium,
  point: Vec3,
  start: number,
  top: number,
  points: number,
): void {
  const { curve, terms, waveform } = source;
  const rule = gaussLegendre(points);
  const place = new Float64Array(3);
  for (const term of terms) {
    const { factor, delay, slowness, profile } = term;
    const amplitude = (s: number) => factor * (profile ? profile.value(s) : 1);
    const gradient = (s: number) => factor * (profile ? profile.slope(s) : 0);
    const turning = (2 * HALF_PHASE) / (top * (1 / medium.speed + Math.abs(slowness)));
    const longest = Math.min(longestPart(term, waveform.timeScale, medium.speed), turning);
    for (const [piece] of carrying(source)) {
      const view = viewOf(piece, point);
      const bounds = boundsOf(profile, piece.s0, piece.s0 + piece.length, view.nearest);
      for (let m = 1; m < bounds.length; m++)
        for (const [from, to] of halved(bounds[m - 1]!, bounds[m]!, longest, (a, b) => view.distance(a, b)))
          rule.nodes.forEach((x, n) => {
            const s = (from + to + (to - from) * x) / 2;
            const weight = ((to - from) / 2) * rule.weights[n]!;
            view.look(s);
            const seen = delay + slowness * s + view.r / medium.speed - start;
            const { x: rx, y: ry, z: rz, r, sx, sy, sz } = view;
            nodes.add(
              FILAMENT,
              owner,
              seen,
              rx,
              ry,
              rz,
              r,
              sx,
              sy,
              sz,
              weight * amplitude(s),
              weight * gradient(s),
              slowness,
            );
          });
    }
    // What flows off an end was there before with the other sign.
    const ends = [
      [curve.pieces[0]!, 0, -1],
      [curve.pieces.at(-1)!, curve.length, 1],
    ] as const;
    for (const [piece, s, sign] of ends) {
      piece.point(s, place);
      const R = point.map((x, a) => x - place[a]!);
      const r = length(R);
      // The charges of a closed uniform current cancel, at places that are the same but for rounding.
      if (curve.closed && slowness === 0 && !profile) continue;
      const seen = delay + slowness * s + r / medium.speed - start;
      nodes.add(CHARGE, owner, seen, ...R, r, 0, 0, 0, sign * amplitude(s), 0, 0);
    }
  }
}

const length = (v: readonly number[]): number => Math.sqrt(v.reduce((sum, x) => sum + x * x, 0));

/** Ends of a piece, the place nearest to the observer, and what a profile breaks at, ascending. */
function boundsOf(profile: Profile | undefined, from: number, to: number, nearest: number): number[] {
  const inside = [nearest, ...(profile?.breaks ?? [])].filter((s) => s > from && s < to);
  return [...new Set([from, ...inside, to])].sort((a, b) => a - b);
}

/** [from, to] in halves until each is no longer than its distance from the observer, nor than `longest`. */
function* halved(
  from: number,
  to: number,
  longest: number,
  distance: (from: number, to: number) => number,
): Generator<readonly [number, number]> {
  const middle = (from + to) / 2;
  if (to - from <= Math.min(longest, distance(from, to)) || !(middle > from && middle < to)) yield [from, to];
  else {
    yield* halved(from, middle, longest, distance);
    yield* halved(middle, to, longest, distance);
  }
}

/** e^(−pτ) of every node on line k of a contour, by one complex product a line. */
class Rotors {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly #turnRe: Float64Array;
  readonly #turnIm: Float64Array;

  constructor(nodes: Nodes, { damping, step }: Pick<Contour, 'damping' | 'step'>, k = 0) {
    const { delay } = nodes;
    this.re = Float64Array.from(delay, (t) => exp(-damping * t) * cos(k * step * t));
    this.im = Float64Array.from(delay, (t) => -exp(-damping * t) * sin(k * step * t));
    this.#turnRe = Float64Array.from(delay, (t) => cos(step * t));
    this.#turnIm = Float64Array.from(delay, (t) => -sin(step * t));
  }

  next(): void {
    for (let n = 0; n < this.re.length; n++) {
      const [re, im] = [this.re[n]!, this.im[n]!];
      this.re[n] = re * this.#turnRe[n]! - im * this.#turnIm[n]!;
      this.im[n] = re * this.#turnIm[n]! + im * this.#turnRe[n]!;
    }
  }
}

/** The field at p = damping + jω, Σ over nodes; `weights` W(p) by waveform. Overwrites `out`. */
function sumNodes(
  { geometry, kind, waveform }: Nodes,
  { permittivity, permeability, speed }: Medium,
  damping: number,
  omega: number,
  weights: readonly Complex[],
  rotors: Rotors,
  out: Float64Array,
): void {
  out.fill(0);
  const square = damping * damping + omega * omega;
  const [inverseRe, inverseIm] = [damping / square, -omega / square];
  const add = (c: number, re: number, im: number) => {
    out[2 * c]! += re;
    out[2 * c + 1]! += im;
  };
  for (let n = 0; n < kind.length; n++) {
    const base = n * STRIDE;
    const x = geometry[base]!;
    const y = geometry[base + 1]!;
    const z = geometry[base + 2]!;
    const r = geometry[base + 3]!;
    const dx = geometry[base + 4]!;
    const dy = geometry[base + 5]!;
    const dz = geometry[base + 6]!;
    const [wRe, wIm] = weights[waveform[n]!]!;
    const [zRe, zIm] = [rotors.re[n]!, rotors.im[n]!];
    // G W, and h = (1 + λR) G W/R², so that −∇G W = h R
    const gRe = (zRe * wRe - zIm * wIm) / (4 * Math.PI * r);
    const gIm = (zRe * wIm + zIm * wRe) / (4 * Math.PI * r);
    const lRe = (damping * r) / speed;
    const lIm = (omega * r) / speed;
    const hRe = ((1 + lRe) * gRe - lIm * gIm) / (r * r);
    const hIm = ((1 + lRe) * gIm + lIm * gRe) / (r * r);
    // what gives φ and −∇φ: ρ or Q
    let chargeRe = 0;
    let chargeIm = 0;
    if (kind[n] === FILAMENT) {
      const flow = geometry[base + 7]!;
      const gradient = geometry[base + 8]!;
      chargeRe = (geometry[base + 9]! * flow - gradient * inverseRe) / permittivity;
      chargeIm = (-gradient * inverseIm) / permittivity;
      carry(flow);
    } else if (kind[n] === CHARGE) {
      chargeRe = (geometry[base + 7]! * inverseRe) / permittivity;
      chargeIm = (geometry[base + 7]! * inverseIm) / permittivity;
    } else {
      carry(1);
      // φ = −(m·∇G)/(εp), −∇φ = G/(εpR²) [(3 + 3λR + λ²R²) n(n·m) − (1 + λR) m]
      const along = x * dx + y * dy + z * dz;
      const pgRe = (inverseRe * gRe - inverseIm * gIm) / (permittivity * r * r);
      const pgIm = (inverseRe * gIm + inverseIm * gRe) / (permittivity * r * r);
      const nearRe = ((3 + 3 * lRe + lRe * lRe - lIm * lIm) * along) / (r * r);
      const nearIm = ((3 * lIm + 2 * lRe * lIm) * along) / (r * r);
      [x, y, z].forEach((ra, a) => {
        const d = geometry[base + 4 + a]!;
        const re = nearRe * ra - (1 + lRe) * d;
        const im = nearIm * ra - lIm * d;
        add(a, re * pgRe - im * pgIm, re * pgIm + im * pgRe);
      });
      const potentialRe = (inverseRe * hRe - inverseIm * hIm) / permittivity;
      const potentialIm = (inverseRe * hIm + inverseIm * hRe) / permittivity;
      add(PHI, along * potentialRe, along * potentialIm);
      continue;
    }
    const eRe = chargeRe * hRe - chargeIm * hIm;
    const eIm = chargeRe * hIm + chargeIm * hRe;
    add(0, eRe * x, eIm * x);
    add(1, eRe * y, eIm * y);
    add(2, eRe * z, eIm * z);
    add(PHI, chargeRe * gRe - chargeIm * gIm, chargeRe * gIm + chargeIm * gRe);

    /** A = μ I d G, its part −pA of E, and B = μ h d×R */
    function carry(flow: number): void {
      const gain = permeability * flow;
      const [aRe, aIm] = [gain * gRe, gain * gIm];
      const [pRe, pIm] = [damping * aRe - omega * aIm, damping * aIm + omega * aRe];
      const [bRe, bIm] = [gain * hRe, gain * hIm];
      add(A, aRe * dx, aIm * dx);
      add(A + 1, aRe * dy, aIm * dy);
      add(A + 2, aRe * dz, aIm * dz);
      add(0, -pRe * dx, -pIm * dx);
      add(1, -pRe * dy, -pIm * dy);
      add(2, -pRe * dz, -pIm * dz);
      add(3, bRe * (dy * z - dz * y), bIm * (dy * z - dz * y));
      add(4, bRe * (dz * x - dx * z), bIm * (dz * x - dx * z));
      add(5, bRe * (dx * y - dy * x), bIm * (dx * y - dy * x));
    }
  }
}

/** Roundings that a line's sum is worth, generously counted. */
const ROUNDINGS = 32 * Number.EPSILON;

/** Lines of one point back in time. */
class Inverse {
  /** errors of E and B at t = 0, growing as e^(at) */
  readonly #errors: [number, number];
  /** e^(−aT) of the field in later periods, at t = window */
  readonly #alias: [number, number];

  constructor(
    readonly lines: Float64Array,
    readonly contour: Contour,
    readonly medium: Medium,
    quadrature: readonly [number, number],
  ) {
    const { damping, step, lines: count } = contour;
    const perLine = step / Math.PI;
    const sums: [number, number] = [0, 0];
    const tail: [number, number] = [0, 0];
    for (let k = 0; k <= count; k++)
      for (const g of [0, 1] as const) {
        const size = norm(this.lines.subarray(k * WIDTH, (k + 1) * WIDTH), g);
        sums[g] += size;
        if (k >= (1 - contour.tail) * count) tail[g] = Math.max(tail[g], size);
      }
    // B is right relative to |E|/v: directions are rounded.
    const scale: [number, number] = [sums[0], Math.max(sums[1], sums[0] / medium.speed)];
    this.#errors = [0, 1].map(
      (g) => perLine * (quadrature[g]! + ROUNDINGS * scale[g]!) + (tail[g]! * step * count) / Math.PI,
    ) as [number, number];
    const late = ALIAS ** (1 - 1 / PERIODS) * damping;
    this.#alias = [late * norm(lines.subarray(0, WIDTH), 0), late * norm(lines.subarray(0, WIDTH), 1)];
  }

  /** @param times s, from the first arrival on: before it the field is 0, the contour being free to move to the right */
  at(times: readonly number[]): SpectralValue[] {
    return times.map((t) => {
      const { damping, step, lines: count } = this.contour;
      const sum = new Float64Array(QUANTITIES);
      if (t > 0) {
        const [turnRe, turnIm] = [cos(step * t), sin(step * t)];
        let [re, im] = [1, 0];
        for (let k = 0; k <= count; k++) {
          const half = k === 0 ? 0.5 : 1;
          for (let c = 0; c < QUANTITIES; c++) {
            const at = k * WIDTH + 2 * c;
            sum[c]! += half * (this.lines[at]! * re - this.lines[at + 1]! * im);
          }
          [re, im] = [re * turnRe - im * turnIm, re * turnIm + im * turnRe];
        }
      }
      const gain = (exp(damping * t) * step) / Math.PI;
      const vector = (c: number): Vec3 => [gain * sum[c]!, gain * sum[c + 1]!, gain * sum[c + 2]!];
      const B = vector(3);
      const { permeability } = this.medium;
      const error = (g: 0 | 1) => (t > 0 ? exp(damping * t) * this.#errors[g] + this.#alias[g] : 0);
      return {
        E: vector(0),
        B,
        H: [B[0] / permeability, B[1] / permeability, B[2] / permeability],
        phi: gain * sum[PHI]!,
        A: vector(A),
        errorE: error(0),
        errorH: error(1) / permeability,
      };
    });
  }
}
