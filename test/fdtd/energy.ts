/** The discrete energy of a lattice while it is marched: what an absorbing boundary must never raise. */
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { AXES, wallOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { type GridSetup, lead, prepareGridRun } from '../../src/fdtd/run.ts';
import { FACES } from '../../src/scenario/model.ts';
import { Dice } from './problems.ts';

export interface EnergyHistory {
  /** energy of the start, and the largest since */
  readonly start: number;
  readonly largest: number;
  readonly last: number;
  /** the first step after which it was above its start; null where it never was */
  readonly unstableAt: number | null;
}

/**
 * Marches a problem without sources from random fields of size 1 (the same for the same seed), and watches
 *   W = ½ Σ ε|E^{n+1}|² V + ½ Σ μ H^{n+½}·H^{n+3/2} V,
 * which Yee's scheme conserves exactly between conductors; edges in a wall have half the volume of those inside, those of
 * a rim a quarter.
 * @param every how many steps apart it is looked at
 */
export function energyFrom(problem: GridProblem, seed: number, every: number): EnergyHistory {
  const run = prepareGridRun(problem, { schedule: { batchSteps: 1, blockSteps: 1 } });
  const n = run.setup.layout.cells;
  const walls = FACES.map((face) => wallOf(problem, face));
  const dice = new Dice(seed);
  const round = problem.precision === 'single' ? Math.fround : (x: number) => x;

  // ½V/d² of a component at every node, 0 where it does not exist; e = E·d, h = ηH·d.
  const weights = [0, 1, 2, 3, 4, 5].map((field) => {
    const axis = field % 3;
    const out = new Float64Array((n[0] + 1) * (n[1] + 1) * (n[2] + 1));
    const square = problem.cellSize[axis]! ** 2;
    const volume = problem.cellSize[0] * problem.cellSize[1] * problem.cellSize[2];
    let node = 0;
    for (let k = 0; k <= n[2]; k++)
      for (let j = 0; j <= n[1]; j++)
        for (let i = 0; i <= n[0]; i++, node++) {
          const where = [i, j, k];
          // e lies on nodes across its own axis, h along it.
          const onNode = (a: number) => (field < 3 ? a !== axis : a === axis);
          // Normal h in a high wall is not marched; it never changes where e along the wall is held.
          if (AXES.some((a) => where[a] === n[a] && (!onNode(a) || field >= 3))) continue;
          const halves = AXES.filter((a) => onNode(a) && (where[a] === 0 || where[a] === n[a])).length;
          out[node] = (0.5 * volume) / square / 2 ** halves;
        }
    return out;
  });
  const starts = weights.map((weight, field) =>
    weight.map((w, node) => {
      const x = node % (n[0] + 1);
      const y = Math.floor(node / (n[0] + 1)) % (n[1] + 1);
      const z = Math.floor(node / ((n[0] + 1) * (n[1] + 1)));
      const held = AXES.some(
        (a) =>
          field < 3 &&
          a !== field &&
          ([x, y, z][a] === 0 || [x, y, z][a] === n[a]) &&
          walls[2 * a + ([x, y, z][a] === 0 ? 0 : 1)]!.type !== 'linear',
      );
      const value = round(dice.real(-1, 1));
      return w === 0 || held ? run.setup.layout.bias : value;
    }),
  );

  const read = (setup: GridSetup) => weights.map((_, field) => readField(setup, field));
  const energy = (now: readonly Float64Array[], before: readonly Float64Array[]): number => {
    let sum = 0;
    weights.forEach((weight, field) => {
      const [a, b] = [now[field]!, field < 3 ? now[field]! : before[field]!];
      for (let node = 0; node < weight.length; node++) sum += weight[node]! * a[node]! * b[node]!;
    });
    return sum;
  };
  let before: Float64Array[] = [];
  let start = Number.NaN;
  let largest = Number.NEGATIVE_INFINITY;
  let last = Number.NaN;
  let unstableAt: number | null = null;
  lead(run, {
    onStart(setup) {
      for (const [field, values] of starts.entries()) writeField(setup, field, values);
    },
    onProgress(done) {
      if (done % every === 1 || every === 1) {
        const now = read(run.setup);
        if (done > 1) {
          last = energy(now, before);
          if (Number.isNaN(start)) start = last;
          if (!(last <= start * (1 + 1e-6)) && unstableAt === null) unstableAt = done;
          largest = Math.max(largest, last);
        }
      }
      if (done % every === 0) before = read(run.setup);
    },
    cancelled: () => unstableAt !== null,
  });
  return { start, largest, last, unstableAt };
}
