import type { GriddedSources, Pairs } from '../gridding/edges.ts';
import { type ArcPiece, type LinePiece, linePiece } from '../scenario/curve.ts';
import type { Filament, Medium, Source, Vec3, WaveTerm } from '../scenario/model.ts';
import { carrying } from '../scenario/profiles.ts';
import type { Waveform } from '../scenario/waveform.ts';
import { WaveformSet } from './terms.ts';
import type { Wave } from './waves.ts';

/** How filaments are integrated: closed form where there is one, or quadrature throughout. */
export type Method = 'best' | 'quadrature';

/** Part of a filament whose field is an integral along it; its end charges are not part of it. */
export interface Integral {
  readonly piece: LinePiece | ArcPiece;
  /** in order of slowness */
  readonly terms: readonly WaveTerm[];
  readonly waveform: number;
  /** in closed form elsewhere but for its potentials */
  readonly potentialsOnly: boolean;
  /** for messages: source “cable”, segment 3 */
  readonly label: string;
}

export interface PointCharge {
  readonly at: Vec3;
  /** Q(t) = factor · q(t − delay) */
  readonly factor: number;
  readonly delay: number;
  readonly waveform: number;
  readonly label: string;
}

export interface PointDipole {
  readonly at: Vec3;
  /** for 1 A, m */
  readonly moment: Vec3;
  readonly waveform: number;
  readonly label: string;
}

/** The sources taken apart into what the integrator knows. */
export interface Prepared {
  /** whether the front of a jump in current counts: an impulse in w′ (not for gridded currents, see gridded.ts) */
  readonly impulses: boolean;
  readonly medium: Medium;
  readonly waveforms: readonly Waveform[];
  readonly waves: readonly Wave[];
  readonly integrals: readonly Integral[];
  readonly charges: readonly PointCharge[];
  readonly dipoles: readonly PointDipole[];
}

/** Slownesses this close to 1/v, relatively, are full speed: the rounding of 1/v. */
const FULL_SPEED = 8 * Number.EPSILON;

/**
 * Takes sources apart: full-speed waves on straight pieces (closed form, unless `method` is 'quadrature'), other
 * filaments (integrals), end charges, dipoles. End charges of equal place, delay and waveform are summed, so that those
 * of a closed uniform loop, of an open end where a wave is reflected, and of two arms at their feed cancel exactly.
 */
export function prepareSources(sources: readonly Source[], medium: Medium, method: Method): Prepared {
  const waveforms = new WaveformSet();
  const waves: Wave[] = [];
  const integrals: Integral[] = [];
  const charges: PointCharge[] = [];
  const dipoles: PointDipole[] = [];
  for (const source of sources) {
    const waveform = waveforms.index(source.waveform);
    if (source.type === 'dipole') {
      const { at, direction, length } = source;
      const moment: Vec3 = [length * direction[0], length * direction[1], length * direction[2]];
      dipoles.push({ at, moment, waveform, label: `source “${source.name}”` });
    } else {
      takeApart(source, medium, method, waveform, waves, integrals);
      charges.push(...endCharges(source, waveform));
    }
  }
  return { impulses: true, medium, waveforms: waveforms.list, waves, integrals, charges: merged(charges), dipoles };
}

function takeApart(
  source: Filament,
  medium: Medium,
  method: Method,
  waveform: number,
  waves: Wave[],
  integrals: Integral[],
): void {
  for (const [piece, n] of carrying(source)) {
    const label = `source “${source.name}”, segment ${n + 1}`;
    const others: WaveTerm[] = [];
    const fullSpeed: WaveTerm[] = [];
    for (const term of source.terms.toSorted((p, q) => p.slowness - q.slowness)) {
      if (isOff(term, piece)) continue;
      const full = Math.abs(Math.abs(term.slowness) * medium.speed - 1) <= FULL_SPEED;
      if (method === 'best' && piece.kind === 'line' && full && !term.profile) {
        fullSpeed.push(term);
        const { s0, length, from, to, direction } = piece;
        const common = { length, waveform, label };
        if (term.slowness > 0)
          waves.push({
            ...common,
            from,
            direction,
            factor: term.factor,
            delay: term.delay + term.slowness * s0,
          });
        else
          waves.push({
            ...common,
            from: to,
            direction: [-direction[0], -direction[1], -direction[2]],
            factor: -term.factor,
            delay: term.delay + term.slowness * (s0 + length),
          });
      } else others.push(term);
    }
    if (others.length > 0) integrals.push({ piece, terms: others, waveform, potentialsOnly: false, label });
    if (fullSpeed.length > 0) integrals.push({ piece, terms: fullSpeed, waveform, potentialsOnly: true, label });
  }
}

