import fc from 'fast-check';
import { expect, test } from 'vitest';
import { fuzzSurveys } from '../scenario/fuzzSurveys.ts';

test('whatever a survey holds, it has cases or is refused in words: 20 000 drawn ones', () => {
  const seen = { loaded: 0, refused: 0 };
  fc.assert(fuzzSurveys(seen), { seed: 42, numRuns: 20_000 });
  console.log(seen);
  expect(Math.min(seen.loaded, seen.refused)).toBeGreaterThan(400);
});
