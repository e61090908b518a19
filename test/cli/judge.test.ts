import { spawn, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { type JudgedObserver, judgeSchema } from '../../src/compare/judgeResult.ts';
import { type ObserverResult, resultSchema } from '../../src/compare/result.ts';
import { readTraces } from '../../src/files/traces.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
const path = (name: string) => join(folder, name);
const run = (...args: string[]) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, ...args], { cwd: folder, encoding: 'utf8' });
  return { status, stdout, stderr };
};
const write = (name: string, content: unknown) =>
  writeFileSync(path(name), typeof content === 'string' ? content : JSON.stringify(content));

/** A small box with a wire, two observers inside and none on an axis. */
const SCENARIO = {
  title: 'Small <b>box</b>',
  sources: [
    {
      type: 'wire',
      name: 'strap',
      points: [
        ['-20 mm', '4 mm', '-16 mm'],
        ['20 mm', '4 mm', '16 mm'],
      ],
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-88 mm', '-88 mm', '-88 mm'], to: ['88 mm', '88 mm', '88 mm'] } },
  duration: '3.4 ns',
  observers: [
    { name: '=A1', at: ['70 mm', '20 mm', '10 mm'] },
    { name: 'B', at: ['-40 mm', '48 mm', '32 mm'] },
  ],
};

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-judge-'));
  write('small.json', SCENARIO);
  expect(run('compare', 'small.json', '--out', 'out').status).toBe(0);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

/** The trace of one observer as another solver may write it: nanoseconds, kV/m, one column a component. */
function otherSolver(change: (v: number, component: string, t: number) => number = (v) => v): string {
  const traces = readTraces(readFileSync(path('out/traces.csv'), 'utf8')).filter(({ observer }) => observer === 'B');
  const [Ex, Ey, Ez] = traces;
  return [
    'time (ns);B.Ex (kV/m);B.Ey (kV/m);B.Ez (kV/m)',
    ...Array.from(Ex!.time, (t, n) =>
      [t * 1e9, ...[Ex, Ey, Ez].map((trace) => change(trace!.signals.grid![n]!, trace!.component, t) / 1e3)].join(';'),
    ),
  ].join('\n');
}

describe('judge', () => {
  test('gives our own traces the figures that compare gives them, to 1e-9', () => {
    const { status, stdout } = run('judge', 'small.json', '--traces', 'out/traces.csv', '--out', 'judged');
    expect(status).toBe(0);
    expect(readdirSync(path('judged')).sort()).toEqual(['report.html', 'result.json', 'traces.csv']);
    const ours = resultSchema.parse(JSON.parse(readFileSync(path('out/result.json'), 'utf8')));
    const theirs = judgeSchema.parse(JSON.parse(readFileSync(path('judged/result.json'), 'utf8')));
    expect(stdout).toContain(theirs.sentence);
    expect(theirs.observers).toHaveLength(2);
    const worst = ours.observers.flatMap((own, n) => differences(own, theirs.observers[n]!));
    console.log(worst.map(({ figure, off }) => `${figure} ${off.toExponential(1)}`).join(', '));
    for (const { figure, off } of worst) expect(off, figure).toBeLessThan(1e-9);
    expect(theirs.causes.status).toBe('sound');
    const ratios = theirs.observers.map(({ judged }) => judged.E!.sound.ratio!);
    // The closed form is right to a few per cent here (10 cells a wavelength, 5 to 8 cells off), by test/lattice.
    for (const ratio of ratios) expect(Math.abs(ratio - 1)).toBeLessThan(0.1);
  });

  test('the same from traces.npz, with one field missing, and at another cell size', () => {
    expect(run('compare', 'small.json', '--out', 'npz', '--npz').status).toBe(0);
    const csv = JSON.parse(run('judge', 'small.json', '--traces', 'out/traces.csv', '--json').stdout);
    const npz = JSON.parse(run('judge', 'small.json', '--traces', 'npz/traces.npz', '--json').stdout);
    expect(npz.observers).toEqual(csv.observers);
    write('E.csv', otherSolver());
    const { stdout, status } = run(
      'judge',
      'small.json',
      '--traces',
      'E.csv',
      '--staggered',
      '--cell',
      '4 mm',
      '--json',
    );
    const found = judgeSchema.parse(JSON.parse(stdout));
    // Those of an 8 mm cell, taken for those of a 4 mm one, lie 2 mm off.
    expect(status).toBe(1);
    expect(found.observers[0]!.H).toBe(null);
    expect(found.sound.cellSize).toEqual([0.004, 0.004, 0.004]);
  });

  test('names the fault of another solver’s file, outside the tolerance, and writes no hostile text', () => {
    write(
      'half.csv',
      otherSolver((v) => 1.31 * v),
    );
    const args = ['judge', 'small.json', '--traces', 'half.csv', '--staggered', '--out', 'faulty'];
    const { status, stdout } = run(...args);
    expect(status).toBe(1);
    expect(stdout).toMatch(/Likeliest cause: E is 1\.31 times what it should be\./);
    expect(stdout).toMatch(/30 % \(E at observer B\) where a sound Yee grid at 8 mm makes/);
    const report = readFileSync(path('faulty/report.html'), 'utf8');
    expect(report).toContain('Small &lt;b&gt;box&lt;/b&gt;');
    expect(report).not.toContain('<b>box');
    expect(report).toContain('Feature selective validation');
    // A namespace is a name, not a place that is asked.
    expect(report.replaceAll('xmlns="http://www.w3.org/2000/svg"', '')).not.toMatch(/<script|src=|https?:/i);
  });

  test.each([
    [['--traces', 'missing.csv'], /the traces missing.csv could not be read: there is no such file/],
    [['--traces', 'nan.csv'], /nan.csv: row 3, column “B.Ey”: “nan” is no finite number/],
    [['--traces', 'onSource.csv', '--at', 'P=0 mm,4 mm,0 mm'], /source “strap”/],
    [['--traces', 'half.csv', '--unit', 'E=parsec'], /no finite|not known|kV/],
    [['--traces', 'nan.csv', '--cell', '5 ms'], /grid.cellSize/],
  ])('refuses %j with its place, and writes nothing', (args, message) => {
    write('nan.csv', 't,B.Ex,B.Ey\n0,1,1\n1,2,nan\n');
    write('onSource.csv', ['t,P.Ez', ...Array.from({ length: 12 }, (_, n) => `${n}e-10,${n}`)].join('\n'));
    if (args.includes('E=parsec')) write('half.csv', otherSolver().replaceAll(' (kV/m)', ''));
    const { status, stderr, stdout } = run('judge', 'small.json', ...args, '--out', 'nothing');
    expect(stderr).toMatch(message);
    expect(status).toBe(2);
    expect(stdout).toBe('');
    expect(existsSync(path('nothing'))).toBe(false);
  });

  test('build servers: XML of what passed, and a baseline that may grow by so much', () => {
    const good = [
      'judge',
      'small.json',
      '--traces',
      'out/traces.csv',
      '--junit',
      'good.xml',
      '--baseline',
      'out/result.json',
    ];
    const first = run(...good);
    expect(first.stderr).toMatch(/None of \d+ figures grew/);
    expect(readFileSync(path('good.xml'), 'utf8')).toContain('name="observer =A1: E within 5 %"');
    write(
      'worse.csv',
      otherSolver((v) => 1.02 * v),
    );
    write('good.csv', otherSolver());
    run('judge', 'small.json', '--traces', 'good.csv', '--staggered', '--out', 'before');
    const worse = ['judge', 'small.json', '--traces', 'worse.csv', '--staggered', '--baseline', 'before/result.json'];
    const found = run(...worse, '--allow', '5 %', '--junit', 'worse.xml');
    expect(found.status).toBe(1);
    expect(found.stderr).toMatch(/Grew: observer B, E: relative L2 was [\d.]+ % and is [\d.]+ %, [\d.]+ % more/);
    expect(readFileSync(path('worse.xml'), 'utf8')).toMatch(/<failure message="observer B, E: relative L2 was/);
    expect(run(...worse, '--allow', '100000 %').status).toBe(0);
    expect(run('judge', 'small.json', '--traces', 'good.csv', '--baseline', 'small.json').stderr).toMatch(
      /the baseline small.json is no result of compare or judge/,
    );
  });

  test('ends at once on Ctrl-C', async () => {
    const child = spawn(
      process.execPath,
      [MAIN, 'judge', 'small.json', '--traces', 'out/traces.csv', '--out', 'stopped'],
      {
        cwd: folder,
      },
    );
    let stderr = '';
    child.stderr.setEncoding('utf8').on('data', (text) => {
      stderr += text;
      if (!child.killed && stderr.includes('exact field at the traces')) child.kill('SIGINT');
    });
    const status = await new Promise((done) => child.on('close', done));
    expect(stderr).toContain('stopped; nothing was written');
    expect(status).toBe(130);
    expect(existsSync(path('stopped'))).toBe(false);
  });
});

/** Relative differences of all figures of an observer's E and H, largest first. */
function differences(ours: ObserverResult, theirs: JudgedObserver): { figure: string; off: number }[] {
  return (['E', 'H'] as const)
    .flatMap((field) => {
      const [a, b] = [ours[field]!, theirs[field]!];
      const names = [
        'relativeL2',
        'transient',
        'staticResidue',
        'exactPeak',
        'peakError',
        'riseTimeError',
        'timeShift',
        'amplitudeRatio',
      ] as const;
      const figures = names.map((name) => ({
        figure: `${ours.name} ${field} ${name}`,
        pair: [a[name], b[name]] as const,
      }));
      const bands = a.band.bands.map(({ error }, n) => ({
        figure: `${ours.name} ${field} band ${n}`,
        pair: [error, b.band.bands[n]!.error] as const,
      }));
      expect(b.component).toBe(a.component);
      expect(b.band.limit).toEqual(a.band.limit);
      expect(theirs.snapped).toEqual(ours.snapped);
      expect(Math.abs(theirs.distance / ours.distance - 1)).toBeLessThan(1e-12);
      return [...figures, ...bands];
    })
    .map(({ figure, pair: [a, b] }) => {
      expect(a === null, figure).toBe(b === null);
      return { figure, off: a === null || b === null || a === b ? 0 : Math.abs(a - b) / Math.abs(a) };
    })
    .sort((p, q) => q.off - p.off)
    .slice(0, 3);
}
