import { expect, test } from 'vitest';
import { planCases } from '../run/planCases.ts';
import { ofTolerance, planAll } from '../run/planRuns.ts';
import { factors, predictionsOf, printPredictions, withinTwo } from '../run/predictions.ts';

/** A sample of what the stress tests do at length. */
test('planned runs meet their tolerance, and not by hiding behind caution', async () => {
  const runs = await planAll(planCases(20_260, 10));
  const share = ofTolerance(runs);
  // 57 of 60 are asked for at length: one of ten may miss.
  expect(share[8]).toBeLessThanOrEqual(1);
  expect((share[4]! + share[5]!) / 2).toBeGreaterThanOrEqual(0.6);
});

test('predicted against measured in double precision', () => {
  const list = planCases(31_337, 8).flatMap((each, n) => predictionsOf(each, [8, 10][n % 2]!, [4, 6, 8][n % 3]!));
  printPredictions(list);
  const { time, spectrum, within: share } = factors(list);
  console.table([{ time, spectrum, 'within 1.05': share, ...withinTwo(list) }]);
  expect(time).toBeLessThan(1.1);
  expect(spectrum).toBeLessThan(1.1);
  expect(share).toBeGreaterThanOrEqual(0.9);
  // A sample this small says no more of walls than that their size is right.
  for (const { walls } of list) for (const ratio of walls) expect(Math.max(ratio, 1 / ratio)).toBeLessThan(8);
});
