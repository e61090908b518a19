import { formatQuantity } from '../../elementary/quantity.ts';
import { type Bounds, distanceToSources, sourceBounds } from '../distance.ts';
import type { Axis, Grid, Observer, Plane, Source, Vec3 } from '../model.ts';
import { parts, type Report, uniqueNames } from '../reading.ts';
import { LIMITS, observerSchema, planeSchema } from '../schema.ts';
import { CELL_SLACK, observerCell } from '../sites.ts';

/** Observers by name; those on a source are reported, those outside the box marked. */
export function buildObservers(
  value: unknown,
  grid: Grid | undefined,
  all: readonly Source[],
  report: Report,
): Observer[] {
  const given = parts(observerSchema, value, LIMITS.observers);
  const names = uniqueNames(given, () => 'observer', 'observers', report);
  const sources = all.map((source) => ({ source, bounds: sourceBounds(source) }));
  return given.map(({ index, given: { at } }, k) => {
    const inside = grid !== undefined && at.every((x, a) => x >= grid.box.from[a]! && x <= grid.box.to[a]!);
    if (grid) {
      const places = inside ? yeeSites(grid, observerCell(grid, at)) : [at];
      if (places.some((p) => isOnSource(p, sources, CELL_SLACK * Math.max(...grid.cellSize))))
        report(
          ['observers', index, 'at'],
          `puts “${names[k]}” on a source${inside ? ' (at least one component of its Yee cell)' : ''}, where the field is infinite; move it a cell away`,
        );
    }
    return { name: names[k]!, at, inside };
  });
}

function isOnSource(p: Vec3, sources: readonly { source: Source; bounds: Bounds }[], slack: number): boolean {
  return sources.some(
    ({ source, bounds: { from, to } }) =>
      p.every((x, a) => x > from[a]! - slack && x < to[a]! + slack) && distanceToSources([source], p) < slack,
  );
}

/** Where the six components of a cell live. */
function yeeSites(grid: Grid, cell: readonly [number, number, number]): Vec3[] {
  const along = (a: Axis, offset: number) => grid.box.from[a] + (cell[a] + offset) * grid.cellSize[a];
  return (
    [
      [1, 0, 0],
      [0, 1, 0],
      [0, 0, 1],
      [0, 1, 1],
      [1, 0, 1],
      [1, 1, 0],
    ] as const
  ).map(([x, y, z]): Vec3 => [along(0, x / 2), along(1, y / 2), along(2, z / 2)]);
}

/** Planes by name; those outside the box are reported. */
export function buildPlanes(value: unknown, grid: Grid | undefined, report: Report): Plane[] {
  const given = parts(planeSchema, value, LIMITS.planes);
  const names = uniqueNames(given, () => 'plane', 'planes', report);
  return given.map(({ index, given: { normal: letter, at } }, k) => {
    const normal = 'xyz'.indexOf(letter) as Axis;
    const [from, to] = [grid?.box.from[normal] ?? at, grid?.box.to[normal] ?? at];
    if (at < from || at > to)
      report(
        ['planes', index, 'at'],
        `is ${formatQuantity(at, 'm')}; a plane must lie in the box, here ${letter} from ${formatQuantity(from, 'm')} to ${formatQuantity(to, 'm')}; move it or enlarge grid.box`,
      );
    return { name: names[k]!, normal, at };
  });
}
