import fc from 'fast-check';
import Papa from 'papaparse';
import { describe, expect, it } from 'vitest';
import { type ObserverTrace, observerTraces, readTraces, writeTraces } from '../../src/files/traces.ts';
import { type FieldHistory, instantsOf, samplePoints } from '../../src/trace/trace.ts';

const points = samplePoints(Int32Array.of(0, 0, 0, 3, 4, 5), [-0.1, -0.1, -0.1], [0.005, 0.005, 0.005]);
const instants = instantsOf(40, 9.53e-12);

/** Values of no simple digits, all different. */
const fieldOf = (seed: number): FieldHistory => ({
  points,
  instants,
  values: Float64Array.from({ length: 2 * 6 * 40 }, (_, i) => Math.sqrt(seed + i) * (i % 2 === 0 ? 1e-3 : -1e2)),
});
const minus = (a: FieldHistory, b: FieldHistory): FieldHistory => ({
  ...a,
  values: a.values.map((v, i) => v - b.values[i]!),
});

const [grid, free, gridded, computed, exact] = [1, 20, 300, 7000, 5].map(fieldOf) as [
  FieldHistory,
  FieldHistory,
  FieldHistory,
  FieldHistory,
  FieldHistory,
];
const fields = {
  grid,
  exact,
  boundary: minus(grid, free),
  lattice: minus(free, gridded),
  gridding: minus(gridded, computed),
  quadrature: minus(computed, exact),
};

describe('traces.csv', () => {
  const traces = [...observerTraces('A', fields, 0), ...observerTraces('far corner, upper', fields, 1)];
  const text = writeTraces(traces);

  it('has one row per instant and observer component', () => {
    const [header, ...rows] = text.trimEnd().split('\n');
    expect(header).toBe('observer,component,x,y,z,t,grid,exact,boundary,lattice,gridding,quadrature');
    expect(rows).toHaveLength(2 * 6 * 40);
  });

  it('gives back the same bits', () => {
    expect(readTraces(text)).toEqual(traces);
  });

  it('puts each component at its own place and time', () => {
    const read = readTraces(text);
    const Hz = read[6 + 5]!;
    expect(Hz.component).toBe('Hz');
    expect(Hz.at).toEqual([-0.1 + 3.5 * 0.005, -0.1 + 4.5 * 0.005, -0.1 + 5 * 0.005]);
    expect(Hz.time[0]).toBe(1.5 * 9.53e-12);
    expect(read[6]!.time[0]).toBe(9.53e-12);
  });

  it('holds parts that add up to grid − exact', () => {
    let worst = 0;
    for (const { signals } of readTraces(text))
      signals.grid!.forEach((g, n) => {
        const parts = signals.boundary![n]! + signals.lattice![n]! + signals.gridding![n]! + signals.quadrature![n]!;
        const size = Math.max(...Object.values(signals).map((signal) => Math.abs(signal[n]!)));
        // Four differences, three sums and grid − exact itself: eight roundings of at most half an ulp of 2·size.
        worst = Math.max(worst, Math.abs(parts - (g - signals.exact![n]!)) / (size * Number.EPSILON));
      });
    console.log(`parts against grid − exact: ${worst} ε of the largest signal`);
    expect(worst).toBeLessThanOrEqual(8);
  });

  it('leaves cells of an unknown signal empty, and reads them as absent', () => {
    const outside = observerTraces('outside', { exact }, 0);
    const read = readTraces(writeTraces(outside));
    expect(Object.keys(read[0]!.signals)).toEqual(['exact']);
    expect(writeTraces(outside).split('\n')[1]).toMatch(/,,,,$/);
  });

  it('is no formula in a spreadsheet, whatever an observer is called, and keeps the name', () => {
    const name = fc.oneof(
      fc.string({ minLength: 1 }),
      fc.tuple(fc.constantFrom('=', '+', '-', '@', '\t', '\r', "'", "'="), fc.string()).map((s) => s.join('')),
    );
    const trace = (observer: string): ObserverTrace => ({
      observer,
      component: 'Ex',
      at: [0, 0, 0],
      time: Float64Array.of(1),
      signals: { exact: Float64Array.of(-1) },
    });
    fc.assert(
      fc.property(name, (observer) => {
        const csv = writeTraces([trace(observer)]);
        expect(Papa.parse<string[]>(csv).data[1]![0]).not.toMatch(/^[=+\-@\t\r]/);
        expect(readTraces(csv)).toEqual([trace(observer)]);
      }),
      { seed: 4, numRuns: 300 },
    );
  });

  it.each([
    ['observer,component\n', /row 1 is "observer,component"; the header/],
    [text.replace('Ex', 'Eq'), /row 2, column component: "Eq" is none of Ex, Ey/],
    [text.replace(/\n[^\n]*\n/, '\nA,Ex,0,0,0,1,2,3,4,5,six,7\n'), /row 2, column gridding: "six" is not a number/],
    [text.replace(/\n[^\n]*\n/, '\nA,Ex,0,0,,1,2,3,4,5,6,7\n'), /row 2, column z: "" is not a number/],
    [text.replace(/\n[^\n]*\n/, '\nA,Ex,0,0,0,1,2,3\n'), /row 2 has 8 cells/],
    [text.replace(/\n[^\n]*\n/, '\nA,Ex,0,0,0,1,2,3,,5,6,7\n'), /boundary of Ex at observer "A" is empty in 1 of 40/],
  ])('refuses a spoilt file, case %#', (spoilt, message) => {
    expect(() => readTraces(spoilt)).toThrow(message);
  });
});
