import { fromDecibels } from '../elementary/elementary.ts';
import { memoryNeeded } from '../fdtd/layout.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import { activeRegion, countCellUpdates } from '../fdtd/region.ts';
import { type Boundary, FACES, type Face } from '../scenario/model.ts';

/**
 * The same lattice with no reflection in the window, which is what the boundary part is told against. Two ways, chosen by
 * counting cell updates beforehand:
 *
 * - `open`: no absorber; only cells that the front has reached and that can still reach a sample are marched, in a
 *   lattice so large that none of them meets a wall. Its floor is what the margin around them lets through.
 * - `absorbed`: a clearance and a thick absorber around the box, within the active region too. Its floor is what that
 *   absorber reflects.
 */
export interface FreeSpacePlan {
  readonly method: 'open' | 'absorbed';
  readonly problem: GridProblem;
  readonly cellUpdates: number;
  readonly memoryBytes: number;
  /** what is left of reflections, a fraction of the exact field */
  readonly floor: number;
  /** for the report */
  readonly description: string;
}

/**
 * Cells around the active region, and what they let through of a smooth pulse, dB (test/verify/freeSpace.test.ts): for
 * budgets, and for reflections, which are looked for further down.
 */
const MARGINS = { budget: { margin: 6, floor: -107 }, reflection: { margin: 10, floor: -145 } } as const;
type Purpose = keyof typeof MARGINS;

/** How reflections are marched: cells around the active region, and what of the exact field they let through. */
export const REFLECTION_MARGIN = MARGINS.reflection.margin;
export const reflectionFloor = (): number => fromDecibels(MARGINS.reflection.floor);

const CLEARANCE = 10;
const LAYERS = 16;

/** What the absorber sends back behind its clearance, dB of the exact field (test/verify/freeSpace.test.ts). */
const ABSORBED_FLOOR = -97;

/**
 * The lattice against which reflections are told: the open one, which can be had with a floor below any absorber's, or
 * where it does not fit the absorbed one.
 */
export function planReflectionFree(box: GridProblem, memoryLimit: number): FreeSpacePlan | null {
  const open = openPlan(box, 'reflection');
  if (open && open.memoryBytes <= memoryLimit) return open;
  const absorbed = absorbedPlan(box);
  return absorbed && absorbed.memoryBytes <= memoryLimit ? absorbed : null;
}

/**
 * The cheaper of the two ways, or null where neither fits into `memoryLimit` bytes and the kernel's address space: a
 * normal outcome, boundary and lattice are then known by their sum alone.
 */
export function planFreeSpace(box: GridProblem, memoryLimit: number): FreeSpacePlan | null {
  const plans = [openPlan(box, 'budget'), absorbedPlan(box)].filter(
    (plan) => plan !== null && plan.memoryBytes <= memoryLimit,
  ) as FreeSpacePlan[];
  return plans.reduce<FreeSpacePlan | null>(
    (best, plan) => (best === null || plan.cellUpdates < best.cellUpdates ? plan : best),
    null,
  );
}

function openPlan(box: GridProblem, purpose: Purpose): FreeSpacePlan | null {
  const { margin, floor } = MARGINS[purpose];
  const problem: GridProblem = {
    ...box,
    pad: openPad(box, margin),
    boundary: everyFace({ type: 'pec' }),
    activeRegion: { margin },
  };
  return planOf('open', problem, fromDecibels(floor), 'an open lattice, only what can reach the samples marched');
}

function absorbedPlan(box: GridProblem): FreeSpacePlan | null {
  const { medium, cellSize } = box;
  const boundary: Boundary = {
    type: 'cpml',
    layers: LAYERS,
    grading: 3,
    kappaMax: 1,
    sigmaFactor: 1,
    // αmax = 0.05/(ηh): tied to the cell, so that the floor does not move with refinement
    alphaFrequency: 0.05 / (medium.impedance * Math.min(...cellSize) * 2 * Math.PI * medium.permittivity),
  };
  const problem: GridProblem = {
    ...box,
    pad: Object.fromEntries(FACES.map((face) => [face, CLEARANCE + LAYERS])) as Record<Face, number>,
    boundary: everyFace(boundary),
    activeRegion: { margin: MARGINS.budget.margin },
  };
  return planOf(
    'absorbed',
    problem,
    fromDecibels(ABSORBED_FLOOR),
    `CPML of ${LAYERS} layers behind ${CLEARANCE} cells`,
  );
}

function planOf(
  method: FreeSpacePlan['method'],
  problem: GridProblem,
  floor: number,
  description: string,
): FreeSpacePlan | null {
  try {
    const { bytes } = memoryNeeded(problem);
    return { method, problem, cellUpdates: countCellUpdates(problem), memoryBytes: bytes, floor, description };
  } catch (error) {
    // The lattice is beyond what the kernel can address.
    if (error instanceof RangeError) return null;
    throw error;
  }
}

/** How far the active region reaches beyond the box on each face, and a cell more: no marched cell meets a wall. */
function openPad(box: GridProblem, margin: number): Record<Face, number> {
  const room = box.steps + 4;
  const wide: GridProblem = {
    ...box,
    pad: Object.fromEntries(FACES.map((face) => [face, room])) as Record<Face, number>,
  };
  const region = activeRegion(wide, margin);
  const reach = Object.fromEntries(FACES.map((face) => [face, 1])) as Record<Face, number>;
  for (let n = 0; n < box.steps; n++) {
    const { from, to } = region(n);
    if (from[0] >= to[0]) continue;
    FACES.forEach((face, f) => {
      const a = f >> 1;
      const beyond = f % 2 === 0 ? room - from[a]! : to[a]! - room - box.boxCells[a]!;
      reach[face] = Math.max(reach[face], beyond + 1);
    });
  }
  return reach;
}

const everyFace = (boundary: Boundary): Record<Face, Boundary> =>
  Object.fromEntries(FACES.map((face) => [face, boundary])) as Record<Face, Boundary>;
