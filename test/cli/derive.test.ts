import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { derivedSchema } from '../../src/derived/catalogue.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-derive-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const run = (...args: string[]) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, 'derive', ...args], {
    cwd: folder,
    encoding: 'utf8',
  });
  return { status, stdout, stderr };
};

/** A dipole of 1 mm in vacuum, along z: everything about it is known. */
const scenario = {
  sources: [
    {
      type: 'dipole',
      name: 'element',
      at: [0, 0, 0],
      direction: [0, 0, 1],
      length: '1 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '2 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-88 mm', '-88 mm', '-88 mm'], to: ['88 mm', '88 mm', '88 mm'] } },
  duration: '3.4 ns',
};

const write = (name: string, content: unknown) => {
  writeFileSync(join(folder, name), typeof content === 'string' ? content : JSON.stringify(content));
  return name;
};

/** What `derive --json` printed, columns by name. */
function derived(...args: string[]) {
  const { status, stdout, stderr } = run(...args, '--json');
  expect(status, stderr).toBe(0);
  const table = derivedSchema.parse(JSON.parse(stdout));
  const at = (row: number, name: string) => table.rows[row]![table.columns.findIndex((c) => c.name === name)];
  return { table, at, finding: (name: string) => table.findings.find((f) => f.name === name)?.value };
}

describe('derive', () => {
  test('radiation of a short dipole: R = (2π/3)η(l/λ)², D = 1.5 across it', () => {
    const file = write('dipole.json', scenario);
    const { at, finding } = derived(file, 'radiation', '--at', write('f.csv', 'f\n1e9\n2e9\n'), '--steady');
    const eta = finding('impedance')!;
    const part = (1e-3 * 1e9) / 299_792_458;
    expect((at(0, 'resistance') as number) / (((2 * Math.PI) / 3) * eta * part * part)).toBeCloseTo(1, 12);
    expect(at(0, 'directivity')).toBeCloseTo(1.5, 10);
    expect(at(0, 'thetaDeg')).toBeCloseTo(90, 4);
    expect(at(0, 'largestCurrent')).toBe(2);
    // Power is 2 A of amplitude through R, and grows as f².
    expect((at(0, 'power') as number) / (2 * (at(0, 'resistance') as number))).toBeCloseTo(1, 12);
    expect((at(1, 'power') as number) / (at(0, 'power') as number)).toBeCloseTo(4, 12);
  });

  test('radiation of its pulse: the energy in time is that of the spectrum', () => {
    const { finding } = derived('dipole.json', 'radiation', '--at', 'f.csv');
    expect(finding('energyBySpectrum')! / finding('energy')!).toBeCloseTo(1, 9);
  });

  test('far field: in time it is −µ l I′/(4π) across, by frequency its transform; none along the axis', () => {
    const directions = write('directions.csv', 'note,t,phiDeg,thetaDeg\nx,1.8e-9,30,90\nx,1.8e-9,30,0\n');
    const { at } = derived('dipole.json', 'far-field', '--at', directions);
    // I′ = −√e A/σ at the middle; E_θ points along −z there
    const expected = (1.25663706127e-6 * 1e-3 * -2 * Math.sqrt(Math.E)) / 0.2e-9 / (4 * Math.PI);
    expect((at(0, 'rEtheta') as number) / expected).toBeCloseTo(1, 9);
    expect(Math.abs(at(0, 'rEphi') as number)).toBeLessThan(1e-12 * Math.abs(expected));
    expect(Math.abs(at(1, 'rEtheta') as number)).toBeLessThan(1e-12 * Math.abs(expected));
    const steady = derived(
      'dipole.json',
      'far-field',
      '--at',
      write('lines.csv', 'thetaDeg,phiDeg,f\n90,0,1e9\n'),
      '--steady',
    );
    // −(−jωμ l I/(4π)): j times a positive number
    expect(steady.at(0, 'rEthetaIm')).toBeCloseTo((2 * Math.PI * 1e9 * 1.25663706127e-6 * 1e-3 * 2) / (4 * Math.PI), 9);
  });

  test('CSV: columns headed by name and unit, to a file or to standard output', () => {
    const places = write('places.csv', 'x,y,z\n0.5,0,0\n0,0,0.2\n');
    const printed = run('dipole.json', 'pulse', '--at', places);
    expect(printed.status).toBe(0);
    const [header, first, second] = printed.stdout.split('\n');
    expect(header).toMatch(/^x \[m\],y \[m\],z \[m\],Ecomponent,Epeak \[V\/m\],/);
    expect(first).toMatch(/^0\.5,0,0,Ez,/);
    // On the axis there is no H: its cells are empty.
    expect(second).toMatch(/,,,,$/);
    expect(run('dipole.json', 'pulse', '--at', places, '--out', 'pulse.csv').stdout).toBe('');
    expect(readFileSync(join(folder, 'pulse.csv'), 'utf8')).toBe(printed.stdout);
  });

  test('spectrum: its levels, and the band of a place', () => {
    const lines = Array.from({ length: 30 }, (_, n) => `0.5,0,0,${(n + 1) * 1e8}`).join('\n');
    const file = write('lines.csv', `x,y,z,f\n${lines}\n`);
    const { at, finding } = derived('dipole.json', 'spectrum', '--at', file);
    const [E, level] = [at(7, 'E') as number, at(7, 'level') as number];
    expect(10 ** (level / 20)).toBeCloseTo(Math.SQRT2 * E * 1e12, 6);
    expect(finding('bandFrom')!).toBeGreaterThan(1e8);
    expect(finding('bandTo')!).toBeLessThan(3e9);
  });

  test('voltage, flux and parts', () => {
    const loop = write('loop.csv', 'x,y,z\n0.1,0,-0.02\n0.2,0,-0.02\n0.2,0,0.05\n0.1,0,0.05\n');
    const flux = derived('dipole.json', 'flux', '--at', loop, '--instants', '30');
    expect(flux.table.rows).toHaveLength(30);
    expect(flux.finding('faraday')!).toBeLessThan(3e-7);
    const voltage = derived('dipole.json', 'voltage', '--at', loop, '--instants', '3');
    expect(voltage.at(2, 't')).toBeCloseTo(3.4e-9, 20);
    const parts = derived('dipole.json', 'parts', '--at', write('event.csv', 'x,y,z,t\n0.1,0,0,2.1e-9\n'));
    // Across a Gaussian's derivative: peaks √e σ A, A, √e A/σ, equal at vσ.
    expect(parts.finding('nearTo')! / (299_792_458 * 0.2e-9)).toBeCloseTo(1, 1);
  });

  test('what cannot be done is refused with status 2, naming file, row, column and remedy', () => {
    const refused = (...args: string[]) => {
      const { status, stdout, stderr } = run(...args);
      expect(status).toBe(2);
      expect(stdout).toBe('');
      return stderr;
    };
    const across = write('across.csv', 'x,y,z\n0,0,-0.1\n0,0,0.1\n');
    expect(refused('dipole.json', 'voltage', '--at', across)).toMatch(
      /crosses source “element” at \(0, 0, 0\) m.*Lead it round/,
    );
    expect(refused('dipole.json', 'flux', '--at', across)).toContain('flux needs at least 3');
    expect(refused('dipole.json', 'far-field', '--at', across)).toContain('thetaDeg,phiDeg,t or f');
    expect(refused('dipole.json', 'radiation', '--at', write('zero.csv', 'f\n1e9\n0\n'))).toMatch(/row 3: .*above 0/);
    expect(refused('dipole.json', 'radiation', '--at', write('word.csv', 'f\nfast\n'))).toMatch(
      /row 2: f is “fast”.*Hz/,
    );
    expect(refused('dipole.json', 'voltages', '--at', across)).toContain('voltage');
    expect(refused('dipole.json', 'pulse', '--at', write('on.csv', 'x,y,z\n0,0,0\n'))).toMatch(
      /row 2: .*lies on the source/,
    );
    expect(refused('dipole.json', 'pulse', '--at', 'none.csv')).toContain('no such file');
  });
});
