import { expect, test } from 'vitest';
import { planCases } from '../run/planCases.ts';
import { ofTolerance, planAll } from '../run/planRuns.ts';
import { factors, predictionsOf, printPredictions, withinTwo } from '../run/predictions.ts';

test('60 seeded scenarios: planned runs meet their tolerance, and not by hiding behind caution', async () => {
  const runs = await planAll(planCases(20_260, 60));
  const share = ofTolerance(runs);
  const met = share.filter((x) => x <= 1).length;
  console.log(`${met} of 60 meet it; median ${share[30]!.toFixed(3)} of the tolerance, worst ${share[59]!.toFixed(3)}`);
  expect(met).toBeGreaterThanOrEqual(57);
  expect(share[30]).toBeGreaterThanOrEqual(0.6);
});

test('predicted against measured, 40 scenarios in double precision', () => {
  const cells = [8, 9, 11, 13];
  const clearances = [4, 5, 6, 8, 12];
  const list = planCases(31_337, 40).flatMap((each, n) => predictionsOf(each, cells[n % 4]!, clearances[n % 5]!));
  printPredictions(list);
  const within = withinTwo(list);
  const { time, spectrum, within: share } = factors(list);
  console.table([{ time, spectrum, 'within 1.05': share, ...within }]);
  expect(time).toBeLessThan(1.1);
  expect(spectrum).toBeLessThan(1.1);
  expect(share).toBeGreaterThanOrEqual(0.9);
  for (const layers of [8, 10, 12]) expect(within[`cpml${layers}`]).toBeGreaterThanOrEqual(0.8);
  // Six layers let more of grazing and of short waves through than one number can tell.
  expect(within.cpml6).toBeGreaterThanOrEqual(0.6);
  expect(within.mur1).toBeGreaterThanOrEqual(0.7);
});
