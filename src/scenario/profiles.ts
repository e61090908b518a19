import { cos, exp, sin } from '../elementary/elementary.ts';
import { type ArcPiece, type LinePiece, linePiece } from './curve.ts';
import type { Filament, Profile, Vec3 } from './model.ts';

/** e^(−s/decay), or e^(−(length − s)/decay) for a wave that travels backward: what is left after its way along the wire. */
export function decaying(length: number, decay: number, direction: 'forward' | 'backward'): Profile {
  const sign = direction === 'forward' ? -1 : 1;
  const value = (s: number) => exp((sign < 0 ? -s : s - length) / decay);
  return {
    value,
    slope: (s) => (sign / decay) * value(s),
    breaks: [],
    support: [0, length],
    scale: decay,
  };
}

/**
 * sin(k(L/2 − |s − L/2|)): the current of a thin centre-fed wire of length L, zero at both ends (Balanis, Antenna Theory,
 * 4th ed., §4.5, from memory). Its slope jumps at the middle unless kL/2 is an odd multiple of π/2.
 * @param wavenumber k, rad/m
 */
export function standing(length: number, wavenumber: number): Profile {
  const fromEnd = (s: number) => (s <= length / 2 ? s : length - s);
  return {
    value: (s) => sin(wavenumber * fromEnd(s)),
    slope: (s) => (s <= length / 2 ? 1 : -1) * wavenumber * cos(wavenumber * fromEnd(s)),
    breaks: [length / 2],
    support: [0, length],
    scale: 1 / wavenumber,
  };
}

/**
 * The straight lines from 0 at stations[m − 1] to 1 at stations[m] and back to 0 at stations[m + 1]: with them currents
 * that are known at stations are interpolated.
 * @param stations arc lengths, ascending; the first and the last are the filament's ends
 */
export function hat(stations: readonly number[], m: number): Profile {
  const at = stations[m]!;
  const before = stations[m - 1] ?? at;
  const after = stations[m + 1] ?? at;
  const inside = (s: number) => s >= before && s <= after;
  return {
    value: (s) => (!inside(s) ? 0 : s < at ? (s - before) / (at - before) : s > at ? (after - s) / (after - at) : 1),
    slope: (s) => (!inside(s) ? 0 : s < at ? 1 / (at - before) : after > at ? -1 / (after - at) : 1 / (at - before)),
    breaks: [before, at, after].filter((s) => s > stations[0]! && s < stations.at(-1)!),
    support: [before, after],
    scale: Math.max(at - before, after - at),
  };
}

/**
 * The pieces of a filament along which current flows, cut off where the profiles of all its terms have ended, each with its
 * number in the curve. Circles are not cut.
 */
export function* carrying({ curve, terms }: Filament): Generator<readonly [LinePiece | ArcPiece, number]> {
  const supports = terms.map(({ profile }) => profile?.support ?? [0, curve.length]);
  const first = Math.min(...supports.map(([from]) => from!));
  const last = Math.max(...supports.map(([, to]) => to!));
  for (const [n, piece] of curve.pieces.entries()) {
    const from = Math.max(first, piece.s0);
    const to = Math.min(last, piece.s0 + piece.length);
    if (!(to > from)) continue;
    yield [piece.kind === 'line' && to - from < piece.length ? cut(piece, from, to) : piece, n];
  }
}

function cut(piece: LinePiece, from: number, to: number): LinePiece {
  const end = piece.s0 + piece.length;
  const place = new Float64Array(3);
  const at = (s: number): Vec3 => {
    piece.point(s, place);
    return [place[0]!, place[1]!, place[2]!];
  };
  return linePiece(from === piece.s0 ? piece.from : at(from), to === end ? piece.to : at(to), from);
}
