import type { Boundary } from './model.ts';
import { CPML_DEFAULTS, HIGDON_DEFAULTS, LIAO_DEFAULTS, SPLIT_PML_DEFAULTS } from './schema.ts';

/** Cells of the lattice that a boundary takes up behind its face, outside the working box. */
export function cellsBehind(boundary: Boundary): number {
  switch (boundary.type) {
    case 'cpml':
    case 'splitPml':
      return boundary.layers;
    case 'pmc':
      // Its wall lies on the face; the fields' mirror image takes a cell more.
      return 1;
    default:
      return 0;
  }
}

/** How far inward from the outer wall of the lattice a boundary looks, cells. */
export function cellsRead(boundary: Boundary): number {
  switch (boundary.type) {
    case 'liao':
      return 4;
    case 'higdon2':
    case 'pmc':
      return 2;
    default:
      return 1;
  }
}

/** Whether a boundary has its default parameters, whatever its layers and α: what it sends back is known of those alone. */
export function isUsual(boundary: Boundary): boolean {
  const given: Readonly<Record<string, unknown>> = boundary;
  const defaults = { cpml: CPML_DEFAULTS, splitPml: SPLIT_PML_DEFAULTS, higdon2: HIGDON_DEFAULTS, liao: LIAO_DEFAULTS };
  const expected = boundary.type in defaults ? defaults[boundary.type as keyof typeof defaults] : {};
  // An angle in degrees is π/4 but for its last digit.
  const same = (a: unknown, b: unknown): boolean =>
    Array.isArray(b) ? b.every((x, n) => same((a as unknown[])[n], x)) : Math.abs(Number(a) - Number(b)) < 1e-9;
  return Object.entries(expected).every(([key, value]) => key === 'layers' || same(given[key], value));
}
