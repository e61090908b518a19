import { expect, test } from 'vitest';
import { withinTolerance } from '../../src/compare/result.ts';
import { compareSolvers } from '../../src/run/compare.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';

/** What a remedy promises is tried: the changed scenario meets the tolerance that was missed. */
test.each([
  { name: 'simple walls sent too much back', example: 'dipole-near-corner', tolerance: 0.03, grid: {} },
  {
    name: 'cells too large, and simple walls',
    example: 'centre-fed-wire',
    tolerance: 0.004,
    grid: { boundary: { type: 'mur1' } },
  },
] as const)('a remedy mends what was outside: $name', async ({ example, tolerance, grid }) => {
  const given = EXAMPLES[example];
  const before = { ...given, tolerance, grid: { ...given.grid, ...grid } };
  const { result } = await compareSolvers(before);
  expect(withinTolerance(result)).toBe(false);
  const { sentence, change } = result.verdict.remedy!;
  console.log(sentence);
  const { cellSize, box, boundary, predicted } = change!;
  expect(predicted).toBeLessThanOrEqual(tolerance);
  const after = { ...before, grid: { ...before.grid, cellSize, box, boundary } };
  const mended = (await compareSolvers(after)).result;
  const errors = mended.observers.flatMap(({ E }) => (E ? [E.relativeL2!] : []));
  console.log(`predicted ${predicted}, measured ${Math.max(...errors)}`);
  expect(withinTolerance(mended)).toBe(true);
});

test('nothing is mended that is within its tolerance', async () => {
  const { result } = await compareSolvers(EXAMPLES['bench-cable-pulse']);
  expect(withinTolerance(result)).toBe(true);
  expect(result.verdict.remedy).toBeUndefined();
});
