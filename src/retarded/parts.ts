import type { ArcPiece, LinePiece } from '../scenario/curve.ts';
import type { Medium, Source, Vec3, WaveTerm } from '../scenario/model.ts';
import { carrying } from '../scenario/profiles.ts';
import { CHARGE, COEFFICIENTS, CURRENT, constantsOf, dipoleElement, MAGNETIC, SLOPE } from './elements.ts';
import { refuseOnSource } from './field.ts';
import { delayRate, fronts, gradedCuts, longestPart } from './panels.ts';
import { type PieceView, viewOf } from './pieceView.ts';
import { prepareSources } from './prepare.ts';
import { gaussLegendre } from './quadrature.ts';
import { TermList, WaveformSet } from './terms.ts';

/**
 * The exact field by how it falls off. Every element I ds of current is a Hertzian dipole, whose field is
 *   4πε E = [3n(n·d) − d] q/R³  +  [3n(n·d) − d] I/(vR²)  +  [n(n·d) − d] I′/(v²R)
 *   4π H  =                        (d×n) I/R²             +  (d×n) I′/(vR)
 *            near                  induction                 radiation
 * (Balanis, Antenna Theory, 4th ed., §4.2, from memory, for any waveform), and each part is summed over all elements.
 * The sum of the parts is the field. Parts are of elements, not of charge and current: along a wire inner charges cancel
 * in the sum only.
 */
export interface FieldParts {
  readonly E: { readonly near: Vec3; readonly induction: Vec3; readonly radiation: Vec3 };
  readonly H: { readonly induction: Vec3; readonly radiation: Vec3 };
  /** bounds on the Euclidean norm of the error of every part, V/m and A/m */
  readonly errorE: number;
  readonly errorH: number;
}

/** Points of the rule on each part of a wire, and of the weaker one that tells its error. */
const POINTS = 16;
const FEWER_POINTS = 11;

/** Three parts of E, then of B, three components each. */
const WIDTH = 18;

/**
 * The parts of the field at points and instants, SI units.
 * @throws (from what it returns) RangeError where the point lies on a source, naming it
 */
export function partsOf(sources: readonly Source[], medium: Medium): (point: Vec3, t: number) => FieldParts {
  const elements = new Elements(sources, medium);
  return (point, t) => {
    const value = elements.at(point, POINTS, t).partsAt(t);
    const other = elements.at(point, FEWER_POINTS, t).partsAt(t);
    let electric = 0;
    let magnetic = 0;
    for (let c = 0; c < WIDTH; c++) {
      const off = (value[c]! - other[c]!) ** 2;
      if (c < WIDTH / 2) electric += off;
      else magnetic += off;
    }
    const rounding = 64 * Number.EPSILON * Math.sqrt(value.reduce((sum, v, c) => sum + (c < WIDTH / 2 ? v * v : 0), 0));
    const vector = (c: number): Vec3 => [value[c]!, value[c + 1]!, value[c + 2]!];
    const { permeability, impedance } = medium;
    const magneticVector = (c: number): Vec3 => vector(c).map((b) => b / permeability) as unknown as Vec3;
    return {
      E: { near: vector(0), induction: vector(3), radiation: vector(6) },
      H: { induction: magneticVector(12), radiation: magneticVector(15) },
      errorE: Math.sqrt(electric) + rounding,
      errorH: Math.sqrt(magnetic) / permeability + rounding / impedance,
    };
  };
}

/** The largest |E| of each part at a point over some instants, V/m. */
export interface PartPeaks {
  readonly near: number;
  readonly induction: number;
  readonly radiation: number;
}

/**
 * Peaks over instants of the parts of E at points: one set of elements serves all instants, so that a kink costs some
 * accuracy (a part in a thousand).
 * @throws (from what it returns) RangeError where the point lies on a source, naming it
 */
export function partPeaksOf(
  sources: readonly Source[],
  medium: Medium,
): (point: Vec3, instants: readonly number[]) => PartPeaks {
  const elements = new Elements(sources, medium);
  return (point, instants) => {
    const here = elements.at(point, POINTS, null);
    const squares = [0, 0, 0];
    for (const t of instants) {
      const value = here.partsAt(t);
      for (let part = 0; part < 3; part++) {
        let square = 0;
        for (let a = 0; a < 3; a++) square += value[3 * part + a]! ** 2;
        squares[part] = Math.max(squares[part]!, square);
      }
    }
    const [near, induction, radiation] = squares.map(Math.sqrt) as [number, number, number];
    return { near, induction, radiation };
  };
}

/** Sources as dipole elements. */
class Elements {
  readonly #set = new WaveformSet();
  readonly #owners: readonly number[];
  readonly #prepared: ReturnType<typeof prepareSources>;
  readonly #element = new Float64Array(COEFFICIENTS);

  constructor(
    readonly sources: readonly Source[],
    readonly medium: Medium,
  ) {
    this.#owners = sources.map(({ waveform }) => this.#set.index(waveform));
    this.#prepared = prepareSources(sources, medium, 'quadrature');
  }

