import { spawnSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { resultSchema } from '../../src/compare/result.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-pattern-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const SIGMA = 0.2e-9;

const compare = (scenario: object, ...flags: string[]) => {
  writeFileSync(join(folder, 'scenario.json'), JSON.stringify(scenario));
  const { status, stderr } = spawnSync(process.execPath, [MAIN, 'compare', 'scenario.json', '--out', 'out', ...flags], {
    cwd: folder,
    encoding: 'utf8',
  });
  const report = readFileSync(join(folder, 'out', 'report.html'), 'utf8');
  return {
    status,
    stderr,
    report,
    ...resultSchema.parse(JSON.parse(readFileSync(join(folder, 'out', 'result.json'), 'utf8'))),
  };
};

const small = (more: object = {}) => ({
  sources: [
    {
      type: 'dipole',
      name: 'element',
      at: [0, 0, 0],
      direction: [0, 0, 1],
      length: '10 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: 9 * SIGMA, sigma: SIGMA } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-88 mm', '-88 mm', '-88 mm'], to: ['88 mm', '88 mm', '88 mm'] } },
  duration: '4.4 ns',
  observers: [{ name: 'A', at: ['72 mm', 0, 0] }],
  ...more,
});

describe('quantities of a comparison', () => {
  test('energy, where the parts take over, pulses, and with --pattern the far field by direction', () => {
    const { quantities, report, stderr } = compare(small(), '--pattern');
    expect(stderr).toContain('the exact field on the surface');
    // η l²/(6πv²) ∫ İ² dt, for −A√e u e^(−u²/2): ∫ = e A² (3/4) √π/σ
    const larmor = (376.730313 * 1e-4 * Math.E * 0.75 * Math.sqrt(Math.PI)) / SIGMA / (6 * Math.PI * 299_792_458 ** 2);
    expect(quantities!.radiatedEnergy!.value / larmor).toBeCloseTo(1, 3);
    // All peaks are equal at vσ.
    expect(quantities!.regions!.nearTo! / (299_792_458 * SIGMA)).toBeCloseTo(1, 1);
    const [A] = quantities!.observers;
    expect(A!.E!.component).toBe('Ez');
    expect(Math.abs(A!.E!.gridPeak / A!.E!.peak - 1)).toBeLessThan(0.05);
    expect(A!.largestPart).toBe('radiation');

    const { lines, samples } = quantities!.pattern!;
    expect(samples).toBeLessThanOrEqual(12 * 24 * 24);
    expect(lines).toHaveLength(3);
    for (const { mainLobe, mainLobeDirection, axes, ownError, energy } of lines) {
      expect(Math.abs(mainLobeDirection[2])).toBeLessThan(Math.SQRT1_2 + 1e-9);
      expect(axes.map(({ direction }) => direction)).toEqual(['x', '−x', 'y', '−y', 'z', '−z']);
      // Nothing is radiated along the dipole, by the grid either.
      for (const { direction, error } of axes.slice(4)) expect(error, direction).toBeLessThan(mainLobe / 2);
      expect(Math.abs(energy.exactThroughSurface / energy.exact - 1)).toBeLessThan(3 * ownError + 1e-6);
      expect(Math.abs(energy.gridFar / energy.gridThroughSurface - 1)).toBeLessThan(3 * ownError + 1e-4);
      expect(Math.abs(energy.gridThroughSurface / energy.exactThroughSurface - 1)).toBeLessThan(3 * mainLobe + 1e-4);
    }
    // Dispersion grows with frequency.
    expect(lines[2]!.mainLobe).toBeGreaterThan(3 * lines[0]!.mainLobe);
    expect(report).toContain('Far field at');
    expect(report).toContain('Radiated energy');
  });

  test('a pattern that cannot be had says why and does not stop the rest; without the option there is none', () => {
    const short = compare(small({ duration: '2 ns' }), '--pattern');
    expect(short.quantities!.pattern).toBeNull();
    expect(short.quantities!.patternRefused).toMatch(/duration is .* Raise duration/);
    expect(short.report).toContain('No far-field pattern');
    const { quantities } = compare(small({ duration: '2 ns' }));
    expect(quantities!.pattern).toBeNull();
    expect(quantities!.patternRefused).toBeUndefined();
  });
});
