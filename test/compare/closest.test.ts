import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { describe, expect, it } from 'vitest';
import { binEdge, binOf, type ErrorBin, errorBins, percentile } from '../../src/compare/bins.ts';
import { closestDistance } from '../../src/compare/closest.ts';
import { farthestDistance } from '../../src/compare/farthest.ts';
import { wallClearance } from '../../src/compare/wall.ts';
import { exp, log } from '../../src/elementary/elementary.ts';

const DECADE = Math.LN10;

/** Samples spread evenly in log distance from 10 mm to 1 m, with an error that is a function of distance times noise. */
function samplesOf(count: number, error: (r: number, u: number) => number, seed = 5) {
  const random = xoroshiro128plus(seed);
  const distance = Float64Array.from({ length: count }, (_, i) => exp(log(0.01) + ((i + 0.5) / count) * 2 * DECADE));
  return { distance, error: distance.map((r) => error(r, uniformFloat64(random))) };
}

describe('percentile', () => {
  it('of 1 … 100 at 95 % is 95', () => {
    const values = Array.from({ length: 100 }, (_, i) => i + 1);
    expect(
      percentile(
        values,
        values.map(() => 1),
        0.95,
      ),
    ).toBe(95);
  });

  it('follows weights: a value that stands for 10 of 100 cells is above the 95th', () => {
    expect(percentile([1, 7], [90, 10], 0.95)).toBe(7);
    expect(percentile([1, 7], [96, 4], 0.95)).toBe(1);
    expect(percentile([], [], 0.95)).toBeNaN();
  });
});

describe('logarithmic bins', () => {
  it('are anchored at 1 m, 12 a decade', () => {
    expect(binOf(1, 12)).toBe(0);
    expect(binOf(0.999, 12)).toBe(-1);
    expect(binOf(10.001, 12)).toBe(12);
    expect(binEdge(12, 12)).toBeCloseTo(10, 13);
  });

  it('count with 30 samples, not with 29, and leave out samples that do not count', () => {
    const distance = Float64Array.from({ length: 60 }, (_, i) => (i < 30 ? 1.05 : 2));
    const error = Float64Array.from({ length: 60 }, (_, i) => (i === 45 ? Number.NaN : 0.01));
    const bins = errorBins({ distance, error }, 12);
    expect(bins.map(({ samples, nearest }) => [samples, nearest])).toEqual([[30, 1.05]]);
  });

  it('give the 95th percentile of uniform noise', () => {
    // Uniform on [0, 1]: the sample quantile of n has standard deviation √(0.95·0.05/n) = 0.0069 at n = 1000.
    const bins = errorBins(
      samplesOf(24_000, (_, u) => u),
      12,
    );
    expect(bins).toHaveLength(24);
    for (const { percentile95 } of bins) expect(Math.abs(percentile95 - 0.95)).toBeLessThan(4 * 0.0069);
  });
});

describe('closest trusted distance', () => {
  it('is where (r₀/r)² meets the tolerance', () => {
    // 0.05 (50 mm/r)²: crosses at 50 mm. A bin's 95th percentile is its error near the lower edge, at most half a bin
    // (10^(1/24)) from the centre it is placed at, the same for every bin: the crossing is off by less than that.
    const found = closestDistance(
      samplesOf(2400, (r) => 0.05 * (0.05 / r) ** 2),
      0.05,
      1,
    );
    expect(found.status).toBe('crossing');
    if (found.status !== 'crossing') return;
    const halfBin = exp(DECADE / 24);
    console.log(`crossing ${found.distance} m, interval ${found.interval}`);
    expect(found.distance).toBeGreaterThan(0.05);
    expect(found.distance).toBeLessThan(0.05 * halfBin);
    expect(found.interval![0]!).toBeLessThanOrEqual(found.distance * (1 + 1e-12));
    expect(found.interval![1]!).toBeGreaterThan(0.05 / halfBin);
    expect(found.best.distance).toBeGreaterThan(0.9);
  });

  it('holds from every bin outward to the best: a bump on the way stops the walk', () => {
    // 1 % everywhere but 10 % between 0.1 m and 0.2 m; the best bin is the outermost.
    const found = closestDistance(
      samplesOf(2400, (r) => (r > 0.1 && r < 0.2 ? 0.1 : 0.011 - 0.001 * r)),
      0.05,
      1,
    );
    expect(found).toMatchObject({ status: 'crossing' });
    if (found.status === 'crossing') expect(found.distance).toBeGreaterThan(0.15);
  });

  it('may lie below the closest sample, or nowhere', () => {
    const everywhere = closestDistance(
      samplesOf(2400, () => 0.01),
      0.05,
      1,
    );
    expect(everywhere.status).toBe('closestSampled');
    if (everywhere.status === 'closestSampled') expect(everywhere.distance).toBeCloseTo(0.01, 4);
    const nowhere = closestDistance(
      samplesOf(2400, (r) => 0.07 + 0.1 * Math.abs(log(r / 0.2))),
      0.05,
      1,
    );
    expect(nowhere).toMatchObject({ status: 'none' });
    if (nowhere.status === 'none') {
      expect(nowhere.best.error).toBeGreaterThan(0.07);
      expect(nowhere.best.error).toBeLessThan(0.07 + 0.1 * (DECADE / 12));
      expect(nowhere.best.distance).toBeCloseTo(0.2, 1);
    }
  });

  it('says why nothing was measured', () => {
    const samples = samplesOf(100, () => Number.NaN);
    const status = Array.from({ length: 100 }, (_, i) =>
      i < 80 ? ('window too short' as const) : ('below floor' as const),
    );
    const found = closestDistance({ ...samples, status }, 0.05, 1);
    expect(found).toMatchObject({ status: 'unmeasured' });
    if (found.status === 'unmeasured') expect(found.reason).toContain('80 of 100 samples; lengthen `duration`');
  });

  it('has a bootstrap interval that repeats by seed and covers the spread of fresh draws', () => {
    const noisy = (seed: number) => samplesOf(1200, (r, u) => 0.05 * (0.1 / r) ** 2 * (0.5 + u), seed);
    const first = closestDistance(noisy(1), 0.05, 7);
    expect(closestDistance(noisy(1), 0.05, 7)).toEqual(first);
    const crossings = Array.from({ length: 40 }, (_, seed) => closestDistance(noisy(100 + seed), 0.05, 7)).map((c) =>
      c.status === 'crossing' ? c.distance : Number.NaN,
    );
    const covered = crossings.filter((c) => c >= first.interval![0]! && c <= first.interval![1]!).length;
    console.log(`interval ${first.interval}, ${covered} of 40 fresh draws inside`);
    // A 90 % interval around one draw holds about 75 % of other draws; 15 of 40 is 5 standard deviations below that.
    expect(covered).toBeGreaterThan(15);
    expect(first.interval![1]! / first.interval![0]!).toBeLessThan(1.2);
  });
});

