import { expect, test } from 'vitest';
import { gridSources } from '../../src/gridding/gridding.ts';
import { griddedHistory } from '../../src/retarded/gridded.ts';
import { exactHistory } from '../../src/retarded/history.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { type FieldHistory, instantsOf, type SamplePoints } from '../../src/trace/trace.ts';
import { asked, orders, relative, solveHere } from './solveHere.ts';

/** −40 dB of what radiates at 2 GHz: the shortest wavelength is 0.15 m. */
const SIGMA = 0.312e-9;

/** The components of a vector moved round so that what was z is now `axis`: x → y → z → x. */
const turned = (v: readonly number[], axis: number): Vec3 => {
  const out = [0, 0, 0];
  v.forEach((x, a) => {
    out[(a + axis + 1) % 3] = x;
  });
  return out as unknown as Vec3;
};

/** A wire of 60 mm on a grid line along `axis`, a current wave on it, and observers off every symmetry plane. */
const wireAlong = (axis: number, h: number) => ({
  sources: [
    {
      type: 'wire',
      points: [turned([0, 0, -0.03], axis), turned([0, 0, 0.03], axis)],
      current: {
        profile: 'travelling',
        waveform: { type: 'gaussianDerivative', amplitude: 1, delay: 5.5 * SIGMA, sigma: SIGMA },
      },
    },
  ],
  grid: {
    cellSize: h,
    box: { from: turned([-0.03, -0.03, -0.06], axis), to: turned([0.18, 0.15, 0.12], axis) },
    precision: 'double',
  },
  duration: 11 * SIGMA + 0.9e-9,
});

/** Ten cells of the coarsest grid from the wire, or more. */
const PLACES = [
  [0.12, 0.06, 0.03],
  [0.15, 0.09, -0.03],
  [0.06, 0.12, 0.09],
];

test('the lattice part is of second order at a fixed place, and the same along x, y and z', () => {
  const sizes = [10e-3, 7.5e-3, 5e-3];
  const errors = sizes.map((h) => {
    const solved = solveHere(
      asked(wireAlong(2, h)),
      PLACES.map((p) => turned(p, 2)),
    );
    const [free, gridded, exact] = [solved.free(), solved.gridded(), solved.exact()];
    return PLACES.map((_, p) => relative(free, gridded, exact, p));
  });
  console.log('cell, lattice part at three places (%), orders');
  for (const [m, h] of sizes.entries())
    console.log(`${1e3 * h} mm  ${errors[m]!.map((e) => (100 * e).toFixed(4)).join('  ')}`);
  PLACES.forEach((_, p) => {
    const found = orders(
      sizes,
      errors.map((e) => e[p]!),
    );
    console.log(`place ${p}: orders ${found.map((o) => o.toFixed(3)).join(', ')}`);
    for (const order of found) {
      expect(order).toBeGreaterThan(1.9);
      expect(order).toBeLessThan(2.2);
    }
  });
  for (const axis of [0, 1]) {
    const solved = solveHere(
      asked(wireAlong(axis, sizes[0]!)),
      PLACES.map((p) => turned(p, axis)),
    );
    const [free, gridded, exact] = [solved.free(), solved.gridded(), solved.exact()];
    PLACES.forEach((_, p) => {
      expect(Math.abs(relative(free, gridded, exact, p) / errors[0]![p]! - 1)).toBeLessThan(1e-6);
    });
  }
});

/** All six components at one and the same place, which refinement does not move. */
function fixedPlaces(places: readonly Vec3[]): SamplePoints {
  return {
    count: places.length,
    cell: new Int32Array(3 * places.length),
    position: Float64Array.from(places.flatMap((p) => Array.from({ length: 6 }, () => p).flat())),
  };
}

/** The gridding part alone: two integrals, no grid run. */
function griddingPart(json: Parameters<typeof asked>[0], places: readonly Vec3[]): number[] {
  const { scenario, steps, timeStep } = asked(json);
  const { grid, medium, sources } = scenario;
  const points = fixedPlaces(places);
  const instants = instantsOf(steps, timeStep);
  const gridded = gridSources(sources, { origin: grid.box.from, cellSize: grid.cellSize, cells: grid.cells });
  const asHistory = (values: Float64Array): FieldHistory => ({ points, instants, values });
  const a = asHistory(griddedHistory(gridded, grid.box.from, grid.cellSize, medium, points, instants).values);
  const b = asHistory(exactHistory(sources, medium, points, instants).values);
  return places.map((_, p) => relative(a, b, b, p));
}

