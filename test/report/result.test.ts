import { describe, expect, it } from 'vitest';
import { type Result, resultJsonSchema, resultSchema, withinTolerance } from '../../src/compare/result.ts';
import { resultJson } from '../../src/report/json.ts';
import { exampleReport } from './example.ts';

const { result } = exampleReport();

describe('result.json', () => {
  it('gives back the same result', () => {
    expect(JSON.parse(resultJson(result))).toEqual(JSON.parse(JSON.stringify(result)));
    expect(resultSchema.parse(JSON.parse(resultJson(result)))).toBeDefined();
  });

  it('has the published names, and raw numbers below floors', () => {
    const read = JSON.parse(resultJson(result)) as Result;
    expect(read.norms.E.relativeL2).toBeTypeOf('number');
    expect(read.norms.H.relativeLinf).toBeTypeOf('number');
    expect(Object.keys(read.budget)).toEqual([
      'boundary',
      'lattice',
      'boundaryAndLattice',
      'gridding',
      'quadrature',
      'total',
    ]);
    expect(read.budget.quadrature.relativeL2!).toBeLessThan(read.budget.quadrature.floor!);
    expect(read.budget.quadrature.relativeL2!).toBeGreaterThan(0);
    expect(read.observers[0]!.budget!.total.relativeL2).toBeCloseTo(read.observers[0]!.E!.relativeL2!, 14);
    for (const key of ['closest', 'farthest', 'wallClearance', 'band', 'sentence'])
      expect(read.verdict).toHaveProperty(key);
    expect(read.verdict).not.toHaveProperty('remedy');
  });

  it('refuses to be written with NaN', () => {
    const spoilt = { ...result, integral: { ...result.integral, errorEstimate: Number.NaN } };
    expect(() => resultJson(spoilt)).toThrow(/errorEstimate/);
  });

  it('is described by a JSON Schema that names units', () => {
    const schema = JSON.stringify(resultJsonSchema());
    expect(schema).toContain('https://json-schema.org/draft/2020-12/schema');
    expect(schema).toContain('"description":"Δt, s"');
  });
});

describe('within tolerance', () => {
  const withErrors = (errors: readonly (number | null)[], tolerance = 0.05) => ({
    ...result,
    tolerance,
    observers: errors.map((relativeL2) => ({
      ...result.observers[0]!,
      E: { ...result.observers[0]!.E!, relativeL2 },
    })),
  });
  const outside = result.observers.find(({ inside }) => !inside)!;

  it('means the largest E error of observers in the box', () => {
    expect(withinTolerance(withErrors([0.01, 0.05]))).toBe(true);
    expect(withinTolerance(withErrors([0.01, 0.0501]))).toBe(false);
    expect(withinTolerance({ ...withErrors([0.01]), observers: [...withErrors([0.01]).observers, outside] })).toBe(
      true,
    );
  });

  it('means the verdict’s best bin where no observer has a figure', () => {
    const best = result.verdict.closest.status === 'crossing' ? result.verdict.closest.best.error : Number.NaN;
    for (const observers of [[], [outside], withErrors([null]).observers]) {
      expect(withinTolerance({ ...result, observers, tolerance: best * 1.01 })).toBe(true);
      expect(withinTolerance({ ...result, observers, tolerance: best * 0.99 })).toBe(false);
    }
    const unmeasured = { ...result.verdict.closest, status: 'unmeasured' as const, reason: 'window too short' };
    const { best: _, ...closest } = unmeasured as typeof unmeasured & { best: unknown };
    expect(withinTolerance({ ...result, observers: [], verdict: { ...result.verdict, closest } })).toBe(false);
  });
});
