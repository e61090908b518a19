import { describe, expect, it } from 'vitest';
import { binOf } from '../../src/compare/bins.ts';
import { stratify } from '../../src/compare/stratify.ts';

type Triple = readonly [number, number, number];

const box = { cells: [30, 24, 20], origin: [-0.15, -0.12, -0.1], cellSize: [0.01, 0.01, 0.01] } as const;
/** A wire along z through the middle, 80 mm long. */
const toWire = ([x, y, z]: Triple) => Math.sqrt(x * x + y * y + Math.max(0, Math.abs(z) - 0.04) ** 2);
const sample = stratify(box, toWire, 3);
const count = sample.cell.length / 3;

describe('stratified cells', () => {
  it('stand for every cell of the box', () => {
    // Each stratum's weights add up to its cells exactly but for rounding.
    expect(sample.weight.reduce((a, b) => a + b, 0)).toBeCloseTo(30 * 24 * 20, 8);
    expect(sample.strata.cells.reduce((a, b) => a + b, 0)).toBe(30 * 24 * 20);
    console.log(`${count} samples of ${30 * 24 * 20} cells in ${sample.strata.cells.length} strata`);
    expect(count).toBeLessThan(30 * 24 * 20 * 0.2);
  });

  it.each([
    ['source', 12, sample.distance, toWire],
    [
      'wall',
      6,
      sample.wallDistance,
      ([x, y, z]: Triple) => Math.min(0.15 - Math.abs(x), 0.12 - Math.abs(y), 0.1 - Math.abs(z)),
    ],
  ] as const)(
    'fill every bin of distance to the %s with 30, or with all its cells',
    (_, perDecade, distances, distance) => {
      const cells = new Map<number, number>();
      const drawn = new Map<number, number>();
      const add = (to: Map<number, number>, d: number) =>
        to.set(binOf(d, perDecade), (to.get(binOf(d, perDecade)) ?? 0) + 1);
      for (let i = 0; i < 30; i++)
        for (let j = 0; j < 24; j++)
          for (let k = 0; k < 20; k++)
            add(cells, distance([-0.15 + (i + 0.5) * 0.01, -0.12 + (j + 0.5) * 0.01, -0.1 + (k + 0.5) * 0.01]));
      for (const d of distances) add(drawn, d);
      let compared = 0;
      for (const [bin, inBin] of cells) {
        const samples = drawn.get(bin) ?? 0;
        if (inBin < 30) continue;
        compared++;
        expect(samples).toBeGreaterThanOrEqual(30);
      }
      expect(compared).toBeGreaterThan(3);
    },
  );

  it('are drawn once each, in order, repeatably', () => {
    const numbers = Array.from({ length: count }, (_, p) => {
      const [i, j, k] = sample.cell.subarray(3 * p, 3 * p + 3);
      return (i! * 24 + j!) * 20 + k!;
    });
    expect(numbers.every((n, p) => p === 0 || n > numbers[p - 1]!)).toBe(true);
    expect(stratify(box, toWire, 3).cell).toEqual(sample.cell);
    expect(stratify(box, toWire, 4).cell).not.toEqual(sample.cell);
  });

  it('estimate a total without bias: the volume integral of a smooth function', () => {
    // f = x² over the box: Σ = Σ_cells x². Over 60 seeds the mean must lie within 4 of its own standard errors.
    const f = (i: number) => (-0.15 + (i + 0.5) * 0.01) ** 2;
    let exact = 0;
    for (let i = 0; i < 30; i++) exact += f(i) * 24 * 20;
    const estimates = Array.from({ length: 60 }, (_, seed) => {
      const { cell, weight } = stratify(box, toWire, seed);
      return weight.reduce((sum, w, p) => sum + w * f(cell[3 * p]!), 0);
    });
    const mean = estimates.reduce((a, b) => a + b, 0) / 60;
    const deviation = Math.sqrt(estimates.reduce((s, e) => s + (e - mean) ** 2, 0) / 59 / 60);
    console.log(`exact ${exact}, mean ${mean} ± ${deviation}`);
    expect(Math.abs(mean - exact)).toBeLessThan(4 * deviation);
    expect(deviation).toBeLessThan(0.02 * exact);
  });

  it('say which bins will be no evidence', () => {
    // Nearest cells lie √2·5 mm off the wire's axis, 4 × 8 of them beside it: that bin has 32; nearer ones do not exist.
    for (const bin of sample.underfilled) {
      expect(bin.cells).toBeLessThan(30);
      expect(bin.to).toBeGreaterThan(bin.from);
    }
    const tiny = stratify({ cells: [3, 3, 3], origin: [0, 0, 0], cellSize: [1, 1, 1] }, () => 2, 1);
    expect(tiny.cell.length).toBe(81);
    expect(tiny.weight.every((w) => w === 1)).toBe(true);
    expect(tiny.underfilled.map(({ of, cells }) => [of, cells])).toEqual([
      ['distance to the source', 27],
      ['distance to the wall', 26],
      ['distance to the wall', 1],
    ]);
  });

  it('hold a source through a cell’s centre', () => {
    const through = stratify(
      { cells: [5, 5, 5], origin: [0, 0, 0], cellSize: [1, 1, 1] },
      ([x, y, z]) => Math.hypot(x - 2.5, y - 2.5, z - 2.5),
      1,
    );
    // It is alone in its bin, so it is always drawn; a hundredth of a cell stands for its distance of 0.
    expect(Math.min(...through.distance)).toBe(0.01);
  });
});
