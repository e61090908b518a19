import fc from 'fast-check';
import { expect } from 'vitest';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { expandSurvey, loadSurvey, MAX_CASES } from '../../src/scenario/survey.ts';

const keys = fc.oneof(
  fc.constantFrom(
    'grid.cellSize',
    'grid.clearance',
    'grid.courant',
    'grid.box',
    'sources.0.at',
    'sources.9.at',
    'title',
  ),
  fc.constantFrom('grid.boundary.layers', '__proto__', '__proto__.x', 'constructor.prototype', 'grid..x', '', 'x'),
  fc.string({ maxLength: 8 }),
);
const values = fc.oneof(
  fc.constantFrom<unknown>('5 mm', '1e400 m', '-1 mm', 0.5, 0, -0, 1e308, Number.NaN, Infinity, null, 'pec', [], {}),
  fc.jsonValue({ maxDepth: 2 }),
);
/** Sound but for what its values are: those are for the cases to refuse. */
const plausible = fc.record({
  scenario: fc.constantFrom(...Object.keys(EXAMPLES)),
  vary: fc.dictionary(
    fc.constantFrom('grid.cellSize', 'grid.courant', 'grid.boundary.layers', 'title', 'duration'),
    fc.array(values, { minLength: 1, maxLength: 6 }),
    { minKeys: 1, maxKeys: 4 },
  ),
});
const surveys = fc.oneof(
  { weight: 2, arbitrary: plausible },
  {
    weight: 4,
    arbitrary: fc.record(
      {
        title: fc.oneof(fc.string(), values),
        scenario: fc.oneof(fc.constantFrom<unknown>(...Object.values(EXAMPLES), 'small-loop', 'nowhere'), values),
        vary: fc.oneof(
          { weight: 5, arbitrary: fc.dictionary(keys, fc.array(values, { maxLength: 12 }), { maxKeys: 6 }) },
          values,
        ),
        combine: fc.constantFrom<unknown>('all', 'paired', 'paried', 3),
      },
      { requiredKeys: ['scenario', 'vary'] },
    ),
  },
  values,
  fc.string(),
);

/** Whatever a survey is, its cases can be told, or it is refused in words. @param seen counts of both */
export const fuzzSurveys = (seen: { loaded: number; refused: number }) =>
  fc.property(surveys, (survey) => {
    const result = loadSurvey(survey, (name) => {
      if (Object.hasOwn(EXAMPLES, name)) return structuredClone(EXAMPLES[name as keyof typeof EXAMPLES]);
      throw new Error('there is no such file');
    });
    if ('survey' in result) {
      seen.loaded++;
      const cases = expandSurvey(result.survey);
      expect(cases.length).toBeGreaterThan(0);
      expect(cases.length).toBeLessThanOrEqual(MAX_CASES);
    } else {
      seen.refused++;
      expect(result.problems.length).toBeGreaterThan(0);
      for (const { message } of result.problems) expect(message).not.toMatch(/Invalid input|undefined|\[object/);
    }
    expect(({} as Record<string, unknown>).x).toBeUndefined();
  });
