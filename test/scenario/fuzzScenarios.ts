import fc from 'fast-check';
import { expect } from 'vitest';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';

/** Paths of all values in a JSON value. */
function pathsOf(node: unknown, path: string[] = []): string[][] {
  if (typeof node !== 'object' || node === null) return [path];
  return [path, ...Object.entries(node).flatMap(([key, value]) => pathsOf(value, [...path, key]))];
}

/** A copy with the value at a path replaced, or taken out when it is undefined. */
function mutate(root: unknown, path: readonly string[], value: unknown): unknown {
  if (path.length === 0) return value;
  const copy = structuredClone(root);
  const parent = path.slice(0, -1).reduce((node, key) => (node as never)[key], copy as object) as Record<
    string,
    unknown
  >;
  const last = path.at(-1)!;
  if (Array.isArray(parent) && !/^\d+$/.test(last)) return copy;
  if (value === undefined && Array.isArray(parent)) parent.splice(Number(last), 1);
  else if (value === undefined) delete parent[last];
  else parent[last] = value;
  return copy;
}

const words = [
  'mm',
  '5',
  '1e400 m',
  '-1 mm',
  '0 s',
  '3 kg',
  '',
  '1 A',
  '10 ns',
  '0.3 m',
  '2 GHz',
  'pec',
  'x',
  'waves',
  '5 %',
];
const values = fc.oneof(
  fc.constantFrom<unknown>(undefined, null, true, [], {}, ...words),
  fc.double(),
  fc.integer({ min: -3, max: 200 }),
  fc.constantFrom(0, -0, 1e-320, 1e308, -1e30, Number.NaN, Infinity),
  fc.string({ maxLength: 12 }),
  fc.tuple(fc.double(), fc.double(), fc.double()),
  fc.jsonValue({ maxDepth: 3 }),
);
const keys = fc.constantFrom(
  'sigma',
  'name',
  '__proto__',
  'constructor',
  'toString',
  'x-',
  'foo',
  'waves',
  'allowJump',
  'at',
);

/** What no example holds: currents given at arc lengths, in time and by frequency. */
const sampled = [
  { samples: [0, 1, 2, 1, 0].map((i, n) => [n * 1e-10, i, `${i} A`, 0]) },
  { phasors: [0.1, 1, -1, 0.1, 0].map((i, n) => [n * 3e8, i, n === 0 ? 0 : i, i, 0, 0, 0]) },
  { phasors: [[1e9, 1, 0, '1 mA', 0, 0, 0]] },
].map((rows) => {
  const scenario = structuredClone(EXAMPLES['bench-cable-pulse']) as unknown as { sources: [{ current: unknown }] };
  scenario.sources[0].current = { profile: 'sampled', positions: [0, 0.05, 0.1], ...rows };
  return scenario;
});

const scenarios = fc.constantFrom<object>(...Object.values(EXAMPLES), ...sampled).chain((example) => {
  const paths = pathsOf(example);
  const change = fc.tuple(fc.constantFrom(...paths), fc.option(keys, { freq: 4 }), values);
  return fc.array(change, { minLength: 1, maxLength: 4 }).map((changes) => {
    let scenario: unknown = example;
    for (const [path, key, value] of changes)
      try {
        scenario = mutate(scenario, key === null ? path : [...path, key], value);
      } catch {
        // An earlier change took away the place of this one.
      }
    return scenario;
  });
});

/** Cases counted by how they ended. */
export interface Seen {
  loaded: number;
  refused: number;
}

/** A mutated scenario is a scenario of finite numbers, or has problems in words; nothing is thrown. */
export const fuzzScenarios = (seen: Seen) =>
  fc.property(scenarios, (scenario) => {
    const result = loadScenario(scenario);
    if ('scenario' in result) {
      seen.loaded++;
      const { grid, sources, observers, planes, duration, tolerance } = result.scenario;
      expect(grid.cells.every((n) => Number.isInteger(n) && n > 0)).toBe(true);
      const numbers = [
        ...[duration, tolerance, grid.courant, grid.mask, ...grid.cellSize, ...grid.box.from, ...grid.box.to],
        ...observers.flatMap(({ at }) => at),
        ...planes.map(({ at }) => at),
      ];
      expect(numbers.filter((x) => !Number.isFinite(x))).toEqual([]);
      for (const { waveform } of sources) {
        expect(Number.isFinite(waveform.finalCharge) && waveform.peak > 0).toBe(true);
        expect(Number.isFinite(waveform.lastActivity(1e-3)) && waveform.highestFrequency(0.01) > 0).toBe(true);
      }
      return;
    }
    seen.refused++;
    expect(result.problems.length).toBeGreaterThan(0);
    for (const { path, message } of result.problems) {
      expect(message).toMatch(/\.$/);
      expect(message).not.toMatch(/Invalid input|undefined|\[object/);
      expect(message.length).toBeLessThan(600);
      expect(typeof path).toBe('string');
    }
  });

/** Any text is refused, or loads; nothing is thrown. */
export const fuzzScenarioTexts = (seen: Seen) => {
  const whole = JSON.stringify(EXAMPLES['tilted-wire']);
  const cuts = fc.tuple(fc.nat(whole.length), fc.nat(8), fc.string({ maxLength: 6 }));
  return fc.property(fc.oneof(fc.string(), cuts), (given) => {
    const text =
      typeof given === 'string' ? given : whole.slice(0, given[0]) + given[2] + whole.slice(given[0] + given[1]);
    const result = loadScenario(text);
    seen['scenario' in result ? 'loaded' : 'refused']++;
    expect('scenario' in result || result.problems.length > 0).toBe(true);
  });
};
