/** How long boundaries stay stable: random fields amid a small box, every face the same, and faces mixed. */
import { mediumOf } from '../../src/scenario/constants.ts';
import type { Boundary, Face } from '../../src/scenario/model.ts';
import { cellsBehind } from '../../src/scenario/walls.ts';
import { type EnergyHistory, energyFrom } from './energy.ts';
import { courantStep, cpml, everyFace, plainProblem, type Triple } from './problems.ts';

const speed = mediumOf(1, 1).speed;

export const BOUNDARIES: Readonly<Record<string, Boundary>> = {
  pec: { type: 'pec' },
  pmc: { type: 'pmc' },
  mur1: { type: 'mur1' },
  mur2: { type: 'mur2' },
  higdon2: { type: 'higdon2', angles: [0, Math.PI / 4], damping: 0.02 },
  liao: { type: 'liao', damping: 0.02 },
  cpml: cpml(5),
  splitPml: { type: 'splitPml', layers: 5, grading: 3, sigmaFactor: 1 },
};

/** Every kind of wall somewhere, each opposite another. */
const MIXED: Readonly<Record<Face, Boundary>> = {
  'x-': BOUNDARIES.mur1!,
  'x+': BOUNDARIES.cpml!,
  'y-': BOUNDARIES.higdon2!,
  'y+': BOUNDARIES.pmc!,
  'z-': BOUNDARIES.liao!,
  'z+': BOUNDARIES.splitPml!,
};

export interface Stability extends EnergyHistory {
  readonly boundary: string;
  readonly precision: 'single' | 'double';
}

/** Pairs of walls beside each other on all twelve edges: x faces of one kind, y and z faces of another. */
export function besides(steps: number): { readonly pair: string; readonly unstableAt: number | null }[] {
  const kinds = ['pec', 'mur1', 'mur2', 'higdon2', 'liao', 'cpml'];
  return kinds.flatMap((x) =>
    kinds
      .filter((yz) => yz !== x)
      .map((yz) => {
        const faces = { ...everyFace(BOUNDARIES[yz]!), 'x-': BOUNDARIES[x]!, 'x+': BOUNDARIES[x]! };
        const pad = Object.fromEntries(Object.entries(faces).map(([face, b]) => [face, cellsBehind(b)]));
        const problem = plainProblem([15, 14, 13], { steps, boundary: faces, pad: pad as Record<Face, number> });
        return { pair: `${x} beside ${yz}`, unstableAt: energyFrom(problem, 11, 50).unstableAt };
      }),
  );
}

export function stabilities(steps: number): Stability[] {
  const rows: Stability[] = [];
  const cellSize: Triple = [5e-3, 5e-3, 5e-3];
  for (const [name, boundary] of [...Object.entries(BOUNDARIES), ['mixed', MIXED] as const])
    for (const precision of ['single', 'double'] as const) {
      const faces = 'type' in boundary ? everyFace(boundary) : boundary;
      const pad = Object.fromEntries(Object.entries(faces).map(([face, b]) => [face, cellsBehind(b)])) as Record<
        Face,
        number
      >;
      const problem = plainProblem([15, 14, 13], {
        cellSize,
        timeStep: courantStep(0.99, cellSize, speed),
        steps,
        precision,
        boundary: faces,
        pad,
      });
      rows.push({ boundary: name, precision, ...energyFrom(problem, 11, 50) });
    }
  console.table(
    rows.map(({ boundary, precision, start, largest, last, unstableAt }) => ({
      boundary,
      precision,
      'largest/start': (largest / start).toPrecision(8),
      'last/start': (last / start).toExponential(2),
      stable: unstableAt === null ? `${steps} steps` : `until step ${unstableAt}`,
    })),
  );
  return rows;
}
