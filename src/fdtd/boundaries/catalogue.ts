import type { Boundary } from '../../scenario/model.ts';
import type { BoundaryMethod } from './boundary.ts';
import { cpml } from './cpml.ts';
import { higdon2 } from './higdon2.ts';
import { liao } from './liao.ts';
import { mur1 } from './mur1.ts';
import { mur2 } from './mur2.ts';
import { pec } from './pec.ts';
import { pmc } from './pmc.ts';
import { splitPml } from './splitPml.ts';

/** Every boundary there is, by its name in a scenario. */
const METHODS = { pec, pmc, mur1, mur2, higdon2, liao, cpml, splitPml } satisfies {
  [T in Boundary['type']]: BoundaryMethod<Extract<Boundary, { type: T }>>;
};

/** The method of a boundary. */
export function methodOf(boundary: Boundary): BoundaryMethod {
  return METHODS[boundary.type] as BoundaryMethod;
}
