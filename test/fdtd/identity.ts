/** Runs a problem through the kernel and through the plain reference, and says where they differ first. */
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { FACES_OF, latticeCells, wallOf } from '../../src/fdtd/layout.ts';
import type { GridProblem } from '../../src/fdtd/problem.ts';
import {
  type GridOptions,
  type GridResult,
  type GridRun,
  type LeadHooks,
  lead,
  prepareGridRun,
} from '../../src/fdtd/run.ts';
import { keptCount, keptIndex } from '../../src/fdtd/samples.ts';
import { randomFields } from './problems.ts';
import { reference } from './reference.ts';

/** A start that respects the walls: tangential e on the outermost nodes and everything beyond them stays at the bias. */
function respectWalls(problem: GridProblem, starts: Float64Array[], bias: number): void {
  const n = latticeCells(problem);
  starts.forEach((start, field) => {
    let node = 0;
    for (let k = 0; k <= n[2]; k++)
      for (let j = 0; j <= n[1]; j++)
        for (let i = 0; i <= n[0]; i++, node++) {
          const where = [i, j, k];
          const outside = where.some((w, a) => w === n[a] && !(field < 3 && a !== field));
          const held =
            field < 3 && where.some((w, a) => a !== field && (w === 0 || w === n[a]) && !moves(problem, a, w));
          if (outside || held) start[node] = bias;
        }
  });
}

/** Whether a wall changes tangential e. */
function moves(problem: GridProblem, axis: number, where: number): boolean {
  return wallOf(problem, FACES_OF[axis]![where === 0 ? 0 : 1]!).type === 'linear';
}

export interface Comparison {
  readonly difference: string | undefined;
  readonly result: GridResult;
}

/**
 * @param help what starts followers, where there are any
 * @param cancelled as in `LeadHooks`
 * @returns the first difference between kernel and reference, bit for bit, in words; undefined when there is none
 */
export function compareWithReference(
  problem: GridProblem,
  options: GridOptions,
  seed: number,
  help: (run: GridRun) => void = () => {},
  cancelled: NonNullable<LeadHooks['cancelled']> = () => false,
): Comparison {
  const run = prepareGridRun(problem, options);
  const n = run.setup.layout.cells;
  const nodes = (n[0] + 1) * (n[1] + 1) * (n[2] + 1);
  const starts = randomFields(problem, nodes, seed);
  respectWalls(problem, starts, run.setup.layout.bias);
  help(run);
  const result = lead(run, {
    cancelled,
    onStart(setup) {
      for (const [f, values] of starts.entries()) writeField(setup, f, values);
    },
  });

  const plain = reference(problem);
  for (const [f, field] of plain.fields.entries()) field.set(starts[f]!);
  const samples = problem.samples.map((g) => new Float64Array((g.cell.length / 3) * 6 * keptCount(g, problem.steps)));
  for (let step = 0; step < problem.steps; step++) {
    plain.step();
    problem.samples.forEach((group, g) => {
      const m = keptIndex(group, problem.steps, step);
      if (m < 0) return;
      for (let p = 0; p < group.cell.length / 3; p++)
        for (let c = 0; c < 6; c++) {
          const [i, j, k] = [0, 1, 2].map((a) => group.cell[3 * p + a]! + run.setup.layout.offset[a]!) as [
            number,
            number,
            number,
          ];
          const scaled = plain.fields[c]![i + (n[0] + 1) * (j + (n[1] + 1) * k)]! - run.setup.layout.bias;
          const d = problem.cellSize[c % 3]!;
          samples[g]![(p * 6 + c) * keptCount(group, problem.steps) + m] =
            scaled * (c < 3 ? 1 / d : 1 / (problem.medium.impedance * d));
        }
    });
  }

  let difference: string | undefined;
  for (let f = 0; f < 6 && !difference; f++) {
    const field = readField(run.setup, f);
    for (let k = 0, node = 0; k <= n[2]; k++)
      for (let j = 0; j <= n[1]; j++)
        for (let i = 0; i <= n[0]; i++, node++) {
          // Beyond the walls nothing is promised: h and normal e at node n, and lanes that pad a row.
          const exists = [i, j, k].every((w, a) => w < n[a]! || (f < 3 && a !== f));
          if (exists && !Number.isFinite(field[node]))
            difference ??= `field ${f} at (${i}, ${j}, ${k}) is ${field[node]}`;
          if (exists && !Object.is(field[node], plain.fields[f]![node]))
            difference ??= `field ${f} at (${i}, ${j}, ${k}) of ${n.join('×')}: ${field[node]} instead of ${plain.fields[f]![node]}`;
        }
  }
  result.samples.forEach((values, g) => {
    values.forEach((value, v) => {
      if (!Object.is(value, samples[g]![v]))
        difference ??= `sample ${v} of group ${g}: ${value} instead of ${samples[g]![v]}`;
    });
  });
  return { difference, result };
}
