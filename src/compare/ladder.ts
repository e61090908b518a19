import {
  gridConvergenceIndex,
  observedOrders,
  type Richardson,
  representativeSize,
  richardson,
} from './convergence.ts';
import type { BudgetResult } from './result.ts';

/** One grid of a ladder. */
export interface Rung {
  readonly cellSize: readonly [number, number, number];
  readonly budget: BudgetResult;
  /** absorbing layers behind each face */
  readonly layers: readonly number[];
  /** their thickness, m */
  readonly thickness: readonly number[];
}

export type LadderPart = keyof BudgetResult;

/** What is held while the cells shrink: layers shrink with them unless their number grows. */
export type Held = 'layers' | 'thickness' | 'layers and thickness' | 'neither' | 'no layers';

/** How errors go down as cells do, from the coarsest grid to the finest. */
export interface Ladder {
  /** ∛(dx dy dz), m */
  readonly sizes: readonly number[];
  /** total E pooled over the observers, one for each consecutive pair; NaN where there is none */
  readonly orders: readonly number[];
  readonly errors: readonly number[];
  readonly richardson: Richardson;
  readonly gci: LadderGci;
  readonly parts: readonly {
    readonly part: LadderPart;
    readonly errors: readonly number[];
    readonly floors: readonly number[];
    /** NaN where either error lies below its floor */
    readonly orders: readonly number[];
  }[];
  readonly held: Held;
}

/** The grid convergence index of the finest grid beside what is known here and would not be there. */
export type LadderGci =
  | {
      readonly value: number;
      readonly safetyFactor: number;
      readonly order: number;
      readonly trueError: number;
      /** value ≥ trueError */
      readonly covered: boolean;
    }
  | { readonly value: null; readonly reason: string; readonly trueError: number };

/** @param rungs from the coarsest to the finest, two or more */
export function ladderOf(rungs: readonly Rung[]): Ladder {
  const sizes = rungs.map(({ cellSize }) => representativeSize(cellSize));
  const errors = rungs.map(({ budget }) => budget.total.relativeL2 ?? Number.NaN);
  const trueError = errors[errors.length - 1]!;
  const gci = gridConvergenceIndex(sizes, errors);
  const names = Object.keys(rungs[0]!.budget) as LadderPart[];
  return {
    sizes,
    errors,
    orders: observedOrders(sizes, errors),
    richardson: richardson(sizes, errors),
    gci: gci.value === null ? { ...gci, trueError } : { ...gci, trueError, covered: gci.value >= trueError },
    parts: names.flatMap((part) => {
      if (part === 'total' || rungs.some(({ budget }) => budget[part] === null)) return [];
      const values = rungs.map(({ budget }) => budget[part]!.relativeL2 ?? Number.NaN);
      const floors = rungs.map(({ budget }) => budget[part]!.floor ?? Number.NaN);
      const above = values.map((v, m) => (v >= floors[m]! ? v : Number.NaN));
      return [{ part, errors: values, floors, orders: observedOrders(sizes, above) }];
    }),
    held: heldOf(rungs),
  };
}

function heldOf(rungs: readonly Rung[]): Held {
  if (rungs.every(({ layers }) => layers.every((n) => n === 0))) return 'no layers';
  const [first] = rungs;
  const layers = rungs.every((rung) => rung.layers.every((n, f) => n === first!.layers[f]));
  const same = (a: number, b: number) => Math.abs(a - b) <= 1e-9 * Math.max(a, b);
  const thickness = rungs.every((rung) => rung.thickness.every((d, f) => same(d, first!.thickness[f]!)));
  if (layers && thickness) return 'layers and thickness';
  return layers ? 'layers' : thickness ? 'thickness' : 'neither';
}
