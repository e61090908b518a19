import { spawn, spawnSync } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { get } from 'node:http';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { decode, decodeApng } from 'fast-png';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { resultSchema } from '../../src/compare/result.ts';
import { readTraces } from '../../src/files/traces.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const run = (...args: string[]) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, ...args], { cwd: folder, encoding: 'utf8' });
  return { status, stdout, stderr };
};

/** A dipole in a small box: a second of work. */
const small = (more: object = {}) => ({
  title: 'Small <b>box</b>',
  sources: [
    {
      type: 'dipole',
      at: ['1 mm', '-2 mm', '3 mm'],
      direction: [0.2, 0, 1],
      length: '10 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-88 mm', '-88 mm', '-88 mm'], to: ['88 mm', '88 mm', '88 mm'] } },
  duration: '3.4 ns',
  observers: [
    { name: '=A1', at: ['70 mm', '20 mm', '10 mm'] },
    { name: 'far', at: ['0.3 m', 0, 0] },
  ],
  ...more,
});

const write = (name: string, content: unknown) => {
  const path = join(folder, name);
  writeFileSync(path, typeof content === 'string' ? content : JSON.stringify(content));
  return path;
};

describe('compare', () => {
  test('writes result.json, traces.csv and report.html, which agree with each other', () => {
    const { status, stdout, stderr } = run('compare', write('small.json', small()), '--out', 'out', '--threads', '2');
    expect(stderr).toContain('the grid in its box');
    expect(status).toBe(0);
    expect(stdout).toMatch(/^Small .*\nWithin 5 %: /);
    expect(readdirSync(join(folder, 'out')).sort()).toEqual(['report.html', 'result.json', 'traces.csv']);

    const result = resultSchema.parse(JSON.parse(readFileSync(join(folder, 'out/result.json'), 'utf8')));
    expect(stdout).toContain(result.verdict.sentence);
    const [inside, far] = result.observers;
    expect(far!.inside).toBe(false);
    expect(far!.extrapolated!.exactPeakE).toBeGreaterThan(0);

    // The four parts add up to the difference, in what a user reads back; and the traces give the observer's figures.
    const traces = readTraces(readFileSync(join(folder, 'out/traces.csv'), 'utf8'));
    expect(traces).toHaveLength(12);
    let difference = 0;
    let reference = 0;
    for (const { observer, component, signals } of traces) {
      const { grid, exact, boundary, lattice, gridding, quadrature } = signals;
      if (observer !== '=A1') {
        expect(grid).toBeUndefined();
        continue;
      }
      const peak = exact!.reduce((most, x) => Math.max(most, Math.abs(x)), 0);
      grid!.forEach((g, n) => {
        const parts = boundary![n]! + lattice![n]! + gridding![n]! + quadrature![n]!;
        expect(Math.abs(parts - (g - exact![n]!))).toBeLessThan(1e-13 * Math.max(peak, 1e-6));
        if (component.startsWith('E')) {
          difference += (g - exact![n]!) ** 2;
          reference += exact![n]! ** 2;
        }
      });
    }
    expect(Math.abs(Math.sqrt(difference / reference) / inside!.E!.relativeL2! - 1)).toBeLessThan(1e-9);

    const report = readFileSync(join(folder, 'out/report.html'), 'utf8');
    expect(report).toContain('Small &lt;b&gt;box&lt;/b&gt;');
    expect(report).not.toContain('<b>box');
    // A namespace is a name, not a place that is asked.
    expect(report.replaceAll('xmlns="http://www.w3.org/2000/svg"', '')).not.toMatch(/<script|src=|https?:/i);
  });

  test('one thread or three, and once more: the same numbers but for timings and environment', () => {
    const scenario = write('again.json', small());
    const results = ['1', '3', '3'].map((threads) => {
      const { stdout } = run('compare', scenario, '--json', '--threads', threads);
      const { timings: _, environment: __, ...rest } = JSON.parse(stdout);
      return rest;
    });
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
  });

  test('fused multiply-add: refused where the runtime has none, else recorded, and other last bits only', () => {
    const scenario = write('fused.json', small());
    const plain = JSON.parse(run('compare', scenario, '--json').stdout);
    expect(plain.environment.fusedMultiplyAdd).toBe(false);
    const asked = spawnSync(
      process.execPath,
      ['--experimental-wasm-relaxed-simd', MAIN, 'compare', scenario, '--json', '--fused'],
      { cwd: folder, encoding: 'utf8' },
    );
    const fused = JSON.parse(asked.stdout);
    expect(fused.environment.fusedMultiplyAdd).toBe(true);
    const difference = fused.budget.lattice.relativeL2 / plain.budget.lattice.relativeL2 - 1;
    expect(Math.abs(difference)).toBeLessThan(1e-3);
    expect(difference).not.toBe(0);
    if (Number(process.versions.node.split('.')[0]) < 22) {
      const refused = run('compare', scenario, '--fused');
      expect(refused.status).toBe(2);
      expect(refused.stderr).toContain('relaxed SIMD');
    }
  });

  test('status 1 when the error is outside the tolerance', () => {
    const { status, stdout } = run('compare', write('strict.json', small({ tolerance: '0.01 %' })));
    expect(status).toBe(1);
    expect(stdout).toContain('Within 0.01 %: ');
  });

  test('a finer grid is trusted nearer to the source', () => {
    const closest = ['16 mm', '8 mm'].map((cellSize) => {
      const scenario = small({ grid: { ...small().grid, cellSize }, observers: [] });
      const { stdout } = run('compare', write('step.json', scenario), '--json');
      return JSON.parse(stdout).verdict.closest.best.error as number;
    });
    expect(closest[1]).toBeLessThan(closest[0]! / 2);
  });

  test.each([
    ['a broken file', '{ "sources": [', 'line 1'],
    ['an unknown key', { ...small(), colour: 'red' }, 'colour'],
    ['a Courant number above the limit', small({ grid: { ...small().grid, courant: 1.1 } }), 'grid.courant'],
    ['an observer on the source', small({ observers: [{ name: 'A', at: [0.001, -0.002, 0.003] }] }), 'observers.0.at'],
    ['a length without a number', small({ duration: 'ns' }), 'duration'],
    ['a wrong unit', small({ duration: '3 mm' }), 'duration'],
  ])('%s: refused with status 2, the place named, nothing written', (_, content, place) => {
    const { status, stdout, stderr } = run('compare', write('bad.json', content), '--out', 'never');
    expect(status).toBe(2);
    expect(stdout).toBe('');
    expect(stderr).toContain(place);
    expect(existsSync(join(folder, 'never'))).toBe(false);
  });

  test('a missing file, an unknown option and a senseless thread count: status 2', () => {
    expect(run('compare', 'no-such-file.json').stderr).toContain('no-such-file.json could not be read');
    for (const args of [
      ['compare', 'no-such-file.json'],
      ['compare', '--colour'],
      ['compare', '--threads', '0'],
      ['fly'],
    ])
      expect(run(...args).status).toBe(2);
  });

  test('a folder that cannot be made: status 3 and the reason', () => {
    write('in-the-way', 'a file');
    const { status, stderr } = run('compare', write('small2.json', small()), '--out', 'in-the-way/out');
    expect(status).toBe(3);
    expect(stderr).toContain('could not be made');
  });

  test('Ctrl-C ends it within a second, writing nothing', async () => {
    const slow = small({ grid: { ...small().grid, cellSize: '2 mm' } });
    const child = spawn(process.execPath, [MAIN, 'compare', write('slow.json', slow), '--out', 'stopped'], {
      cwd: folder,
    });
    await new Promise<void>((started) => child.stderr.once('data', () => started()));
    const asked = performance.now();
    child.kill('SIGINT');
    const status = await new Promise((ended) => child.once('exit', ended));
    expect(performance.now() - asked).toBeLessThan(1500);
    expect(status).toBe(130);
    expect(existsSync(join(folder, 'stopped'))).toBe(false);
  });
});

