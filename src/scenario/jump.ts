import type { Waveform } from './waveform.ts';

/** Jumps, relative to peak, above which a note is due, and above which a file must allow it. */
export const JUMP_NOTED = 1e-7;
export const JUMP_REFUSED = 1e-3;

/**
 * Order to be expected of a second-order grid for a field of smoothness k (in L2: a jump of the field has k = ½, a jump
 * of its slope 3/2): 2k/3. Brenner, Thomée, Wahlbin, "Besov Spaces and Applications to Difference Methods for Initial
 * Value Problems", 1975 (from memory); measured 0.34 for a double-exponential onset, whose radiated field jumps.
 */
export function orderOfJump(jump: number): Waveform['expectedOrder'] {
  if (jump > JUMP_REFUSED)
    return {
      order: -1 / 3,
      reason: 'the current jumps at t = 0, so its radiated field is an impulse that no grid resolves',
    };
  if (jump > JUMP_NOTED)
    return { order: 2, reason: 'smooth but for a small jump at t = 0, whose front is an error of its own that stays' };
  return { order: 2, reason: 'smooth' };
}

/**
 * The order of the grid's error for a current that need not be smooth where it begins: its field jumps with its slope.
 * @param jump of the current at its start, part of its peak; `bend`: of its slope, part of the steepest
 * @param whose slope jumps and where, for people: "the table jumps at its first sample"
 */
export function orderOfOnset(jump: number, bend: number, whose: string): Waveform['expectedOrder'] {
  return jump <= JUMP_REFUSED && bend > JUMP_REFUSED
    ? { order: 0.34, reason: `the slope of ${whose}, so its radiated field does` }
    : orderOfJump(jump);
}