describe('wall clearance', () => {
  it('is the distance inside which the total fails, source region left out', () => {
    const samples = samplesOf(2400, (d) => 0.05 * (0.08 / d));
    const far = samples.distance.map(() => 1);
    const found = wallClearance(samples, far, 0.03, 0.05);
    expect(found.status).toBe('crossing');
    // Six bins a decade: half a bin is 10^(1/12).
    if (found.status === 'crossing') {
      expect(found.distance).toBeGreaterThan(0.08);
      expect(found.distance).toBeLessThan(0.08 * exp(DECADE / 12));
    }
    // Errors of samples near the source do not count against the walls.
    const near = samples.distance.map((_, i) => (i % 2 === 0 ? 0.01 : 1));
    const spoilt = { ...samples, error: samples.error.map((e, i) => (i % 2 === 0 ? 10 : e)) };
    expect(wallClearance(spoilt, near, 0.03, 0.05).status).toBe('crossing');
    expect(wallClearance({ ...samples, error: samples.error.map(() => 0.01) }, far, 0, 0.05).status).toBe(
      'closestSampled',
    );
  });
});

describe('farthest trusted distance', () => {
  const binsOf = (errors: readonly number[]): ErrorBin[] =>
    errors.map((percentile95, i) => ({
      from: binEdge(i, 12),
      to: binEdge(i + 1, 12),
      centre: binEdge(i + 0.5, 12),
      nearest: binEdge(i, 12),
      samples: 30,
      percentile95,
    }));
  const bins = binsOf([0.2, 0.01, 0.012, 0.015, 0.018]);
  const edge = binEdge(5, 12);
  const growing = (factor: number) => (r: number) => factor * 0.018 * (r / binEdge(4.5, 12));

  it('is the nearest crossing over directions that radiate, named', () => {
    const model = {
      directions: [
        { name: 'along x', level: 1, distance: 50 },
        { name: 'along the diagonal', level: 0.5, distance: 100 },
        { name: 'along z', level: 0.01, distance: 0.05 },
      ],
      percentile95: (r: number) => growing(1.1)(r),
    };
    const found = farthestDistance(bins, 0.05, model);
    expect(found).toMatchObject({ status: 'extrapolated', direction: 'along x' });
    if (found.status === 'extrapolated') {
      expect(found.distance).toBe(50);
      // The bins grow a little faster or slower than r; the model's factor 1.1 is within 1.4 of all three.
      expect(found.agreement).toBeLessThan(1.4);
    }
  });

  it('is not extrapolated where the model misses the outer bins by more than 1.4', () => {
    const directions = [{ name: 'along x', level: 1, distance: 50 }];
    for (const factor of [1.5, 1 / 1.5]) {
      const found = farthestDistance(bins, 0.05, { directions, percentile95: growing(factor) });
      expect(found).toMatchObject({ status: 'boxEdge' });
      if (found.status === 'boxEdge') expect(found.distance).toBeCloseTo(edge, 12);
    }
    expect(farthestDistance(bins, 0.05)).toMatchObject({ status: 'boxEdge', reason: 'no prediction beyond the box' });
    const never = [{ name: 'along the diagonal', level: 1, distance: Number.POSITIVE_INFINITY }];
    expect(farthestDistance(bins, 0.05, { directions: never, percentile95: growing(1) })).toMatchObject({
      status: 'boxEdge',
      reason: 'the prediction never reaches the tolerance',
    });
  });

  it('is measured where a bin in the box fails', () => {
    const found = farthestDistance(binsOf([0.2, 0.01, 0.02, 0.08, 0.09]), 0.04);
    // log error is straight from 0.02 to 0.08, and 0.04 is half way.
    expect(found).toMatchObject({ status: 'measured' });
    if (found.status === 'measured') expect(found.distance).toBeCloseTo(binEdge(3, 12), 12);
  });

  it('is none where nothing passes, unmeasured without bins', () => {
    expect(farthestDistance(bins, 0.001).status).toBe('none');
    expect(farthestDistance([], 0.05).status).toBe('unmeasured');
  });
});
