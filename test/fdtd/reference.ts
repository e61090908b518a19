/**
 * The Yee scheme once more, as plainly as it can be said: one cell at a time, one step after the other, no vectors, no
 * tiles, no threads. It rounds after every operation as the kernel does, so the kernel must give the very same bits.
 */
import type { LinearWall, Stretch, Wall } from '../../src/fdtd/boundaries/boundary.ts';
import { sourceVoltage } from '../../src/fdtd/currents.ts';
import { AXES, FACES_OF, type Layout, layoutOf, stretchAt, wallOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import type { Axis } from '../../src/scenario/model.ts';

type Reals = Float32Array | Float64Array;

export interface Reference {
  /** ex ey ez hx hy hz at nodes (i, j, k): i + (nx + 1)(j + (ny + 1)k) */
  readonly fields: readonly Reals[];
  /** marches one step */
  step(): void;
}

export function reference(problem: GridProblem): Reference {
  const layout: Layout = layoutOf(problem);
  const single = problem.precision === 'single';
  const round = single ? Math.fround : (x: number) => x;
  const array = (length: number): Reals => (single ? new Float32Array(length) : new Float64Array(length));
  const n = layout.cells;
  const stride = [1, n[0] + 1, (n[0] + 1) * (n[1] + 1)] as const;
  const size = stride[2] * (n[2] + 1);
  const at = (i: number, j: number, k: number) => i + stride[1] * j + stride[2] * k;

  const fields = Array.from({ length: 6 }, () => array(size).fill(layout.bias));
  // ψ of component c and of the difference along axis a.
  const memory = Array.from({ length: 6 }, () => AXES.map(() => array(size)));
  const c = layout.coefficients.map(round);

  const rounded = (s: Stretch): Stretch => ({ b: round(s.b), a: round(s.a), inverseKappa: round(s.inverseKappa) });
  const stretches = (['E', 'H'] as const).map((drives) =>
    AXES.map((a) => Array.from({ length: n[a] }, (_, index) => rounded(stretchAt(problem, a, drives, index)))),
  );
  const walls = AXES.map((a) => FACES_OF[a].map((face) => wallOf(problem, face)));

  const update = (half: 0 | 1) => {
    const changing = half === 0 ? 0 : 3;
    const driving = 3 - changing;
    const towards = half === 0 ? -1 : 1;
    for (const x of AXES) {
      const [y, z] = [(x + 1) % 3, (x + 2) % 3] as [Axis, Axis];
      const a = fields[changing + x]!;
      const by = fields[driving + y]!;
      const bz = fields[driving + z]!;
      const psiY = memory[changing + x]![y]!;
      const psiZ = memory[changing + x]![z]!;
      const stretchesY = stretches[half]![y]!;
      const stretchesZ = stretches[half]![z]!;
      // Tangential e on a wall is not the stencil's business.
      const from = AXES.map((axis) => (half === 0 && axis !== x ? 1 : 0));
      for (let k = from[2]!; k < n[2]; k++)
        for (let j = from[1]!; j < n[1]; j++)
          for (let i = from[0]!; i < n[0]; i++) {
            const cell = at(i, j, k);
            const sy = stretchesY[y === 0 ? i : y === 1 ? j : k]!;
            const sz = stretchesZ[z === 0 ? i : z === 1 ? j : k]!;
            let dyBz = round(bz[cell]! - bz[cell + towards * stride[y]]!);
            psiY[cell] = round(round(sy.b * psiY[cell]!) + round(sy.a * dyBz));
            dyBz = round(round(dyBz * sy.inverseKappa) + psiY[cell]!);
            let dzBy = round(by[cell]! - by[cell + towards * stride[z]]!);
            psiZ[cell] = round(round(sz.b * psiZ[cell]!) + round(sz.a * dzBy));
            dzBy = round(round(dzBy * sz.inverseKappa) + psiZ[cell]!);
            a[cell] = round(a[cell]! + round(c[x]! * round(dyBz - dzBy)));
          }
    }
  };

  /** Calls back for every edge in the wall of a face that the face owns: rims belong to the later axis. */
  const onWall = (axis: number, end: 0 | 1, each: (component: number, cell: number) => void) => {
    for (const component of AXES) {
      if (component === axis) continue;
      const from = [0, 0, 0];
      const to = [...n] as number[];
      for (const other of AXES) {
        // Edges along `component` end one node earlier; those of a rim with a later axis are left to it.
        if (other === component) to[other] = n[other] - 1;
        else if (other > axis) {
          from[other] = 1;
          to[other] = n[other] - 1;
        }
      }
      from[axis] = to[axis] = end === 0 ? 0 : n[axis]!;
      for (let k = from[2]!; k <= to[2]!; k++)
        for (let j = from[1]!; j <= to[1]!; j++) for (let i = from[0]!; i <= to[0]!; i++) each(component, at(i, j, k));
    }
  };

  // e as it was a step ago, and what was known of it when that step was over: what a test writes into the fields before the
  // first step is not known as a neighbour along a wall.
  let earlier = fields.slice(0, 3).map((field) => field.slice());
  let known = earlier;

  /** The neighbours of an edge along a wall, both ways along each axis in turn; null where one is missing. */
  const neighbours = (axis: number, component: number, cell: number): [number, number][] | null => {
    const where = [cell % stride[1], Math.floor((cell % stride[2]) / stride[1]), Math.floor(cell / stride[2])];
    const pairs: [number, number][] = [];
    for (const along of AXES) {
      if (along === axis) continue;
      const last = component === along ? n[along] - 1 : n[along];
      const pair = [0, 1].map((end) => {
        const next = where[along]! + (end === 0 ? -1 : 1);
        if (next >= 0 && next <= last) return cell + (end === 0 ? -stride[along] : stride[along]);
        // The mirror image of an edge that stands upright on a conductor is itself.
        return component === along && walls[along]![end]!.type === 'held' ? cell : -1;
      });
      if (pair.includes(-1) || (component !== along && (where[along] === 0 || where[along] === last))) return null;
      pairs.push(pair as [number, number]);
    }
    return pairs;
  };

  /** Σ c_l e_l, from the innermost layer outwards, added to `sum` one by one. */
  const added = (
    sum: number,
    coefficients: readonly number[],
    field: Reals,
    cell: number,
    inward: number,
    from = 0,
  ) => {
    let total = sum;
    for (let l = coefficients.length - 1; l >= 0; l--)
      total = round(total + round(round(coefficients[l]!) * field[cell + (l + from) * inward]!));
    return total;
  };

  const close = (wall: LinearWall, axis: Axis, component: Axis, cell: number, inward: number, before: Reals[]) => {
    const field = fields[component]!;
    const pairs = wall.sideways ? neighbours(axis, component, cell) : [];
    const { older, old, now } = pairs ? wall : wall.sideways!.rim;
    let sum = added(0, older, earlier[component]!, cell, inward);
    sum = added(sum, old, before[component]!, cell, inward);
    if (wall.sideways && pairs)
      for (const l of [1, 0])
        pairs.forEach(([down, up], p) => {
          const along = AXES.filter((a) => a !== axis)[p]!;
          const weight = round(wall.sideways!.across[along === (axis + 1) % 3 ? 0 : 1]);
          const layer = known[component]!;
          sum = round(sum + round(weight * round(layer[down + l * inward]! + layer[up + l * inward]!)));
        });
    field[cell] = added(sum, now, field, cell, inward, 1);
  };

  const mirror = (axis: Axis, end: 0 | 1) => {
    const edge = end === 0 ? 0 : n[axis] - 1;
    const inward = end === 0 ? stride[axis] : -stride[axis];
    for (let k = 0; k < n[2]; k++)
      for (let j = 0; j < n[1]; j++)
        for (let i = 0; i < n[0]; i++) {
          if ([i, j, k][axis] !== edge) continue;
          const cell = at(i, j, k);
          for (const component of AXES) {
            if (component === axis) continue;
            const field = fields[3 + component]!;
            field[cell] = round(round(2 * layout.bias) - field[cell + inward]!);
          }
        }
  };

  let done = 0;
  return {
    fields,
    step() {
      const before = fields.slice(0, 3).map((field) => field.slice());
      if (done > 0) known = before;
      update(0);
      for (let e = 0; e < problem.currents.count; e++) {
        const [i, j, k] = AXES.map((a) => problem.currents.node[3 * e + a]! + layout.offset[a]) as [
          number,
          number,
          number,
        ];
        const field = fields[problem.currents.axis[e]!]!;
        field[at(i, j, k)] = round(field[at(i, j, k)]! - round(sourceVoltage(problem, layout, e, done)));
      }
      for (const axis of AXES)
        for (const end of [0, 1] as const) {
          const wall: Wall = walls[axis]![end]!;
          if (wall.type !== 'linear') continue;
          const inward = end === 0 ? stride[axis] : -stride[axis];
          onWall(axis, end, (component, cell) => close(wall, axis, component as Axis, cell, inward, before));
        }
      earlier = before;
      update(1);
      for (const axis of AXES)
        for (const end of [0, 1] as const) if (walls[axis]![end]!.type === 'mirror') mirror(axis, end);
      done++;
    },
  };
}
