import type { Plan } from '../../src/compare/planResult.ts';
import { planScenario } from '../../src/run/plan.ts';
import type { PlanCase } from './planCases.ts';

export interface PlanRun {
  readonly case: PlanCase;
  readonly plan: Plan;
}

/** Plans each case and runs what was planned. */
export async function planAll(cases: readonly PlanCase[]): Promise<PlanRun[]> {
  const runs: PlanRun[] = [];
  for (const each of cases)
    runs.push({ case: each, plan: await planScenario(each.json, { tolerance: each.tolerance }) });
  console.table(
    runs.map(({ case: { label, tolerance }, plan }) => ({
      case: label,
      'tolerance, %': (100 * tolerance).toFixed(2),
      'cells, mm': plan.chosen && (1e3 * plan.chosen.cellSize[0]).toFixed(2),
      walls: plan.chosen && `${plan.chosen.boundary.type}${plan.chosen.boundary.layers ?? ''}`,
      'predicted, %': plan.chosen && (100 * plan.chosen.predicted).toFixed(3),
      'measured, %': plan.check && (100 * plan.check.measured).toFixed(3),
      'of tolerance': plan.check && (plan.check.measured / tolerance).toFixed(2),
      'search, s': plan.searchSeconds.toFixed(1),
    })),
  );
  return runs;
}

/** Measured error over tolerance, ascending; a plan that was not run counts as infinitely far off. */
export function ofTolerance(runs: readonly PlanRun[]): number[] {
  return runs
    .map(({ case: { tolerance }, plan }) => (plan.check ? plan.check.measured / tolerance : Number.POSITIVE_INFINITY))
    .sort((a, b) => a - b);
}
