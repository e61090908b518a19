import { expect, test } from 'vitest';
import { randomCases } from '../lattice/cases.ts';
import { measure, type Outcome, print, summary } from '../lattice/measure.ts';

/** The long table of predicted against measured error; bounds as in the sample of the verify tests. */
test.each([
  { seed: 101, runs: 24, observers: 4, fewest: 8, most: 14 },
  { seed: 202, runs: 4, observers: 1, fewest: 18, most: 24 },
])('lattice predictions, $runs runs from $fewest to $most cells per shortest wavelength', (table) => {
  const outcomes: Outcome[] = [];
  for (const spec of randomCases(table.seed, table.runs, table.observers, table.fewest, table.most)) {
    const result = measure(spec);
    print(result);
    outcomes.push(...result.outcomes);
  }
  const time = summary(outcomes, 'time');
  const spectrum = summary(outcomes, 'spectrum');
  console.table({ time, spectrum });
  expect(time['worst factor']).toBeLessThan(1.1);
  expect(spectrum['worst factor']).toBeLessThan(1.05);
});
