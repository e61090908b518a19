import type { Boundary } from '../../scenario/model.ts';
import type { BoundaryMethod } from './boundary.ts';
import { cpml } from './cpml.ts';
import { mur1 } from './mur1.ts';
import { pec } from './pec.ts';

/** Every boundary there is, by its name in a scenario. */
const METHODS = { pec, mur1, cpml } satisfies {
  [T in Boundary['type']]: BoundaryMethod<Extract<Boundary, { type: T }>>;
};

/** The method of a boundary. */
export function methodOf(boundary: Boundary): BoundaryMethod {
  return METHODS[boundary.type] as BoundaryMethod;
}
