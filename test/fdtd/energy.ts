/** The discrete energy of a lattice while it is marched: what an absorbing boundary must never raise. */
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { AXES, wallOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import { type GridSetup, lead, prepareGridRun } from '../../src/fdtd/run.ts';
import { FACES } from '../../src/scenario/model.ts';
import { Dice } from './problems.ts';

/** Cells between the random start and the faces of the box. */
const OFF = 5;

export interface EnergyHistory {
  /** energy of the start, and the largest since */
  readonly start: number;
  readonly largest: number;
  readonly last: number;
  /** the first step after which it was above its start; null where it never was */
  readonly unstableAt: number | null;
}

/**
 * Marches a problem without sources from random fields of size 1 in the middle of the box (the same for the same seed),
 * charges and their static field included, and watches
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

  // Behind a mirror there is nothing.
  const ends = AXES.map((a) => [
    walls[2 * a]!.type === 'mirror' ? 1 : 0,
    walls[2 * a + 1]!.type === 'mirror' ? n[a] - 1 : n[a],
  ]);
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
          if (AXES.some((a) => where[a]! < ends[a]![0]! || where[a]! > ends[a]![1]!)) continue;
          // Normal h in a high wall is not marched.
          if (AXES.some((a) => where[a] === ends[a]![1] && (!onNode(a) || (field >= 3 && where[a] === n[a])))) continue;
          const halves = AXES.filter((a) => onNode(a) && ends[a]!.includes(where[a]!)).length;
          out[node] = (0.5 * volume) / square / 2 ** halves;
        }
    return out;
  });
  // Where walls read nothing: else the start would be a jump of what they remember.
  const { pad, boxCells } = problem;
  const inner = AXES.map((a) => [pad[FACES[2 * a]!] + OFF, pad[FACES[2 * a]!] + boxCells[a]! - OFF]);
  const starts = weights.map((weight) =>
    weight.map((_, node) => {
      const where = [
        node % (n[0] + 1),
        Math.floor(node / (n[0] + 1)) % (n[1] + 1),
        Math.floor(node / ((n[0] + 1) * (n[1] + 1))),
      ];
      const value = round(dice.real(-1, 1));
      const inside = AXES.every((a) => where[a]! >= inner[a]![0]! && where[a]! < inner[a]![1]!);
      return inside ? value : run.setup.layout.bias;
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
  let before: readonly Float64Array[] = starts;
  let start = Number.NaN;
  let largest = 0;
  let last = Number.NaN;
  let unstableAt: number | null = null;
  lead(run, {
    onStart(setup) {
      for (const [field, values] of starts.entries()) writeField(setup, field, values);
    },
    onProgress(done) {
      if (done % every === 1) {
        last = energy(read(run.setup), before);
        if (done === 1) start = last;
        if (!(last <= start * (1 + 1e-6))) unstableAt ??= done;
        largest = Math.max(largest, last);
      }
      if (done % every === 0) before = read(run.setup);
    },
    cancelled: () => largest > 1e12 * start || Number.isNaN(last) !== Number.isNaN(start),
  });
  return { start, largest, last, unstableAt };
}
