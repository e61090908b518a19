import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import fc from 'fast-check';
import { expect } from 'vitest';
import { InputError } from '../../src/cli/input.ts';
import { readRows } from '../../src/cli/rows.ts';
import { baselineSchema, holdAgainst } from '../../src/compare/baseline.ts';
import { withTables } from '../../src/files/tables.ts';
import { parseTraceMap } from '../../src/files/traceMap.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { HOSTILE } from '../hostile/strings.ts';

/** Counts of how cases ended. */
export interface Seen {
  taken: number;
  refused: number;
}

const cell = fc.oneof(
  { weight: 6, arbitrary: fc.double({ noNaN: true, noDefaultInfinity: true, min: -1e3, max: 1e3 }).map(String) },
  fc.constantFrom('', ' ', 'nan', 'Infinity', '1e999', '0x10', '1,5', '"', '"1"', '-', ...HOSTILE),
  fc.string({ maxLength: 6 }),
);
/** A table that is nearly right: rising times, one odd cell or row now and then. */
const tableText = (heads: fc.Arbitrary<readonly string[]>) =>
  fc
    .tuple(
      heads,
      fc.array(fc.double({ noNaN: true, noDefaultInfinity: true, min: -1, max: 1 }), { minLength: 1, maxLength: 12 }),
      fc.array(fc.tuple(fc.nat(), fc.nat(), cell), { maxLength: 1 }),
      fc.constantFrom('\n', '\r\n', '\n\n'),
      fc.oneof({ weight: 6, arbitrary: fc.constant('') }, { weight: 1, arbitrary: fc.string({ maxLength: 8 }) }),
    )
    .map(([head, values, odd, end, more]) => {
      const last = values.length - 1;
      const rows = values.map((v, n) => [
        String(n * 1e-9),
        ...head.slice(1).map(() => String(n === 0 || n === last ? 0 : v)),
      ]);
      for (const [row, column, text] of odd) rows[row % rows.length]![column % head.length] = text;
      return [head, ...rows].map((line) => line.join(',')).join(end) + more;
    });

/** A header that may be anything. */
const anyOf = (head: fc.Arbitrary<string>) => fc.array(head, { minLength: 1, maxLength: 5 });

