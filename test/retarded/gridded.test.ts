import { describe, expect, test } from 'vitest';
import type { GriddedSources } from '../../src/gridding/edges.ts';
import { gridSources } from '../../src/gridding/gridding.ts';
import { griddedHistory } from '../../src/retarded/gridded.ts';
import { exactHistory, historyOf } from '../../src/retarded/history.ts';
import { prepareGridded } from '../../src/retarded/prepare.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import type { Waveform } from '../../src/scenario/waveform.ts';
import { instantsOf, samplePoints } from '../../src/trace/trace.ts';
import { centreFed, jumping, kinked, smooth, uniform, unipolar, vacuum, wire } from './sources.ts';

const cell: Vec3 = [5e-3, 4e-3, 6e-3];
const origin: Vec3 = [-0.1, -0.08, -0.12];
const timeStep = 0.99 / (vacuum.speed * Math.sqrt(cell.reduce((sum, d) => sum + 1 / (d * d), 0)));
const grid = { origin, cellSize: cell, cells: [40, 40, 40] as const };

/** One edge along `axis` from a node, with its two node charges. */
function oneEdge(axis: 0 | 1 | 2, waveform: Waveform): GriddedSources {
  const node = [20, 20, 20];
  const next = node.map((i, a) => (a === axis ? i + 1 : i));
  const pairs = { weight: Float64Array.of(0.7, -0.2), delay: Float64Array.of(0.1e-9, 0.13e-9), waveforms: [waveform] };
  return {
    edges: {
      ...pairs,
      count: 1,
      axis: Uint8Array.of(axis),
      node: Int32Array.from(node),
      pairStart: Int32Array.of(0, 2),
      waveform: new Uint16Array(2),
    },
    charges: {
      count: 2,
      node: Int32Array.from([...node, ...next]),
      pairStart: Int32Array.of(0, 2, 4),
      weight: Float64Array.of(-0.7, 0.2, 0.7, -0.2),
      delay: Float64Array.of(0.1e-9, 0.13e-9, 0.1e-9, 0.13e-9),
      waveform: new Uint16Array(4),
      waveforms: [waveform],
    },
  };
}

/** Largest difference of two histories at each site, relative to the peak of E or H at its point. */
function worst(values: Float64Array, exact: Float64Array, count: number): number {
  let most = 0;
  for (let first = 0; first < values.length; first += 3 * count) {
    let peak = 0;
    let error = 0;
    for (let m = first; m < first + 3 * count; m++) {
      peak = Math.max(peak, Math.abs(exact[m]!));
      error = Math.max(error, Math.abs(values[m]! - exact[m]!));
    }
    if (error > 0) most = Math.max(most, error / peak);
  }
  return most;
}

describe('histories of gridded currents', () => {
  const instants = instantsOf(260, timeStep);

  test.each([0, 1, 2] as const)('an edge along axis %i is a short uniform wire', (axis) => {
    const from: Vec3 = [0, 1, 2].map((a) => origin[a]! + 20 * cell[a]!) as unknown as Vec3;
    const to: Vec3 = from.map((x, a) => (a === axis ? x + cell[a]! : x)) as unknown as Vec3;
    const terms = [
      { factor: 0.7, delay: 0.1e-9, slowness: 0 },
      { factor: -0.2, delay: 0.13e-9, slowness: 0 },
    ];
    for (const waveform of [smooth, kinked]) {
      const points = samplePoints(Int32Array.of(24, 22, 23, 21, 20, 21, 33, 29, 12), origin, cell);
      const exact = exactHistory([wire([from, to], terms, waveform)], vacuum, points, instants);
      const gridded = griddedHistory(oneEdge(axis, waveform), origin, cell, vacuum, points, instants);
      // 1e-8 is asked of the time interpolation and, relative to the part of one edge, of Gauss's rule.
      expect(worst(gridded.values, exact.values, instants.count)).toBeLessThan(5e-8);
      expect(gridded.difference).toBeLessThan(5e-8);
    }
  });

  test.each([
    ['smooth', smooth],
    ['unipolar', unipolar],
    ['kinked', kinked],
    ['jumping', jumping],
  ] as const)('a tilted wire: spreading against adaptive quadrature of each edge, %s pulse', (_, waveform) => {
    const sources = centreFed([1.2e-3, -2.1e-3, 0.7e-3], [0.48, 0.36, 0.8], 0.02, waveform);
    const gridded = gridSources(sources, grid);
    const points = samplePoints(Int32Array.of(30, 20, 24, 23, 22, 21), origin, cell);
    const exact = historyOf(prepareGridded(gridded, origin, cell, vacuum), points, instants);
    const rows: Record<string, unknown> = {};
    for (const accuracy of [1e-4, 1e-6, 1e-8]) {
      const found = griddedHistory(gridded, origin, cell, vacuum, points, instants, { accuracy });
      const error = worst(found.values, exact.values, instants.count);
      rows[accuracy] = { error: error.toExponential(1), 'found by 8 checks': found.difference.toExponential(1) };
      // Parts of edges that cancel may leave each its own error: an edge's share is below a tenth of what is left.
      expect(error).toBeLessThan(10 * accuracy);
      expect(found.difference).toBeLessThanOrEqual(1.01 * error);
    }
    console.table(rows);
  });

  test('the wire that lies on edges as filaments is the designed wire', () => {
    // Uniform current along z through nodes: weights are 1, and joints carry no charge.
    const from: Vec3 = [origin[0] + 20 * cell[0], origin[1] + 20 * cell[1], origin[2] + 15 * cell[2]];
    const to: Vec3 = [from[0], from[1], from[2] + 10 * cell[2]];
    const sources = [wire([from, to], uniform, smooth)];
    const points = samplePoints(Int32Array.of(26, 23, 19), origin, cell);
    const exact = exactHistory(sources, vacuum, points, instants);
    const gridded = griddedHistory(gridSources(sources, grid), origin, cell, vacuum, points, instants);
    expect(worst(gridded.values, exact.values, instants.count)).toBeLessThan(5e-8);
  });

  test('a site on a current-carrying edge is refused, naming it', () => {
    const points = samplePoints(Int32Array.of(20, 20, 20), origin, cell);
    expect(() => griddedHistory(oneEdge(1, smooth), origin, cell, vacuum, points, instants)).toThrow(
      /along y at node \(20, 20, 20\)/,
    );
  });
});