describe('a mask as large as the box', () => {
  test('leaves norms without values, and everything else', () => {
    const coarse = small();
    const masked = write('masked.json', { ...coarse, grid: { ...coarse.grid, mask: '1 m' } });
    const { status, stdout } = run('compare', masked, '--json', '--threads', '2');
    expect(status).not.toBe(3);
    const { norms, observers } = resultSchema.parse(JSON.parse(stdout));
    expect(norms.E).toMatchObject({ relativeL2: null, scale: null, largest: null, samples: 0 });
    expect(observers[0]!.E!.relativeL2).toBeGreaterThan(0);
  });
});

describe('frames', () => {
  test('pictures over the whole run and the same as a film; the last shows the field, the difference and their texts', () => {
    const { status, stdout } = run('compare', write('filmed.json', small()), '--frames', 'new/frames');
    expect(status).toBe(0);
    expect(stdout).toContain('25 pictures in new/frames');
    const read = (name: string) => readFileSync(join(folder, 'new/frames', name));
    const names = readdirSync(join(folder, 'new/frames')).sort();
    expect(names).toEqual([
      'film.png',
      ...Array.from({ length: 24 }, (_, n) => `frame-${String(n + 1).padStart(2, '0')}.png`),
    ]);
    for (const name of names) expect([...read(name).subarray(0, 8)]).toEqual([137, 80, 78, 71, 13, 10, 26, 10]);
    const film = decodeApng(read('film.png'), { checkCrc: true });
    expect(film.numberOfFrames).toBe(24);
    const stills = names.slice(1).map((name) => decode(read(name)).data);
    film.frames.forEach(({ data }, n) => {
      expect(Buffer.compare(Buffer.from(data.buffer), Buffer.from(stills[n]!.buffer))).toBe(0);
    });

    // In the middle of each pane the pulse passes: its colours are there in some picture and not in all.
    const inks = stills.map((data) => {
      const counts = [0, 0, 0];
      for (let n = 0; n < data.length; n += 3) {
        const [x, y] = [(n / 3) % 1280, Math.floor(n / 3 / 1280)];
        const spread = Math.max(data[n]!, data[n + 1]!, data[n + 2]!) - Math.min(data[n]!, data[n + 1]!, data[n + 2]!);
        if (y > 30 && y < 470 - 44 && spread > 60) counts[Math.floor((3 * x) / 1280)]!++;
      }
      return counts;
    });
    console.table(inks);
    const most = [0, 1, 2].map((pane) => Math.max(...inks.map((counts) => counts[pane]!)));
    const least = [0, 1, 2].map((pane) => Math.min(...inks.map((counts) => counts[pane]!)));
    for (const pane of [0, 1, 2]) expect(most[pane]).toBeGreaterThan(2 * least[pane]! + 1000);
  });

  test('refused input makes no folder', () => {
    expect(run('compare', write('bad.json', small({ duration: '3 mm' })), '--frames', 'no-frames').status).toBe(2);
    expect(existsSync(join(folder, 'no-frames'))).toBe(false);
  });
});

