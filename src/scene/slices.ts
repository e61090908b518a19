import { type Slice, sliceOf } from '../run/planes.ts';
import { distanceToSources } from '../scenario/distance.ts';
import type { Axis, Plane, Scenario } from '../scenario/model.ts';
import { cellCentre } from '../scenario/sites.ts';

/** A slice with what pictures need to know of its cells. */
export interface ShownSlice extends Slice {
  /** of each cell's middle from the nearest source, m */
  readonly distance: Float32Array;
}

/** At most so many planes are shown. */
export const MOST_PLANES = 3;

/** The planes to show: the scenario's first three, or one through the middle of the box where it has none. */
export function planesShown({ planes, grid }: Scenario): Plane[] {
  if (planes.length > 0) return planes.slice(0, MOST_PLANES);
  const normal: Axis = 1;
  return [{ name: 'xz', normal, at: (grid.box.from[normal] + grid.box.to[normal]) / 2 }];
}

/** The slice that shows a plane, with its cells' distances from the sources. */
export function shownSlice(scenario: Scenario, plane: Plane): ShownSlice {
  const slice = sliceOf(scenario, plane);
  const distance = Float32Array.from({ length: slice.nu * slice.nv }, (_, p) =>
    distanceToSources(scenario.sources, cellCentre(scenario.grid, slice.cells, p)),
  );
  return { ...slice, distance };
}
