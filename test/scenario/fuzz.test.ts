import { expect, test } from 'vitest';
import { drawn } from '../hostile/drawn.ts';
import { fuzzScenarios, fuzzScenarioTexts } from './fuzzScenarios.ts';
import { fuzzSurveys } from './fuzzSurveys.ts';

test('a mutated scenario is a scenario or has problems, and never throws: 1000 drawn ones', () => {
  const seen = { loaded: 0, refused: 0 };
  drawn(fuzzScenarios(seen), 31, 1000);
  console.log(seen);
  expect(Math.min(seen.loaded, seen.refused)).toBeGreaterThan(20);
});

test('any text is refused or loads, and never throws: 1000 drawn ones', () => {
  drawn(fuzzScenarioTexts({ loaded: 0, refused: 0 }), 32, 1000);
});

test('whatever a survey holds, it has cases or is refused in words: 1000 drawn ones', () => {
  const seen = { loaded: 0, refused: 0 };
  drawn(fuzzSurveys(seen), 41, 1000);
  console.log(seen);
  expect(Math.min(seen.loaded, seen.refused)).toBeGreaterThan(20);
});
