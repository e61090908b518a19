import { afterEach, describe, expect, test, vi } from 'vitest';
import { COMPONENTS, type Component } from '../../src/trace/trace.ts';
import { fuzzLinks, fuzzRoundTrips } from '../app/fuzzLinks.ts';
import { fuzzMessages, startHere, WORKER_NAMES } from '../app/fuzzMessages.ts';
import { fuzzBaselines, fuzzMaps, fuzzPoints, fuzzTables } from '../files/fuzzTables.ts';
import { fuzzTraceReaders } from '../files/fuzzTraces.ts';
import { drawn, drawnInTurns } from '../hostile/drawn.ts';
import { fuzzScenarios, fuzzScenarioTexts } from '../scenario/fuzzScenarios.ts';
import { fuzzSurveys } from '../scenario/fuzzSurveys.ts';

/** Each kind of input, drawn so often; other seeds than in every test. */
const RUNS = 20_000;

/** Of them for each of the page's workers: a whole number, with a fraction of a case the drawing would not end. */
const RUNS_A_WORKER = Math.ceil(RUNS / WORKER_NAMES.length);

const counts = (seen: object) => {
  console.log(JSON.stringify(seen));
  expect(Math.min(...(Object.values(seen) as number[]))).toBeGreaterThan(RUNS / 50);
};

afterEach(() => vi.unstubAllGlobals());

describe('20 000 drawn cases end in a result or in a refusal in words', () => {
  test('scenarios', () => {
    const seen = { loaded: 0, refused: 0 };
    drawn(fuzzScenarios(seen), 131, RUNS);
    counts(seen);
  });

  test('texts of scenarios', () => {
    drawn(fuzzScenarioTexts({ loaded: 0, refused: 0 }), 132, RUNS);
  });

  test('surveys', () => {
    const seen = { loaded: 0, refused: 0 };
    drawn(fuzzSurveys(seen), 42, RUNS);
    counts(seen);
  });

  test('files of traces: CSV, .npy, .npz', () => {
    const staggered = Object.fromEntries(COMPONENTS.map((c) => [c, [0, 0, 0] as const])) as Record<
      Component,
      readonly [number, number, number]
    >;
    const observers = ['A', 'far'].map((name, n) => ({ name, at: [0.1 + n, 0, 0] as const, staggered }));
    drawn(fuzzTraceReaders({ observers, permeability: 1.25663706127e-6 }), 12, RUNS);
  });

  test('tables of currents', () => {
    const seen = { taken: 0, refused: 0 };
    drawn(fuzzTables(seen), 171, RUNS);
    counts(seen);
  });

  test('files of points', () => {
    const seen = { taken: 0, refused: 0 };
    const { property, end } = fuzzPoints(seen);
    try {
      drawn(property, 172, RUNS);
    } finally {
      end();
    }
    counts(seen);
  });

  test('earlier results', () => {
    const seen = { taken: 0, refused: 0 };
    drawn(fuzzBaselines(seen), 173, RUNS);
    counts(seen);
  });

  test('maps of traces', () => {
    const seen = { taken: 0, refused: 0 };
    drawn(fuzzMaps(seen), 174, RUNS);
    counts(seen);
  });

  test('links', async () => {
    const seen = { held: 0, none: 0, refused: 0 };
    await drawnInTurns(fuzzLinks(seen), 152, RUNS);
    counts(seen);
    await drawnInTurns(fuzzRoundTrips(), 151, RUNS / 4);
  });

  test.each(WORKER_NAMES)('messages to the worker “%s”', async (name) => {
    const asked = await startHere(name);
    const seen = { refused: 0, answered: 0 };
    await drawnInTurns(fuzzMessages(name, asked, seen), 161, RUNS_A_WORKER);
    console.log(name, seen);
    expect(seen.refused).toBeGreaterThan(RUNS_A_WORKER / 2);
  });
});
