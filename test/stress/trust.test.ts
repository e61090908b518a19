import { expect, test } from 'vitest';
import { trustCases, worthOf } from '../verify/trustCases.ts';

test('error estimates of all 10 000 questions, however they are integrated', () => {
  const cases = trustCases();
  expect(cases.length).toBe(10_000);
  const rows: Record<string, unknown> = {};
  for (const options of [
    { method: 'best' },
    { method: 'quadrature' },
    { method: 'quadrature', tolerance: 1e-6 },
  ] as const) {
    const worth = worthOf(cases, options);
    rows[JSON.stringify(options)] = worth;
    expect(worth.covered / worth.errors).toBeGreaterThanOrEqual(0.999);
    // A looser tolerance stops sooner, mostly far below what it asked for: there estimates are bounds and no more.
    if (!('tolerance' in options)) expect(worth.close / worth.aboveRounding).toBeGreaterThanOrEqual(0.9);
    expect(worth.untold).toBe(0);
  }
  console.table(rows);
});
