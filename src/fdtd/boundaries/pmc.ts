import type { Boundary } from '../../scenario/model.ts';
import type { BoundaryMethod } from './boundary.ts';

/**
 * Perfect magnetic conductor: tangential H = 0 on the wall, which carries tangential E like any plane inside. By image
 * theory (any textbook), tangential H half a cell behind the wall is minus that half a cell before it,
 *   H(−½) = −H(½),
 * for which the lattice has one cell more behind the face. Reflects everything, E with its sign kept: with PEC, the two
 * halves of a symmetric problem. Stable wherever Yee's scheme is: it is the even half of a lattice twice as wide.
 */
export const pmc: BoundaryMethod<Extract<Boundary, { type: 'pmc' }>> = {
  wall: () => ({ type: 'mirror' }),
};
