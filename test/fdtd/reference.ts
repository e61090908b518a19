/**
 * The Yee scheme once more, as plainly as it can be said: one cell at a time, one step after the other, no vectors, no
 * tiles, no threads. It rounds after every operation as the kernel does, so the kernel must give the very same bits.
 */
import type { Stretch, Wall } from '../../src/fdtd/boundaries/boundary.ts';
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
  const layout: Layout = layoutOf(problem, 1);
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

  let done = 0;
  return {
    fields,
    step() {
      const before = fields.slice(0, 3).map((field) => field.slice());
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
          if (wall.type !== 'mur') continue;
          const factor = round(wall.factor);
          const inward = end === 0 ? stride[axis] : -stride[axis];
          onWall(axis, end, (component, cell) => {
            const field = fields[component]!;
            const e1 = before[component]![cell + inward]!;
            field[cell] = round(e1 + round(factor * round(field[cell + inward]! - field[cell]!)));
          });
        }
      update(1);
      done++;
    },
  };
}
