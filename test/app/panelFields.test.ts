import { describe, expect, test } from 'vitest';
import { BEGINNINGS, chosenBoundary, NEW_SOURCES } from '../../src/app/panelFields.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { BOUNDARIES, WAVEFORMS } from '../../src/scenario/schema.ts';

// What a panel writes into the file when something new is chosen must be sound as it stands.
describe('what panels begin with is sound', () => {
  const bench = EXAMPLES['bench-cable-pulse'];
  const [cable] = bench.sources;

  test.each(NEW_SOURCES.map((source) => [source.name, source] as const))('%s', (_, { made }) => {
    const sources = [...bench.sources, { name: 'new', ...made('20 mm') }];
    expect(loadScenario({ ...bench, sources })).toHaveProperty('scenario.sources.length', 2);
  });

  test.each(WAVEFORMS)('waveform %s', (type) => {
    const current = { ...cable.current, waveform: { type, ...BEGINNINGS[type] } };
    expect(loadScenario({ ...bench, sources: [{ ...cable, current }] })).toHaveProperty('scenario');
  });

  test.each(BOUNDARIES)('boundary %s', (type) => {
    const grid = { ...bench.grid, boundary: chosenBoundary(type) };
    expect(loadScenario({ ...bench, grid })).toHaveProperty('scenario');
  });
});
