import { expect, test } from 'vitest';
import { readField, writeField } from '../../src/fdtd/fields.ts';
import { AXES, layoutOf, stretchAt } from '../../src/fdtd/layout.ts';
import { lead, prepareGridRun } from '../../src/fdtd/run.ts';
import type { Axis, Boundary } from '../../src/scenario/model.ts';
import { courantStep, Dice, everyFace, plainProblem, type Triple } from './problems.ts';

/**
 * Berenger's own scheme, with two arrays for every component and no memory variable: E_xy and E_xz, each damped by the
 * conductivity of its own direction with exponential time stepping (J. Comput. Phys. 114 (1994) 185, eqs. 3 and 11-12 in
 * three dimensions). What the kernel marches must be the sums.
 */
test('the layer marches the split fields of Berenger 1994', () => {
  const boundary: Boundary = { type: 'splitPml', layers: 4, grading: 2, sigmaFactor: 1.3 };
  const cellSize: Triple = [3e-3, 4e-3, 5e-3];
  const problem = plainProblem([5, 4, 6], {
    cellSize,
    timeStep: courantStep(0.95, cellSize, 299792458),
    steps: 60,
    boundary: everyFace(boundary),
    pad: everyFace(4),
  });
  const { cells: n, coefficients: c } = layoutOf(problem);
  const stride = [1, n[0] + 1, (n[0] + 1) * (n[1] + 1)] as const;
  const size = stride[2] * (n[2] + 1);

  /** σΔt/ε of the difference along an axis: of E on whole nodes, of H half a cell on. */
  const lost = (axis: Axis, half: 0 | 1, index: number): number => {
    const position = half === 0 ? index : index + 0.5;
    const depth = Math.max(4 - position, position - (n[axis] - 4), 0) / 4;
    if (position <= 0) return 0;
    const largest = (1.3 * 0.8 * 3 * problem.medium.speed * problem.timeStep) / cellSize[axis]!;
    return largest * depth ** 2;
  };

  // parts[component][0]: driven by the difference along the next axis; [1]: along the one after it.
  const parts = Array.from({ length: 6 }, () => [new Float64Array(size), new Float64Array(size)] as const);
  const whole = (field: number, cell: number) => parts[field]![0][cell]! + parts[field]![1][cell]!;
  const dice = new Dice(5);
  const start = Array.from({ length: 6 }, () => new Float64Array(size));
  for (let k = 4; k < n[2] - 4; k++)
    for (let j = 4; j < n[1] - 4; j++)
      for (let i = 4; i < n[0] - 4; i++)
        for (let f = 0; f < 6; f++) {
          // Outside the layers both parts are lossless there, so it does not matter which of them holds the start.
          const value = dice.real(-1, 1);
          start[f]![i + stride[1] * j + stride[2] * k] = value;
          parts[f]![0][i + stride[1] * j + stride[2] * k] = value;
        }
  // The last nodes of the box lie at the inner ends of layers, where the conductivity is 0.
  const run = prepareGridRun(problem);
  lead(run, {
    onStart: (setup) => {
      for (const [f, values] of start.entries())
        writeField(
          setup,
          f,
          values.map((v) => v + setup.layout.bias),
        );
    },
  });

  for (let step = 0; step < problem.steps; step++)
    for (const half of [0, 1] as const) {
      const [changing, driving, towards] = half === 0 ? [0, 3, -1] : [3, 0, 1];
      const sums = AXES.map((a) => Float64Array.from({ length: size }, (_, cell) => whole(driving + a, cell)));
      for (const x of AXES) {
        const [y, z] = [((x + 1) % 3) as Axis, ((x + 2) % 3) as Axis];
        const from = AXES.map((axis) => (half === 0 && axis !== x ? 1 : 0));
        for (let k = from[2]!; k < n[2]; k++)
          for (let j = from[1]!; j < n[1]; j++)
            for (let i = from[0]!; i < n[0]; i++) {
              const where = [i, j, k];
              const cell = i + stride[1] * j + stride[2] * k;
              // E_xy ← D E_xy + c g Δ_y H_z, E_xz ← D E_xz − c g Δ_z H_y, and the same of H with the signs of its neighbours.
              [
                [y, z, 1],
                [z, y, -1],
              ].forEach(([along, of, sign], p) => {
                const x1 = lost(along as Axis, half, where[along!]!);
                const difference = sums[of!]![cell]! - sums[of!]![cell + towards * stride[along as Axis]]!;
                const kept = Math.exp(-x1);
                const gain = x1 === 0 ? 1 : -Math.expm1(-x1) / x1;
                const part = parts[changing + x]![p as 0 | 1];
                part[cell] = kept * part[cell]! + sign! * c[x]! * gain * difference;
              });
            }
      }
    }

  let worst = 0;
  let largest = 0;
  for (let f = 0; f < 6; f++) {
    const field = readField(run.setup, f);
    for (let k = 0; k < n[2]; k++)
      for (let j = 0; j < n[1]; j++)
        for (let i = 0; i < n[0]; i++) {
          const cell = i + stride[1] * j + stride[2] * k;
          worst = Math.max(worst, Math.abs(field[cell]! - run.setup.layout.bias - whole(f, cell)));
          largest = Math.max(largest, Math.abs(whole(f, cell)));
        }
  }
  console.log(`largest ${largest.toPrecision(3)}, difference ${worst.toPrecision(2)}`);
  expect(largest).toBeGreaterThan(0.01);
  // 60 steps of some ten roundings each; 1/D is 40 at most where σΔt/ε is 3.7.
  expect(worst).toBeLessThan(60 * 10 * 40 * Number.EPSILON);
});

test('its stretch at zero frequency is infinite: a constant difference drives nothing in the end', () => {
  const problem = plainProblem([5, 5, 5], {
    boundary: everyFace({ type: 'splitPml', layers: 6, grading: 3, sigmaFactor: 1 }),
    pad: everyFace(6),
  });
  for (let layer = 1; layer < 6; layer++) {
    const { b, a, inverseKappa } = stretchAt(problem, 0, 'E', layer);
    // ψ → aΔ/(1 − b), so Δ → (i + a/(1 − b)) Δ; 1 − b loses four digits at the inner end.
    expect(Math.abs(inverseKappa + a / (1 - b))).toBeLessThan(1e4 * Number.EPSILON * inverseKappa);
  }
});
