import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { planSchema } from '../../src/compare/planResult.ts';
import { loadScenario } from '../../src/scenario/load.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-plan-'));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const plan = (...args: string[]) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, 'plan', ...args], {
    cwd: folder,
    encoding: 'utf8',
  });
  return { status, stdout, stderr };
};

test('plan: exit status 0 and a folder of three files, which hold together', () => {
  const { status, stdout } = plan(
    'tilted-wire',
    '--tolerance',
    '2 %',
    '--at',
    'near',
    '--rate',
    '3e8',
    '--out',
    'made',
  );
  expect(status).toBe(0);
  expect(stdout).toMatch(/Within 2 %: cells of .*; predicted .* at near, measured /);
  expect(stdout).toContain("your own solver's 300 Mcells/s");
  expect(readdirSync(join(folder, 'made')).sort()).toEqual(['plan.html', 'plan.json', 'planned-scenario.json']);
  const written = planSchema.parse(JSON.parse(readFileSync(join(folder, 'made/plan.json'), 'utf8')));
  const planned = readFileSync(join(folder, 'made/planned-scenario.json'), 'utf8');
  expect(JSON.parse(planned)).toEqual(written.scenario);
  expect(loadScenario(planned)).toHaveProperty('scenario');
});

test('plan --json prints the plan and nothing else; --distance, --band and --no-run are heeded', () => {
  const { status, stdout } = plan(
    'bench-cable-pulse',
    ...['--tolerance', '0.05', '--distance', '80 mm', '--band', '2 GHz', '--no-run', '--json'],
  );
  expect(status).toBe(0);
  const { band, check, places, tolerance } = planSchema.parse(JSON.parse(stdout));
  expect({ band, check, tolerance }).toEqual({ band: 2e9, check: null, tolerance: 0.05 });
  expect(places.map(({ name }) => name)).toContain('+x');
});

test('plan: exit status 1 where nothing meets the tolerance', () => {
  const { status, stdout } = plan('dipole-near-corner', '--tolerance', '1e-6');
  expect(stdout).toContain('no set-up is predicted to meet it; best cells of');
  expect(status).toBe(1);
});

test.each([
  [['tilted-wire', '--tolerance', '0'], 'give a fraction above 0 and at most 1'],
  [['tilted-wire', '--distance', '-3 mm'], 'give a value above 0'],
  [['tilted-wire', '--band', '3 mm'], 'give a value above 0, such as "2 GHz"'],
  [['tilted-wire', '--rate', 'fast'], 'give a number above 0'],
  [['tilted-wire', '--at', 'here'], 'There is no observer “here”; there are “near”, “far”'],
  [['tilted-wire', '--at', 'near', '--distance', '80 mm'], 'Leave one out'],
  [['nowhere.json'], 'nowhere.json could not be read'],
  [['broken.json'], 'The file is not JSON'],
])('plan %j is refused', (args, message) => {
  writeFileSync(join(folder, 'broken.json'), '{ "grid": ');
  const { status, stderr, stdout } = plan(...args);
  expect(stderr).toContain(message);
  expect(stdout).toBe('');
  expect(status).toBe(2);
});
