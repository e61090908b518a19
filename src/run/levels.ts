import type { Levels } from '../compare/budget.ts';
import { FIRST_COMPONENT, type Field, type Level, samplesOf } from '../compare/fields.ts';
import type { FieldHistory } from '../trace/trace.ts';
import { type Answers, ROUNDING_PROBE } from './answers.ts';
import type { IntegralField } from './integrals.ts';

/** Root mean square of a vector over the window at one point, V/m or A/m. */
export function rootMeanSquare(history: FieldHistory, field: Field, point: number): number {
  let sum = 0;
  for (let c = FIRST_COMPONENT[field]; c < FIRST_COMPONENT[field] + 3; c++)
    for (const v of samplesOf(history, point, c)) sum += v * v;
  return Math.sqrt(sum / history.instants.count);
}

/** The bound of an integral's error as the amplitude of a vector, V/m or A/m. */
export function boundLevel({ errorBound }: IntegralField): Level {
  return (field, p) => {
    const first = p * 6 + FIRST_COMPONENT[field];
    return Math.sqrt(errorBound.subarray(first, first + 3).reduce((sum, b) => sum + b * b, 0));
  };
}

/**
 * The strength of the field at a point in units of E or H: the larger of E and ηH, root mean square. What vanishes by
 * symmetry at one point has no scale of its own.
 */
export function strengthAt(history: FieldHistory, field: Field, point: number, impedance: number): number {
  const strength = Math.max(rootMeanSquare(history, 'E', point), impedance * rootMeanSquare(history, 'H', point));
  return field === 'E' ? strength : strength / impedance;
}

/** Below this share of the field's strength (−120 dB) E or H is taken to vanish: it has no relative error. */
export const VANISHES = 1e-6;

/** Whether E (or H) vanishes at a point where the other does not, on a symmetry plane or an axis. */
export function vanishes(history: FieldHistory, field: Field, point: number, impedance: number): boolean {
  return rootMeanSquare(history, field, point) <= VANISHES * strengthAt(history, field, point, impedance);
}

/** The bound of the exact field's error at a point, relative to the field's strength; 0 where there is no field. */
export function relativeBound(exact: IntegralField, field: Field, point: number, impedance: number): number {
  const strength = strengthAt(exact.history, field, point, impedance);
  return strength > 0 ? boundLevel(exact)(field, point) / strength : 0;
}

/** Rounding of a grid run: its difference to the run of other roundings, scaled back. */
function probeLevel({ box, probe }: Answers, group: number, { points, instants }: FieldHistory): Level {
  const other = probe.samples[group]!;
  const values = box.samples[group]!.map((v, i) => v - other[i]! / ROUNDING_PROBE);
  return (field, p) => rootMeanSquare({ points, instants, values }, field, p);
}

/** What the free-space run leaves of reflections, as a share of the exact field. */
const truncationLevel =
  (exact: FieldHistory, share: number): Level =>
  (field, p) =>
    share * rootMeanSquare(exact, field, p);

/** Error levels at the budget's points. */
export function budgetLevels(answers: Answers, truncation: number): Levels {
  return {
    rounding: probeLevel(answers, 0, answers.exact.history),
    truncation: truncationLevel(answers.exact.history, truncation),
    gridded: boundLevel(answers.gridded),
    computed: boundLevel(answers.computed),
    exact: boundLevel(answers.exact),
  };
}

/** Error levels at the volume's samples, where gridded currents are not integrated. */
export function volumeLevels(answers: Answers, truncation: number): Levels {
  return {
    rounding: probeLevel(answers, 1, answers.volumeExact.history),
    truncation: truncationLevel(answers.volumeExact.history, truncation),
    gridded: () => 0,
    computed: () => 0,
    exact: boundLevel(answers.volumeExact),
  };
}