test('the gridding part of a wire on a grid line is of order 2.00 ± 0.05', () => {
  const sizes = [10e-3, 5e-3, 2.5e-3];
  const errors = sizes.map((h) =>
    griddingPart(
      wireAlong(2, h),
      PLACES.map((p) => turned(p, 2)),
    ),
  );
  PLACES.forEach((_, p) => {
    const list = errors.map((e) => e[p]!);
    const found = orders(sizes, list);
    console.log(
      `place ${p}: gridding part ${list.map((e) => (100 * e).toFixed(4)).join(', ')} %, orders ${found.map((o) => o.toFixed(3)).join(', ')}`,
    );
    for (const order of found) expect(Math.abs(order - 2)).toBeLessThan(0.05);
  });
});

test('the gridding part of a tilted wire is of order 2.0 ± 0.3 over a ladder of five', () => {
  // Its constant depends on where the wire's ends lie in their cells, which every size changes: hence a fit over many.
  const sizes = [8e-3, 5.6e-3, 4e-3, 2.8e-3, 2e-3];
  const wire = (h: number) => ({
    ...wireAlong(2, h),
    sources: [
      {
        ...wireAlong(2, h).sources[0]!,
        points: [
          [-0.0132, -0.0129, -0.0233],
          [0.0156, 0.0087, 0.0247],
        ],
      },
    ],
  });
  const errors = sizes.map((h) =>
    griddingPart(
      wire(h),
      PLACES.map((p) => turned(p, 2)),
    ),
  );
  PLACES.forEach((_, p) => {
    const list = errors.map((e) => e[p]!);
    const fitted = slope(
      sizes.map((h) => Math.log(h)),
      list.map((e) => Math.log(e)),
    );
    console.log(
      `place ${p}: gridding part ${list.map((e) => (100 * e).toFixed(4)).join(', ')} %, fitted order ${fitted.toFixed(3)}`,
    );
    expect(Math.abs(fitted - 2)).toBeLessThan(0.3);
  });
});

/** Least-squares slope of y over x. */
function slope(x: readonly number[], y: readonly number[]): number {
  const mean = (v: readonly number[]) => v.reduce((sum, a) => sum + a, 0) / v.length;
  const [mx, my] = [mean(x), mean(y)];
  return x.reduce((sum, a, m) => sum + (a - mx) * (y[m]! - my), 0) / x.reduce((sum, a) => sum + (a - mx) ** 2, 0);
}

test('a uniform current on grid lines is gridded exactly: no gridding part', () => {
  const json = wireAlong(2, 10e-3);
  // Delayed by 9 sigma, so that the cut at t = 0 is at rounding level: the two integrals tell its front apart.
  const waveform = { ...json.sources[0]!.current.waveform, delay: 9 * SIGMA };
  const uniform = { ...json.sources[0]!, current: { profile: 'uniform', waveform } };
  // What remains is interpolation in time and the rule along edges, 1e-8 of the peak asked of each.
  for (const error of griddingPart(
    { ...json, sources: [uniform] },
    PLACES.map((p) => turned(p, 2)),
  ))
    expect(error).toBeLessThan(1e-7);
});

test('a dipole keeps its centroid wherever it lies in a cell: ≤ 1 % at 20 cells', () => {
  const h = 5e-3;
  const found = [0, 0.1, 0.25, 0.4, 0.5, 0.8].map((f) => {
    const json = {
      ...wireAlong(2, h),
      sources: [
        {
          type: 'dipole',
          at: [f * h, 0.7 * f * h, -f * h],
          direction: [0, 0, 1],
          length: h,
          current: { waveform: { type: 'gaussianDerivative', amplitude: 1, delay: 5.5 * SIGMA, sigma: SIGMA } },
        },
      ],
    };
    return Math.max(
      ...griddingPart(json, [
        [0.1, 0, 0],
        [0.07, 0.07, 0.02],
        [0.02, 0, 0.098],
      ]),
    );
  });
  console.log(`gridding part of a dipole at 20 cells: ${found.map((e) => `${(100 * e).toFixed(3)} %`).join(', ')}`);
  for (const error of found) expect(error).toBeLessThan(0.01);
});
