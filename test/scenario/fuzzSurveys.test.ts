import fc from 'fast-check';
import { expect, test } from 'vitest';
import { fuzzSurveys } from './fuzzSurveys.ts';

test('whatever a survey holds, it has cases or is refused in words: 1000 drawn ones', () => {
  const seen = { loaded: 0, refused: 0 };
  fc.assert(fuzzSurveys(seen), { seed: 41, numRuns: 1000 });
  console.log(seen);
  expect(Math.min(seen.loaded, seen.refused)).toBeGreaterThan(20);
});
