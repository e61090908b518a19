import { describe, expect, test } from 'vitest';
import { type TrustCase, trustCases, worthOf } from './trustCases.ts';

/** Every fifth: the stress test takes them all. */
const cases = trustCases().filter((_, n) => n % 5 === 0);

function groupedBy(key: (given: TrustCase) => string) {
  return [...new Set(cases.map(key))].map((name) => [name, cases.filter((given) => key(given) === name)] as const);
}

const percent = (part: number, of: number) => (of === 0 ? '—' : `${((100 * part) / of).toFixed(2)} %`);

describe('error estimates of the exact field against references of 64 bits (test/oracle/trust.py)', () => {
  test.each(['best', 'quadrature'] as const)('%s: bounds in 99.9 %, and no loose ones', (method) => {
    const rows: Record<string, unknown> = {};
    const groups = [
      ['all', cases] as const,
      ...groupedBy((given) => given.place),
      ...groupedBy((given) => given.kind),
      ...groupedBy((given) => given.waveform.type),
    ];
    for (const [name, group] of groups) {
      const worth = worthOf(group, { method });
      rows[name] = {
        errors: worth.errors,
        'within estimate': percent(worth.covered, worth.errors),
        'above rounding': worth.aboveRounding,
        'of them within 100 times': percent(worth.close, worth.aboveRounding),
        'estimate ≤ 1e-8': percent(worth.sharp, worth.errors),
        'evaluations a case': Math.round(worth.evaluationsPerCase),
      };
    }
    console.table(rows);
    const worth = worthOf(cases, { method });
    expect(worth.covered / worth.errors).toBeGreaterThanOrEqual(0.999);
    expect(worth.aboveRounding).toBeGreaterThan(0.003 * worth.errors);
    expect(worth.close / worth.aboveRounding).toBeGreaterThanOrEqual(0.9);
    // Within 1e-8 wherever the result does not say otherwise, however near and on whatever axis.
    expect(worth.untold).toBe(0);
  });
});