const words = (error: unknown, kind: typeof RangeError | typeof InputError): void => {
  if (!(error instanceof kind)) throw error;
  expect(error.message.length).toBeGreaterThan(10);
  expect(error.message).not.toMatch(/call stack|\[object|Invalid (array|typed)/);
};

/** Samples of a waveform and currents along a wire: what is taken makes a scenario, or one that is refused in words. */
export const fuzzTables = (seen: Seen) => {
  const bench = EXAMPLES['bench-cable-pulse'];
  const head = fc.oneof(
    fc.constantFrom('t', 'I', '0', '0.05', '0.1', '-1', 'x', '__proto__'),
    fc.string({ maxLength: 5 }),
  );
  const heads = fc.oneof(fc.constantFrom(['t', 'I'], ['t', '0', '0.05', '0.1']), anyOf(head));
  return fc.property(tableText(heads), fc.boolean(), (text, isSampled) => {
    const current = isSampled
      ? { profile: 'sampled', file: 'x.csv' }
      : { profile: 'uniform', waveform: { type: 'table', file: 'x.csv' } };
    let scenario: unknown;
    try {
      scenario = withTables({ ...bench, sources: [{ ...bench.sources[0], current }] }, () => text);
    } catch (error) {
      seen.refused++;
      words(error, RangeError);
      return;
    }
    const loaded = loadScenario(scenario);
    if ('problems' in loaded) {
      seen.refused++;
      for (const { message } of loaded.problems) expect(message).toMatch(/\.$/);
      return;
    }
    seen.taken++;
    const { waveform } = loaded.scenario.sources[0]!;
    expect(Number.isFinite(waveform.finalCharge) && waveform.peak > 0 && Number.isFinite(waveform.peak)).toBe(true);
    for (const t of [-1, 0, 1e-10, 3e-9, 1]) expect(Number.isFinite(waveform.value(t))).toBe(true);
  });
};

/** Places, instants, frequencies and directions as `exact` and `derive` read them. @param end removes the file */
export function fuzzPoints(seen: Seen) {
  const folder = mkdtempSync(join(tmpdir(), 'fieldassay-points-'));
  const file = join(folder, 'points.csv');
  const head = fc.oneof(
    { weight: 5, arbitrary: fc.constantFrom('x', 'y', 'z', 't', 'f', 'thetaDeg', 'phiDeg') },
    fc.constantFrom('__proto__', 'x ', '', 'constructor'),
  );
  const text = fc.oneof(
    tableText(anyOf(head)),
    tableText(anyOf(fc.constantFrom('x'))).map((rest) => `x,y,z,t\n${rest.replaceAll(',', '')}`),
    fc
      .array(fc.array(cell, { minLength: 4, maxLength: 4 }), { maxLength: 5 })
      .map((rows) => ['x,y,z,t', ...rows.map((row) => row.join(','))].join('\n')),
    fc
      .array(fc.double({ noNaN: true, noDefaultInfinity: true }), { minLength: 4, maxLength: 4 })
      .map((row) => `z,f,y,x\n${row}`),
    fc.string(),
  );
  const asked = fc.constantFrom(
    ['x', 'y', 'z', 't'],
    ['x', 'y', 'z', 't|f'],
    ['x', 'y', 'z'],
    ['thetaDeg', 'phiDeg', 'f'],
  );
  const property = fc.property(text, asked, (content, columns) => {
    writeFileSync(file, content);
    try {
      const { rows, names } = readRows(file, columns);
      seen.taken++;
      expect(names).toHaveLength(columns.length);
      for (const row of rows) expect(row.length === columns.length && row.every(Number.isFinite)).toBe(true);
    } catch (error) {
      seen.refused++;
      words(error, InputError);
    }
  });
  return { property, end: () => rmSync(folder, { recursive: true }) };
}

const figure = fc.oneof(
  { weight: 40, arbitrary: fc.constantFrom<unknown>(null, 0, 0.1, -0.2) },
  fc.constantFrom<unknown>('x', undefined, Number.NaN, -0, 1e308, [], {}),
);
const fieldOf = fc.oneof(
  { weight: 20, arbitrary: fc.record({ relativeL2: figure, peakError: figure, riseTimeError: figure }) },
  fc.constantFrom<unknown>(null, 3),
);
const norm = fc.record({ relativeL2: figure, relativeLinf: figure });
const observers = fc.array(fc.record({ name: fc.constantFrom(...HOSTILE), E: fieldOf, H: fieldOf }), { maxLength: 3 });
const likeResult = fc.oneof(
  {
    weight: 4,
    arbitrary: fc.record(
      {
        observers: fc.oneof(
          { weight: 8, arbitrary: observers },
          { weight: 1, arbitrary: fc.constantFrom<unknown>(null, 3, 'x') },
        ),
        norms: fc.oneof(
          { weight: 4, arbitrary: fc.record({ E: norm, H: norm }) },
          { weight: 1, arbitrary: fc.jsonValue({ maxDepth: 2 }) },
        ),
      },
      { requiredKeys: ['observers'] },
    ),
  },
  { weight: 1, arbitrary: fc.jsonValue({ maxDepth: 3 }) },
);

/** An earlier result, as --baseline reads it: held against, every figure finite, or told to be none. */
export const fuzzBaselines = (seen: Seen) =>
  fc.property(likeResult, likeResult, fc.double({ min: 0, max: 1, noNaN: true }), (a, b, allow) => {
    const [now, before] = [a, b].map((json) => baselineSchema.safeParse(json));
    for (const each of [now!, before!])
      if (!each.success) {
        seen.refused++;
        expect(each.error.issues.length).toBeGreaterThan(0);
        return;
      }
    seen.taken++;
    for (const held of holdAgainst(now!.data!, before!.data!, allow))
      expect(Number.isFinite(held.before) && (held.now === null || Number.isFinite(held.now))).toBe(true);
  });

/** What a map of traces holds. */
export const fuzzMaps = (seen: Seen) => {
  const text = fc.constantFrom('Ez', 'A.Hy', 't', 'ns', '5 mm', ...HOSTILE);
  const value = fc.oneof(
    text,
    fc.jsonValue({ maxDepth: 2 }),
    fc.dictionary(text, text, { maxKeys: 3 }),
    fc.array(text, { maxLength: 4 }),
  );
  const keys = ['header', 'columns', 'units', 'timeOffset', 'observer', 'at', 'positions', 'x'] as const;
  const map = fc.oneof(
    fc.record(Object.fromEntries(keys.map((key) => [key, value])), { requiredKeys: [] }),
    fc.record({ header: fc.array(text), columns: fc.dictionary(text, text), observer: text }, { requiredKeys: [] }),
    value,
  );
  return fc.property(map, (json) => {
    try {
      parseTraceMap(json);
      seen.taken++;
    } catch (error) {
      seen.refused++;
      words(error, RangeError);
    }
    expect(({} as Record<string, unknown>).x).toBeUndefined();
  });
};
