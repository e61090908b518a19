import { cos, exp, sin } from '../elementary/elementary.ts';
import type { Profile } from './model.ts';

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
