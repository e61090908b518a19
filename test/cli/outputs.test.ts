import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { XMLValidator } from 'fast-xml-parser';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { type ObserverTrace, readTraces } from '../../src/files/traces.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { observerCell } from '../../src/scenario/sites.ts';
import { COMPONENTS } from '../../src/trace/trace.ts';
import { readHdf5 } from '../files/hdf5Reader.ts';
import { readImage } from '../files/vtiReader.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

/** A wire that ends in the box, one plane with a name that no file may have, and observers on and off it. */
const SCENARIO = {
  title: 'Fields <for> others',
  sources: [
    {
      type: 'wire',
      name: 'w',
      points: [
        ['0 mm', '0 mm', '-20 mm'],
        ['0 mm', '0 mm', '20 mm'],
      ],
      current: { waveform: { type: 'gaussian', amplitude: '1 A', delay: '2 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: {
    cellSize: ['8 mm', '9 mm', '10 mm'],
    box: { from: ['-64 mm', '-63 mm', '-70 mm'], to: ['64 mm', '63 mm', '70 mm'] },
    boundary: { type: 'cpml', layers: 6 },
  },
  duration: '3 ns',
  observers: [
    { name: '../up', at: ['32 mm', '-9 mm', '10 mm'] },
    { name: 'far', at: ['0.3 m', 0, 0] },
  ],
  planes: [{ name: '../../etc/xz', normal: 'y', at: '-9 mm' }],
};

let folder = '';
let scenario = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-outputs-'));
  scenario = join(folder, 'scenario.json');
  writeFileSync(scenario, JSON.stringify(SCENARIO));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const run = (...args: string[]) =>
  spawnSync(process.execPath, [MAIN, 'compare', scenario, ...args], { cwd: folder, encoding: 'utf8' });
const read = (...names: string[]) => readFileSync(join(folder, ...names));

/** The observer's cell among the cells of a region that begins at `first`, every `stride`-th. */
function placeOf(first: readonly number[], stride: number): number[] {
  const loaded = loadScenario(SCENARIO);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  const cell = observerCell(loaded.scenario.grid, loaded.scenario.observers[0]!.at);
  return cell.map((n, a) => (n - first[a]!) / stride);
}

/** A trace's value at an instant, as single precision has it. */
function valueAt(traces: readonly ObserverTrace[], c: number, side: 'grid' | 'exact', time: number): number {
  const { time: times, signals } = traces[c]!;
  const n = times.findIndex((t) => Math.abs(t / time - 1) < 1e-9);
  return Math.fround(signals[side]![n]!);
}

describe('fields for other programs', () => {
  test('VTK images of plane and box agree with the traces at the observer, to single precision', () => {
    const { status, stdout } = run('--out', 'vti', '--snapshots', 'vti', '--region', 'all', '--instants', '9');
    expect(status, stdout).toBe(1);
    const files = readdirSync(join(folder, 'vti/fields')).sort();
    const steps = files.filter((name) => name.startsWith('box-')).length;
    expect(files).toEqual(
      ['box', 'etc-xz'].flatMap((name) => [
        ...Array.from({ length: steps }, (_, m) => `${name}-${String(m + 1).padStart(4, '0')}.vti`),
        `${name}.pvd`,
      ]),
    );
    expect(stdout).toContain(`${2 * steps} images and etc-xz.pvd, box.pvd in vti/fields`);
    const traces = readTraces(read('vti/traces.csv').toString('utf8')).filter(({ observer }) => observer === '../up');
    let compared = 0;
    for (const [name, first] of [
      ['etc-xz', [0, 6, 0]],
      ['box', [0, 0, 0]],
    ] as const)
      for (let m = 0; m < steps; m++) {
        const image = readImage(read('vti/fields', `${name}-${String(m + 1).padStart(4, '0')}.vti`));
        const counts = [1, 3, 5].map((n) => image.extent[n]! + 1);
        expect(counts).toEqual(name === 'box' ? [16, 14, 14] : [16, 1, 14]);
        const [i, j, k] = placeOf(first, 1);
        const point = i! + counts[0]! * (j! + counts[1]! * k!);
        for (const [array, { values }] of image.pointData) {
          const [field, side] = array.split(' ') as ['E' | 'H', 'grid' | 'exact'];
          const [time] = image.fieldData.get(`time of ${field} (s)`)!;
          for (let c = 0; c < 3; c++) {
            const expected = valueAt(traces, c + (field === 'E' ? 0 : 3), side, time!);
            // The exact field is evaluated at other instants beside it, and then to its own accuracy.
            const slack = side === 'grid' ? 0 : 1e-6 * Math.max(...traces[c]!.signals.exact!.map(Math.abs));
            expect(Math.abs(values[3 * point + c]! - expected)).toBeLessThanOrEqual(slack);
            compared++;
          }
        }
      }
    expect(compared).toBe(2 * steps * 12);
    // Again with fewer instants: nothing older is left beside the new images.
    run('--out', 'vti', '--snapshots', 'vti', '--instants', '2');
    expect(readdirSync(join(folder, 'vti/fields')).filter((name) => name.startsWith('etc-'))).toHaveLength(3);
  });

  test('HDF5 likewise, and every second cell alone when that is asked for', () => {
    run('--out', 'hdf5', '--snapshots', 'hdf5', '--region', 'box', '--instants', '5', '--stride', '2');
    expect(readdirSync(join(folder, 'hdf5')).sort()).toEqual(['fields.h5', 'report.html', 'result.json', 'traces.csv']);
    const file = readHdf5(read('hdf5/fields.h5'));
    expect(file.attrs.title).toBe('Fields <for> others');
    const traces = readTraces(read('hdf5/traces.csv').toString('utf8'));
    const [i, j, k] = placeOf([0, 0, 0], 2);
    let compared = 0;
    for (const [c, component] of COMPONENTS.entries())
      for (const side of ['grid', 'exact'] as const) {
        const { shape, value, attrs } = file.get(`box/${side}/${component}`);
        expect(shape).toEqual([5, 7, 7, 8]);
        // Where a value is: its node, and the component's offset from it.
        const place = ['x', 'y', 'z'].map((axis, a) => {
          const node = [...file.get(`box/${axis}`).value][[i!, j!, k!][a]!]!;
          return node + (attrs.offset as number[])[a]!;
        });
        place.forEach((x, a) => {
          expect(x).toBeCloseTo(traces[c]!.at[a]!, 12);
        });
        const times = [...file.get(`box/time_${component[0]}`).value];
        const slack = side === 'grid' ? 0 : 1e-6 * Math.max(...traces[c]!.signals.exact!.map(Math.abs));
        for (const [m, time] of times.entries()) {
          const found = value[((m * 7 + k!) * 7 + j!) * 8 + i!]!;
          expect(Math.abs(found - valueAt(traces, c, side, time))).toBeLessThanOrEqual(slack);
          compared++;
        }
      }
    expect(compared).toBe(6 * 2 * 5);
  });

  test('traces as NumPy arrays, charts as SVG of their own, named so that none leaves its folder', () => {
    const { stdout } = run('--out', 'more', '--npz', '--charts');
    expect(readdirSync(join(folder, 'more')).sort()).toEqual([
      'charts',
      'report.html',
      'result.json',
      'traces.csv',
      'traces.npz',
    ]);
    const charts = readdirSync(join(folder, 'more/charts'));
    expect(charts.sort()).toEqual(
      [
        'error-by-distance.svg',
        'error-by-wall.svg',
        ...['E', 'H'].flatMap((field) => ['parts', 'spectrum', 'trace'].map((what) => `up-${field}-${what}.svg`)),
        ...['E', 'H'].map((field) => `far-${field}-trace.svg`),
      ].sort(),
    );
    expect(stdout).toContain(`${charts.length} charts in more/charts`);
    const report = read('more/report.html').toString('utf8');
    for (const name of charts) {
      const svg = read('more/charts', name).toString('utf8');
      expect(XMLValidator.validate(svg)).toBe(true);
      expect(svg).not.toMatch(/<script|href|url\(|on\w+=/i);
      // Each is a chart of the report.
      const title = /<title>(.*?)<\/title>/.exec(svg)![1]!;
      expect(report).toContain(`<title>${title}</title>`);
    }
  });

  test('what needs a folder is refused without one, before anything is computed', () => {
    for (const option of [['--npz'], ['--charts'], ['--snapshots', 'vti']]) {
      const { status, stderr } = run(...option);
      expect([status, stderr]).toEqual([2, expect.stringContaining(`${option[0]} needs --out`)]);
    }
    for (const options of [
      ['--out', 'no', '--snapshots', 'pdf'],
      ['--out', 'no', '--snapshots', 'vti', '--region', 'moon'],
      ['--out', 'no', '--snapshots', 'vti', '--instants', '0'],
      ['--out', 'no', '--snapshots', 'vti', '--stride', '1.5'],
    ])
      expect(run(...options).status).toBe(2);
    expect(readdirSync(folder)).not.toContain('no');
  });
});
