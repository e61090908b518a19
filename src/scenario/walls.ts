import type { Boundary } from './model.ts';

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