describe('exact', () => {
  test('gives the field in input order, and refuses a point on a source with its row', () => {
    const scenario = write('loop.json', EXAMPLES['small-loop']);
    const points = write('points.csv', 'x,y,z,t\n0.1,0,0.02,1e-9\n0.5,0.5,0.5,3e-9\n');
    expect(run('exact', scenario, '--points', points, '--out', 'field.csv').status).toBe(0);
    const [header, first] = readFileSync(join(folder, 'field.csv'), 'utf8').split('\n');
    expect(header).toBe('x,y,z,t,Ex,Ey,Ez,Hx,Hy,Hz,Bx,By,Bz,phi,Ax,Ay,Az,errorE,errorH');
    expect(first!.split(',').slice(0, 4)).toEqual(['0.1', '0', '0.02', '1e-9']);

    const onWire = write('on.csv', 'x,y,z,t\n0.3,0,0,1e-9\n0,0,0.01,1e-9\n');
    const refused = run(
      'exact',
      write('cable.json', EXAMPLES['bench-cable-pulse']),
      '--points',
      onWire,
      '--out',
      'no.csv',
    );
    expect(refused.status).toBe(2);
    expect(refused.stderr).toMatch(/row 3.*“cable”/s);
    expect(existsSync(join(folder, 'no.csv'))).toBe(false);
  });

  test('by spectra: the same file, and how far the two routes are apart', () => {
    const points = write('route.csv', 'x,y,z,t\n0.1,0.05,0.02,1e-9\n0.3,0.5,0.5,3e-9\n0.1,0.05,0.02,2e-9\n');
    const asked = ['exact', 'tilted-wire', '--points', points, '--out'];
    expect(run(...asked, 'integrals.csv').status).toBe(0);
    const { status, stderr } = run(...asked, 'spectral.csv', '--route', 'spectral');
    expect(status).toBe(0);
    // A delay of 9 sigma: 1e-8 of the peak and better in every quantity.
    const apart = [...stderr.matchAll(/^ {2}(\S+) +(\S+) of /gm)].map(([, name, value]) => [
      name,
      Number(value) < 1e-8,
    ]);
    expect(apart).toEqual(['E', 'H', 'φ', 'A'].map((name) => [name, true]));
    const numbers = (file: string) =>
      readFileSync(join(folder, file), 'utf8')
        .trim()
        .split('\n')
        .slice(1)
        .map((line) => line.split(',').map(Number));
    const [first, second] = [numbers('integrals.csv'), numbers('spectral.csv')];
    for (const [n, row] of first.entries()) {
      expect(second[n]!.slice(0, 4)).toEqual(row.slice(0, 4));
      for (const c of [4, 5, 6]) expect(Math.abs(second[n]![c]! - row[c]!)).toBeLessThan(second[n]![17]! + row[17]!);
    }
    expect(run(...asked, 'no.csv', '--route', 'shortest').status).toBe(2);
  });

  test('the steady state at frequencies, complex columns', () => {
    const points = write('lines.csv', 'x,y,z,f\n0.1,0.05,0.02,1e9\n0.1,0.05,0.02,2e9\n');
    expect(run('exact', 'small-loop', '--points', points, '--frequencies', '--out', 'phasors.csv').status).toBe(0);
    const [header, first] = readFileSync(join(folder, 'phasors.csv'), 'utf8').split('\n');
    expect(header).toMatch(/^x,y,z,f,ExRe,ExIm,EyRe,EyIm,.*,phiRe,phiIm,AxRe,AxIm,AyRe,AyIm,AzRe,AzIm,errorE,errorH$/);
    expect(first!.split(',')).toHaveLength(4 + 26 + 2);
    const still = write('still.csv', 'x,y,z,f\n0.1,0.05,0.02,0\n');
    const refused = run('exact', 'small-loop', '--points', still, '--frequencies', '--out', 'no.csv');
    expect([refused.status, refused.stderr.includes('row 2: frequency is 0 Hz')]).toEqual([2, true]);
  });

  test.each([
    ['x,y,t\n1,2,3\n', 'x,y,z,t'],
    ['x,y,z,t\n1,2,abc,4\n', 'row 2: z is “abc”'],
    ['x,y,z,t\n1,2,,4\n', 'row 2: z is “”'],
  ])('a points file that cannot be used is refused: %s', (content, said) => {
    const { status, stderr } = run('exact', 'small-loop', '--points', write('p.csv', content), '--out', 'no.csv');
    expect(status).toBe(2);
    expect(stderr).toContain(said);
  });
});

