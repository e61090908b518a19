import { fieldOf } from '../retarded/field.ts';
import { prepareSources } from '../retarded/prepare.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import type { ShownSlice } from '../scene/slices.ts';

/** Samples along a side: potentials of full-speed waves are integrals, a hundred times dearer than their fields. */
const SIDE = 30;

/** Good for three digits, which is what a picture tells. */
const TOLERANCE = 1e-4;

/**
 * φ (V) and A (Wb/m) of the exact field on a slice at one instant, at the middle of the cells' sides in the plane; every
 * few cells share one value.
 * @param t s
 * @returns values[quantity·cells + cell], φ, Ax, Ay, Az; NaN on a source
 */
export function potentialsOn(
  scenario: Scenario,
  { nu, nv, axes, normal, layer, stride }: ShownSlice,
  t: number,
): Float32Array {
  const { sources, medium, grid } = scenario;
  const at = fieldOf(prepareSources(sources, medium, 'best'), { tolerance: TOLERANCE });
  const all = nu * nv;
  const values = new Float32Array(4 * all).fill(Number.NaN);
  const step = Math.max(1, Math.ceil(Math.max(nu, nv) / SIDE));
  const place: [number, number, number] = [0, 0, 0];
  const along = (axis: number, index: number) => grid.box.from[axis]! + index * grid.cellSize[axis]!;
  for (let j0 = 0; j0 < nv; j0 += step)
    for (let i0 = 0; i0 < nu; i0 += step) {
      place[normal] = along(normal, layer);
      place[axes[0]] = along(axes[0], (i0 + step / 2) * stride);
      place[axes[1]] = along(axes[1], (j0 + step / 2) * stride);
      const found = valueAt(at, [...place] as unknown as Vec3, t);
      for (let j = j0; j < Math.min(nv, j0 + step); j++)
        for (let i = i0; i < Math.min(nu, i0 + step); i++)
          found.forEach((value, quantity) => {
            values[quantity * all + j * nu + i] = value;
          });
    }
  return values;
}

function valueAt(at: ReturnType<typeof fieldOf>, place: Vec3, t: number): readonly number[] {
  try {
    const { phi, A } = at(place, t);
    return [phi, ...A];
  } catch (error) {
    // On a source the potential is infinite: a hole in the picture.
    if (error instanceof RangeError) return [Number.NaN, Number.NaN, Number.NaN, Number.NaN];
    throw error;
  }
}