/** Whether a term's profile is 0 all along a piece. */
const isOff = ({ profile }: WaveTerm, { s0, length }: LinePiece | ArcPiece): boolean =>
  profile !== undefined && (profile.support[1] <= s0 || profile.support[0] >= s0 + length);

/** Q = −∫I at the first point and +∫I at the last: what flows off an end was there before with the other sign. */
function endCharges(source: Filament, waveform: number): PointCharge[] {
  const { pieces, length, closed } = source.curve;
  const end = new Float64Array(3);
  const pointAt = (piece: LinePiece | ArcPiece, s: number): Vec3 => {
    piece.point(s, end);
    return [end[0]!, end[1]!, end[2]!];
  };
  const first = pieces[0]!;
  const last = pieces.at(-1)!;
  const start = first.kind === 'line' ? first.from : pointAt(first, 0);
  const stop = closed ? start : last.kind === 'line' ? last.to : pointAt(last, length);
  return source.terms.flatMap(({ factor, delay, slowness, profile }) => {
    const [left, arrived] = profile ? [factor * profile.value(0), factor * profile.value(length)] : [factor, factor];
    return [
      { at: start, factor: -left, delay, waveform, label: `source “${source.name}”, first point` },
      {
        at: stop,
        factor: arrived,
        delay: delay + slowness * length,
        waveform,
        label: `source “${source.name}”, last point`,
      },
    ];
  });
}

/** Charges at the same place, delays equal to rounding, summed; what cancels is dropped. */
function merged(charges: readonly PointCharge[]): PointCharge[] {
  const places = new Map<string, PointCharge[]>();
  for (const charge of charges) {
    const key = `${charge.waveform} ${charge.at.join(' ')}`;
    const here = places.get(key) ?? [];
    places.set(key, here);
    const longest = charges.reduce((most, { delay }) => Math.max(most, Math.abs(delay)), 0);
    const same = here.findIndex(({ delay }) => Math.abs(delay - charge.delay) <= 8 * Number.EPSILON * longest);
    if (same < 0) here.push(charge);
    else here[same] = { ...here[same]!, factor: here[same]!.factor + charge.factor };
  }
  return [...places.values()].flat().filter(({ factor }) => factor !== 0);
}

/**
 * Gridded currents as the integrator knows them: each edge a uniform filament, each node a charge.
 * @param origin position of node (0, 0, 0), m
 */
export function prepareGridded(gridded: GriddedSources, origin: Vec3, cellSize: Vec3, medium: Medium): Prepared {
  const { edges, charges } = gridded;
  const waveforms = new WaveformSet();
  const place = (pairs: Pairs, n: number): Vec3 => [
    origin[0] + pairs.node[3 * n]! * cellSize[0],
    origin[1] + pairs.node[3 * n + 1]! * cellSize[1],
    origin[2] + pairs.node[3 * n + 2]! * cellSize[2],
  ];
  const indices = (pairs: Pairs, n: number) => `(${pairs.node.subarray(3 * n, 3 * n + 3).join(', ')})`;
  const integrals: Integral[] = [];
  for (let e = 0; e < edges.count; e++) {
    const axis = edges.axis[e]!;
    const from = place(edges, e);
    const to: Vec3 = [from[0], from[1], from[2]].map((x, a) => (a === axis ? x + cellSize[a]! : x)) as unknown as Vec3;
    const byWaveform = new Map<number, WaveTerm[]>();
    for (let m = edges.pairStart[e]!; m < edges.pairStart[e + 1]!; m++) {
      const waveform = waveforms.index(edges.waveforms[edges.waveform[m]!]!);
      const terms = byWaveform.get(waveform) ?? [];
      byWaveform.set(waveform, terms);
      terms.push({ factor: edges.weight[m]!, delay: edges.delay[m]!, slowness: 0 });
    }
    const piece = linePiece(from, to, 0);
    const label = `the grid edge along ${'xyz'[axis]} at node ${indices(edges, e)}`;
    for (const [waveform, terms] of byWaveform)
      integrals.push({ piece, terms, waveform, potentialsOnly: false, label });
  }
  const nodes: PointCharge[] = [];
  for (let n = 0; n < charges.count; n++) {
    const at = place(charges, n);
    const label = `the charge at grid node ${indices(charges, n)}`;
    for (let m = charges.pairStart[n]!; m < charges.pairStart[n + 1]!; m++) {
      const waveform = waveforms.index(charges.waveforms[charges.waveform[m]!]!);
      nodes.push({ at, factor: charges.weight[m]!, delay: charges.delay[m]!, waveform, label });
    }
  }
  return { impulses: false, medium, waveforms: waveforms.list, waves: [], integrals, charges: nodes, dipoles: [] };
}
