import type { Boundary } from '../../scenario/model.ts';
import type { BoundaryMethod } from './boundary.ts';

/**
 * Perfect electric conductor: tangential E = 0 on the wall. It reflects everything: the worst case, for scale, and with
 * a lattice too large for any reflection to return it is also how free space is marched. Stable wherever Yee's scheme is.
 */
export const pec: BoundaryMethod<Extract<Boundary, { type: 'pec' }>> = {
  wall: () => ({ type: 'held' }),
};