describe('currents', () => {
  test('edge by edge, at the instants that drive the grid: their moment is the wire’s', () => {
    expect(run('currents', 'tilted-wire', '--out', 'edges.csv').status).toBe(0);
    const [header, ...rows] = readFileSync(join(folder, 'edges.csv'), 'utf8').trim().split('\n');
    const instants = header!.split(',').slice(8).map(Number);
    expect(header!.split(',').slice(0, 8)).toEqual(['axis', 'i', 'j', 'k', 'x', 'y', 'z', 'length']);
    expect(instants[1]! / instants[0]!).toBeCloseTo(3, 12);
    const from = [-0.12, -0.12, -0.12];
    const length = [0.048, 0.036, 0.08];
    const w = (t: number) => {
      const u = (t - 1.08e-9) / 0.12e-9;
      return -Math.sqrt(Math.E) * u * Math.exp(-0.5 * u * u);
    };
    const n = instants.findIndex((t) => t > 1e-9);
    const moment = [0, 0, 0];
    for (const row of rows) {
      const [axis, ...rest] = row.split(',');
      const a = 'xyz'.indexOf(axis!);
      const [i, j, k, x, y, z, h, ...currents] = rest.map(Number);
      [i!, j!, k!].forEach((node, b) => {
        expect([x!, y!, z!][b]!).toBeCloseTo(from[b]! + (node + (a === b ? 0.5 : 0)) * 5e-3, 12);
      });
      expect(currents).toHaveLength(instants.length);
      moment[a]! += h! * currents[n]!;
    }
    moment.forEach((m, a) => {
      expect(m / (w(instants[n]!) * length[a]!)).toBeCloseTo(1, 9);
    });
  });
});

