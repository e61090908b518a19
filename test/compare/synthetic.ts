import type { Levels } from '../../src/compare/budget.ts';
import { exp } from '../../src/elementary/elementary.ts';
import { type FieldHistory, instantsOf, samplePoints } from '../../src/trace/trace.ts';

/** A field made of a function of point, component and time: each component at its own instants. */
export function fieldOf(
  points: number,
  steps: number,
  value: (point: number, component: number, t: number) => number,
  timeStep = 1,
): FieldHistory {
  const cell = Int32Array.from({ length: 3 * points }, (_, i) => (i % 3 === 0 ? i / 3 : 0));
  const where = samplePoints(cell, [0, 0, 0], [1, 1, 1]);
  const instants = instantsOf(steps, timeStep);
  const values = new Float64Array(points * 6 * steps);
  for (let p = 0; p < points; p++)
    for (let c = 0; c < 6; c++)
      for (let n = 0; n < steps; n++)
        values[(p * 6 + c) * steps + n] = value(p, c, (c < 3 ? instants.E : instants.H)[n]!);
  return { points: where, instants, values };
}

/** Each sample of a field times a factor. */
export const scaled = (field: FieldHistory, factor: number): FieldHistory => ({
  ...field,
  values: field.values.map((v) => v * factor),
});

/** Some fields added. */
export const sum = (...fields: readonly FieldHistory[]): FieldHistory => ({
  ...fields[0]!,
  values: fields[0]!.values.map((_, i) => fields.reduce((total, f) => total + f.values[i]!, 0)),
});

/** exp(−u²/2), u = (t − delay)/sigma */
export const gaussian = (t: number, delay: number, sigma: number): number => exp(-(((t - delay) / sigma) ** 2) / 2);

/** Levels that are the same everywhere. */
export function levelsOf(levels: Partial<Record<keyof Levels, number>> = {}): Levels {
  const level = (name: keyof Levels) => () => levels[name] ?? 0;
  return {
    rounding: level('rounding'),
    truncation: level('truncation'),
    gridded: level('gridded'),
    computed: level('computed'),
    exact: level('exact'),
  };
}
