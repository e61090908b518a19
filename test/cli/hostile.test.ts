import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { UNSEEN_CHARACTER } from '../hostile/strings.ts';
import { SMALL } from '../run/surveyFolder.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

/** A line that looks like a verdict, after one that is cleared. */
const FORGED = 'x\u001b[2K\rWithin 5 %: everywhere.\nWithin 5 %: everywhere.\u009b8m\u202e';

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-refusals-'));
  const { sources } = SMALL;
  const withTable = (file: string) => ({
    ...SMALL,
    sources: [{ ...sources[0], current: { waveform: { type: 'table', file } } }],
  });
  for (const [name, content] of Object.entries({
    'small.json': SMALL,
    'keys.json': { ...SMALL, [FORGED]: 1, grid: { ...SMALL.grid, [FORGED]: FORGED } },
    'values.json': { ...SMALL, title: FORGED, duration: FORGED, observers: [{ name: FORGED, at: [FORGED, 0, 0] }] },
    'broken.json': `{"${FORGED}`,
    'zero.json': withTable('/dev/zero'),
    'pipe.json': withTable('pipe'),
    'folder.json': withTable('.'),
    'table.json': withTable('table.csv'),
    'table.csv': `t,I\n0,${FORGED}\n`,
    'sound.json': { scenario: 'small.json', vary: { 'grid.courant': [0.5] } },
    'survey.json': { scenario: '/dev/zero', vary: { title: ['x'] } },
    'survey-keys.json': { title: FORGED, scenario: 'small.json', vary: { [FORGED]: [FORGED] } },
    'points.csv': `x,y,z,t\n0.1,0,0,"${FORGED}"\n`,
    'twice.csv': 'x,y,z,t,x\n0.1,0,0,1e-9,0.2\n',
    'traces.csv': `t,"${FORGED}.Ez"\n0,"${FORGED}"\n`,
    'named.csv': ['t,A\u200b.Ez', ...Array.from({ length: 9 }, (_, n) => `${n},1`)].join('\n'),
    'map.json': { [FORGED]: FORGED, columns: { [FORGED]: FORGED } },
  }))
    writeFileSync(join(folder, name), typeof content === 'string' ? content : JSON.stringify(content));
  spawnSync('mkfifo', [join(folder, 'pipe')]);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

test.each<[string, string[], RegExp]>([
  ['a file of that name', ['compare', FORGED], /could not be read/],
  ['an option of that name', ['compare', `--${FORGED}`], /unknown option/],
  ['keys', ['compare', 'keys.json', '--out', 'out'], /holds U\+001B/],
  ['values', ['compare', 'values.json', '--out', 'out'], /title: title holds U\+001B/],
  ['no JSON', ['compare', 'broken.json'], /is not JSON/],
  ['a table in a file that never ends', ['compare', 'zero.json'], /is no file/],
  ['a table in a pipe that nobody writes to', ['compare', 'pipe.json'], /is no file/],
  ['a table in a folder', ['compare', 'folder.json'], /is no file/],
  ['cells of a table', ['compare', 'table.json'], /row 2: I is/],
  ['a scenario that never ends', ['survey', 'survey.json', '--out', 'out'], /is no file/],
  ['keys of a survey', ['survey', 'survey-keys.json', '--out', 'out'], /title: title holds U\+001B/],
  ['cells of points', ['exact', 'small.json', '--points', 'points.csv', '--out', 'out.csv'], /row 2: t is/],
  ['a column that stands twice', ['exact', 'small.json', '--points', 'twice.csv', '--out', 'out.csv'], /names x twice/],
  ['cells of traces', ['judge', 'small.json', '--traces', 'traces.csv', '--out', 'out'], /traces.csv: row 2 /],
  ['a name that does not show', ['judge', 'small.json', '--traces', 'named.csv', '--at', 'A\u200b=0,0,0'], /U\+200B/],
  ['a map', ['judge', 'small.json', '--traces', 'named.csv', '--map', 'map.json'], /map.json: /],
  ['an earlier result', ['compare', 'small.json', '--baseline', 'broken.json'], /is no JSON/],
  [
    'an address',
    ['survey', 'sound.json', '--out', 'out', '--queue', `postgres://u:s3cret@h/${FORGED}?sslmode=x`],
    /sslmode/,
  ],
])('%s: status 2, in words that show, nothing forged, nothing written', (_, args, message) => {
  const { status, stdout, stderr } = spawnSync(process.execPath, [MAIN, ...args], {
    cwd: folder,
    encoding: 'utf8',
    timeout: 20_000,
  });
  expect(stderr).toMatch(message);
  expect(status).toBe(2);
  expect(stdout).toBe('');
  expect(stderr).not.toMatch(UNSEEN_CHARACTER);
  expect(stderr).not.toMatch(/^Within/m);
  expect(stderr).not.toContain('s3cret');
  expect(readdirSync(folder).filter((name) => name.startsWith('out'))).toEqual([]);
});