describe('schema and examples', () => {
  test('the schema is JSON with titles and units; every example loads from what is printed', () => {
    expect(JSON.parse(run('schema').stdout).type).toBe('object');
    expect(JSON.parse(run('schema', 'survey').stdout).required).toEqual(['scenario', 'vary']);
    expect(run('schema', 'nothing').status).toBe(2);
    const names = run('examples')
      .stdout.trim()
      .split('\n')
      .map((line) => line.split(/\s/)[0]!);
    expect(names).toEqual(Object.keys(EXAMPLES));
    expect(JSON.parse(run('examples', names[2]!).stdout)).toEqual(EXAMPLES['small-loop']);
    expect(run('examples', 'no-such').status).toBe(2);
  });
});

describe('serve', () => {
  test('the report, on the loopback address, to its own host only, files of the folder only', async () => {
    const child = spawn(process.execPath, [MAIN, 'compare', write('s.json', small()), '--out', 'served', '--serve'], {
      cwd: folder,
    });
    try {
      const url = await new Promise<URL>((found) => {
        let text = '';
        child.stdout.on('data', (chunk) => {
          text += chunk;
          const match = /http:\/\/[\d.]+:\d+\//.exec(text);
          if (match) found(new URL(match[0]));
        });
      });
      expect(url.hostname).toBe('127.0.0.1');
      const ask = (path: string, headers = {}) =>
        new Promise<{ status: number; headers: Record<string, unknown>; body: string }>((done) => {
          get({ host: url.hostname, port: url.port, path, headers }, (response) => {
            let body = '';
            response.on('data', (chunk) => {
              body += chunk;
            });
            response.on('end', () => done({ status: response.statusCode!, headers: response.headers, body }));
          });
        });
      const page = await ask('/');
      expect(page.status).toBe(200);
      expect(page.body).toContain('<title>Fieldassay');
      const report = await ask('/report.html');
      expect(report.body).toContain('Within 5 %');
      expect(report.headers['content-security-policy']).toContain("default-src 'none'");
      expect(report.headers['content-security-policy']).not.toContain('script-src');
      expect(report.headers['cross-origin-opener-policy']).toBe('same-origin');
      expect((await ask('/results/result.json')).status).toBe(200);
      expect(JSON.parse((await ask('/results/')).body)).toMatchObject({
        files: expect.arrayContaining(['report.html', 'result.json']),
        cases: [],
      });
      expect((await ask('/', { host: 'example.org' })).status).toBe(421);
      // Pages of other sites tell where they come from; so do those on other ports of this machine, and local files (null).
      for (const origin of ['http://example.org', 'null', '', `https://${url.host}`, 'http://127.0.0.1:1'])
        for (const path of ['/', '/results/', '/results/result.json']) {
          const refused = await ask(path, { origin });
          expect([origin, path, refused.status]).toEqual([origin, path, 403]);
          expect(refused.headers['access-control-allow-origin']).toBeUndefined();
        }
      for (const host of [url.host, `localhost:${url.port}`])
        expect((await ask('/results/result.json', { host, origin: `http://${host}` })).status).toBe(200);
      for (const path of [
        '/../s.json',
        '/results/../../s.json',
        '/results/%2e%2e/s.json',
        '/results/..%2fs.json',
        '/nothing',
      ])
        expect((await ask(path)).status).toBe(404);
    } finally {
      child.kill('SIGINT');
      await new Promise((ended) => child.once('exit', ended));
    }
  });
});
