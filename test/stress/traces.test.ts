import fc from 'fast-check';
import { expect, test } from 'vitest';
import { COMPONENTS, type Component } from '../../src/trace/trace.ts';
import { fuzzTraceReaders } from '../files/fuzzTraces.ts';

test('whatever a file of traces holds, it is read or refused in words: 20 000 drawn files', () => {
  const staggered = Object.fromEntries(COMPONENTS.map((c) => [c, [0, 0, 0] as const])) as Record<
    Component,
    readonly [number, number, number]
  >;
  const observers = ['A', 'far'].map((name, n) => ({ name, at: [0.1 + n, 0, 0] as const, staggered }));
  const found = fc.check(fuzzTraceReaders({ observers, permeability: 1.25663706127e-6 }), {
    seed: 12,
    numRuns: 20_000,
  });
  console.log(`${found.numRuns} files`);
  expect(found.failed, fc.defaultReportMessage(found) ?? '').toBe(false);
});