  /** The elements as a point sees them; cut at the fronts of kinks that are felt at t, if there is one. */
  at(point: Vec3, points: number, t: number | null): Seen {
    refuseOnSource(this.#prepared, point);
    const k = constantsOf(this.medium);
    const seen = new Seen(this.#set);
    this.sources.forEach((source, n) => {
      const owner = this.#owners[n]!;
      if (source.type === 'dipole') {
        const [x, y, z] = source.at.map((s, a) => point[a]! - s) as [number, number, number];
        const moment = source.direction.map((d) => source.length * d) as unknown as Vec3;
        dipoleElement(k, x, y, z, moment, this.#element);
        seen.list.add(this.#element, 1, Math.sqrt(x * x + y * y + z * z) / k.speed, owner, 0);
        return;
      }
      for (const [piece] of carrying(source))
        for (const term of source.terms) this.#addPiece(seen, piece, term, owner, point, points, t);
    });
    return seen;
  }

  #addPiece(
    seen: Seen,
    piece: LinePiece | ArcPiece,
    term: WaveTerm,
    owner: number,
    point: Vec3,
    points: number,
    t: number | null,
  ): void {
    const k = constantsOf(this.medium);
    const { factor, delay, slowness, profile } = term;
    const waveform = this.#set.list[owner]!;
    const view = viewOf(piece, point);
    const amplitude = (s: number) => factor * (profile ? profile.value(s) : 1);
    const inside = (s: number) => s > view.start && s < view.end;
    const stations = [view.start, view.end, view.nearest, ...(profile?.breaks ?? [])].filter(
      (s) => inside(s) || s === view.start || s === view.end,
    );
    if (t !== null)
      for (const kink of waveform.kinks) stations.push(...fronts(view, delay, slowness, k.speed, t - kink));
    stations.sort((a, b) => a - b);
    const longest = longestPart(term, waveform.timeScale / 2, k.speed);
    const cuts: number[] = [];
    for (let m = 1; m < stations.length; m++) gradedCuts(view, stations[m - 1]!, stations[m]!, 0.5, longest, cuts);
    const { nodes, weights } = gaussLegendre(points);
    let from = view.start;
    for (const to of cuts) {
      const half = (to - from) / 2;
      for (let m = 0; half > 0 && m < points; m++) {
        const s = from + half * (1 + nodes[m]!);
        this.#look(view, s);
        seen.list.add(
          this.#element,
          half * weights[m]! * amplitude(s),
          delay + slowness * s + view.r / k.speed,
          owner,
          0,
        );
      }
      from = to;
    }
    // A jump J of the current is J δ in its slope: J D/|dτ/ds| at the front.
    const jump = waveform.kinks.length > 0 ? waveform.value(0) : 0;
    if (jump === 0 || t === null) return;
    for (const s of fronts(view, delay, slowness, k.speed, t)) {
      const rate = delayRate(view, s, slowness, k.speed);
      if (rate === 0) continue;
      this.#look(view, s);
      for (let c = 0; c < 3; c++) {
        seen.fronts[c]! += (jump * amplitude(s) * this.#element[SLOPE + c]!) / rate;
        seen.fronts[3 + c]! += (jump * amplitude(s) * this.#element[SLOPE + MAGNETIC + c]!) / rate;
      }
    }
  }

  /** One metre of 1 A at s. */
  #look(view: PieceView, s: number): void {
    view.look(s);
    dipoleElement(constantsOf(this.medium), view.x, view.y, view.z, [view.sx, view.sy, view.sz], this.#element);
  }
}

/** Elements as one point sees them. */
class Seen {
  readonly list = new TermList();
  /** radiation of jumps, of E and of B */
  readonly fronts = new Float64Array(6);

  constructor(readonly waveforms: WaveformSet) {}

  partsAt(t: number): Float64Array {
    const { list, fronts: impulses } = this;
    const out = new Float64Array(WIDTH);
    const wave = new Float64Array(3);
    for (let n = 0; n < list.count; n++) {
      const tau = t - list.delay[n]!;
      if (tau < 0) continue;
      this.waveforms.list[list.waveform[n]!]!.at(tau, 2, wave);
      const base = n * COEFFICIENTS;
      for (const [part, kind] of PARTS.entries())
        for (let a = 0; a < 3; a++) {
          out[3 * part + a]! += wave[part]! * list.coefficient[base + kind + a]!;
          out[9 + 3 * part + a]! += wave[part]! * list.coefficient[base + kind + MAGNETIC + a]!;
        }
    }
    for (let a = 0; a < 3; a++) {
      out[6 + a]! += impulses[a]!;
      out[15 + a]! += impulses[3 + a]!;
    }
    return out;
  }
}

/** What q, w and w′ make: near, induction, radiation. */
const PARTS = [CHARGE, CURRENT, SLOPE] as const;
