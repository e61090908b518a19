import { PARTS } from '../compare/budget.ts';
import type { BudgetResult } from '../compare/result.ts';
import { decibels } from '../elementary/elementary.ts';
import { formatAboveFloor, formatDecibels, formatPercent } from '../elementary/quantity.ts';
import type { ColourName } from './palette.ts';

/** One line of a budget as people see it. */
export interface BudgetRow {
  readonly name: string;
  readonly colour: ColourName;
  /** relative L2, or its floor: "3.1 %", "< −84 dB (floor)" */
  readonly error: string;
  /** signed share of the total; null where it has none, or where the part lies below its floor */
  readonly share: number | null;
  readonly shareText: string;
  /** "−84 dB" */
  readonly floor: string;
}

/** A budget's rows from boundary to total; nothing below its floor is shown as a number. */
export function budgetRows(budget: BudgetResult): BudgetRow[] {
  const parts = budget.boundaryAndLattice
    ? ([
        ['boundary and lattice', 'muted', budget.boundaryAndLattice],
        ['gridding', 'gridding', budget.gridding],
        ['quadrature', 'quadrature', budget.quadrature],
      ] as const)
    : PARTS.map((part) => [part, part, budget[part]] as const);
  return [...parts, ['total', 'ink', budget.total] as const].flatMap(([name, colour, entry]) => {
    if (!entry) return [];
    const { relativeL2, floor } = entry;
    const share = relativeL2 !== null && floor !== null && relativeL2 >= floor ? entry.share : null;
    return [
      {
        name,
        colour,
        error: relativeL2 === null ? '—' : formatAboveFloor(relativeL2, floor ?? 0),
        share,
        shareText: share === null ? '—' : formatPercent(Math.round(share * 1000) / 1000),
        floor: floor === null ? '—' : formatDecibels(decibels(floor)),
      },
    ];
  });
}
