import { describe, expect, test } from 'vitest';
import { gridSources } from '../../src/gridding/gridding.ts';
import { type FieldValue, fieldOf } from '../../src/retarded/field.ts';
import { prepareSources } from '../../src/retarded/prepare.ts';
import { continuityResidual, residualsAt, residualsOf } from '../../src/run/residuals.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { centreFed, loop, smooth, travelling, unipolar, vacuum, wire } from '../retarded/sources.ts';

const bent: readonly Vec3[] = [
  [0, 0, -0.03],
  [0.01, 0, 0.03],
  [0.02, 0.03, 0.03],
];
const points: readonly Vec3[] = [
  [0.06, -0.03, 0.05],
  [0.2, 0.1, -0.1],
];

describe('equations that the exact field leaves', () => {
  test('little of, whatever the source', () => {
    const rows: Record<string, unknown> = {};
    for (const [name, sources] of [
      ['centre-fed wire', centreFed([0, 0, 0], [0.48, 0.36, 0.8], 0.05, smooth)],
      ['slow wave that leaves charge', [wire(bent, travelling(0.6), unipolar)]],
      ['loop', [loop([0, 0, 0], [0, 0.6, 0.8], 0.03, smooth)]],
    ] as const) {
      const found = residualsOf(sources, vacuum, points, 4e-9)!;
      rows[name] = found;
      // h^4/30 of the fifth and h^4/90 of the sixth derivative in steps of 0.01 of the nearest scale: 5!, 6!/2 of it for
      // a potential that goes as 1/r.
      expect(found.gauge).toBeLessThan(1e-7);
      expect(found.potentials).toBeLessThan(1e-7);
      expect(found.wave).toBeLessThan(1e-7);
    }
    console.table(rows);
  });

  test('much of, where one of its parts is wrong', () => {
    const right = fieldOf(prepareSources([wire(bent, travelling(0.6), smooth)], vacuum, 'best'), { tolerance: 1e-11 });
    const spoilt = (change: (v: FieldValue) => Partial<FieldValue>) =>
      residualsAt(
        (p, t) => ({ ...right(p, t), ...change(right(p, t)) }),
        vacuum,
        points[0]!,
        [1.8e-9, 2.1e-9, 2.4e-9],
        5e-4,
      )!;
    expect(spoilt(({ phi }) => ({ phi: 1.01 * phi })).gauge).toBeGreaterThan(1e-3);
    expect(spoilt(({ E }) => ({ E: [1.01 * E[0], E[1], E[2]] })).potentials).toBeGreaterThan(1e-3);
    // What runs a hundredth faster obeys another wave equation.
    const faster = (p: Vec3, t: number) => right(p, 1.01 * t);
    expect(residualsAt(faster, vacuum, points[0]!, [1.8e-9, 2.1e-9, 2.4e-9], 5e-4)!.wave).toBeGreaterThan(1e-3);
    expect(residualsOf([wire(bent, travelling(0.6), smooth)], vacuum, [[9, 9, 9]], 1e-9)).toBeNull();
  });

  test('continuity at the nodes of the grid', () => {
    const grid = {
      origin: [-0.1, -0.1, -0.1] as const,
      cellSize: [5e-3, 4e-3, 6e-3] as const,
      cells: [40, 50, 34] as const,
    };
    const gridded = gridSources([wire(bent, travelling(0.6), unipolar)], grid);
    const residual = continuityResidual(gridded, 3e-9);
    console.log(`continuity: ${residual.toExponential(1)}`);
    // A few dozen weights of size 1 at a node.
    expect(residual).toBeLessThan(64 * Number.EPSILON);
    const { weight } = gridded.charges;
    const broken = {
      ...gridded,
      charges: { ...gridded.charges, weight: weight.map((w, n) => (n === 7 ? 1.1 * w : w)) },
    };
    expect(continuityResidual(broken, 3e-9)).toBeGreaterThan(1e-4);
  });
});
