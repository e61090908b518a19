import { spawn, spawnSync } from 'node:child_process';
import {
  chmodSync,
  existsSync,
  lstatSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  renameSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { writeFolder } from '../../src/cli/output.ts';
import { SMALL } from '../run/surveyFolder.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

let folder = '';
beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-failures-'));
  // For everybody to enter: some of it is done as somebody else.
  chmodSync(folder, 0o755);
  put('small.json', JSON.stringify({ ...SMALL, duration: '2.4 ns' }));
  // Fields that are larger than its other files.
  put('fine.json', JSON.stringify({ ...SMALL, grid: { ...SMALL.grid, cellSize: '8 mm' }, duration: '2.4 ns' }));
  put('survey.json', JSON.stringify({ scenario: 'small.json', vary: { 'grid.courant': [0.5, 0.6] } }));
  put('points.csv', 'x,y,z,t\n0.05,0.02,0.01,2e-9\n');
  put('many.csv', `x,y,z,t\n${'0.05,0.02,0.01,2e-9\n'.repeat(10)}`);
  put('places.csv', `x,y,z\n${'0.05,0.02,0.01\n'.repeat(12)}`);
  // The first worker to be started ends at its first task, as one does that the system kills.
  put(
    'dies.cjs',
    `const { isMainThread, parentPort, threadId } = require('node:worker_threads');
    if (!isMainThread && threadId === 1) parentPort.once('message', () => process.exit(7));`,
  );
  // A machine that gives no more than 2 MiB at once.
  put(
    'scarce.cjs',
    `const { Memory } = WebAssembly;
    WebAssembly.Memory = class extends Memory {
      constructor(asked) {
        if (asked.initial > 32) throw new RangeError('could not allocate memory');
        super(asked);
      }
    };`,
  );
  expect(run('compare', 'small.json', '--threads', '2', '--out', 'sound').status).toBe(0);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function put(name: string, content: string): void {
  writeFileSync(join(folder, name), content);
}

const start = (program: string, args: readonly string[], env = {}, somebody = {}) => {
  const { status, stdout, stderr } = spawnSync(program, args, {
    cwd: folder,
    encoding: 'utf8',
    env: { ...process.env, ...env },
    timeout: 50_000,
    ...somebody,
  });
  return { status, stdout, stderr, said: stderr.trimEnd().split('\n').at(-1)! };
};

const run = (...args: string[]) => start(process.execPath, [MAIN, ...args]);

/** The command line with a file that is read first in every thread. */
const runWith = (first: string, ...args: string[]) =>
  start(process.execPath, [MAIN, ...args], { NODE_OPTIONS: `--require=${join(folder, first)}` });

/** The command line where no file may be larger than so many KiB: to a program, a disk that is full. */
const runWithin = (size: number, ...args: string[]) =>
  start('bash', ['-c', `ulimit -f ${size}; exec "$@"`, 'bash', process.execPath, MAIN, ...args]);

const ALL = { recursive: true, encoding: 'utf8' } as const;

/** All that lies in a folder, hidden files too. */
const contents = (name: string): string[] =>
  existsSync(join(folder, name)) ? readdirSync(join(folder, name), ALL).sort() : [];

const COMPARE = ['compare', 'small.json', '--threads', '2'];

describe('a disk that is full', () => {
  test.each([
    ['compare', 4, 'result.json', [...COMPARE, '--out', 'full-1'], []],
    ['pictures', 4, 'frame-01.png', [...COMPARE, '--frames', 'full-2'], []],
    ['judge', 4, 'result.json', ['judge', 'small.json', '--traces', 'sound/traces.csv', '--out', 'full-3'], []],
    [
      'images',
      300,
      '.vti',
      ['compare', 'fine.json', '--out', 'full-4', '--snapshots', 'vti', '--region', 'box', '--stride', '1'],
      ['fields', 'report.html', 'result.json', 'traces.csv'],
    ],
    [
      'HDF5',
      300,
      'fields.h5',
      ['compare', 'fine.json', '--out', 'full-5', '--snapshots', 'hdf5', '--region', 'box', '--stride', '1'],
      ['report.html', 'result.json', 'traces.csv'],
    ],
  ] as const)('%s: status 3, the file and what to do; what is there is whole', (_, size, file, args, left) => {
    const { status, said, stderr } = runWithin(size, ...args);
    expect(said).toMatch(/^full-\d\S* could not be written: .*; choose another place for it$/);
    expect(said).toContain(file);
    expect(stderr).not.toMatch(/\n\s+at /);
    expect(status).toBe(3);
    expect(contents(args.find((arg) => arg.startsWith('full-'))!)).toEqual(left);
  });

  test.each([
    ['exact', 1, ['exact', 'small.json', '--points', 'many.csv', '--out', 'full-8.csv']],
    ['derive', 1, ['derive', 'small.json', 'pulse', '--at', 'places.csv', '--out', 'full-8.csv']],
    ['currents', 8, ['currents', 'small.json', '--out', 'full-8.csv']],
  ] as const)('%s: status 3, and the file that was there stays', (_, size, args) => {
    put('full-8.csv', 'before');
    const { status, said, stderr } = runWithin(size, ...args);
    expect(said).toMatch(/^full-8\.csv could not be written: .* \(it takes [\d.]+ k?B\); choose another place for it$/);
    expect(stderr).not.toMatch(/\n\s+at /);
    expect(status).toBe(3);
    expect(readFileSync(join(folder, 'full-8.csv'), 'utf8')).toBe('before');
    expect(contents('.').filter((name) => name.includes('.part'))).toEqual([]);
  });

  test('results that were there stay as they were, all of them; what was found is told all the same', () => {
    expect(run(...COMPARE, '--out', 'kept', '--charts', '--npz').status).toBe(0);
    const before = contents('kept').map((name) => [name, statSync(join(folder, 'kept', name)).mtimeMs]);
    // Room for result.json, and not for the traces, which come after it.
    const { status, stdout } = runWithin(40, ...COMPARE, '--out', 'kept', '--charts', '--npz');
    expect(status).toBe(3);
    expect(contents('kept').map((name) => [name, statSync(join(folder, 'kept', name)).mtimeMs])).toEqual(before);
    expect(stdout).toContain('Error budget of E');
    expect(stdout).not.toContain('Written:');
  });

  test('a survey: the case that cannot be kept, or the table; finished cases stay', () => {
    const cases = runWithin(1, 'survey', 'survey.json', '--threads', '2', '--out', 'full-6');
    expect(cases.status).toBe(3);
    expect(contents('full-6').filter((name) => name.endsWith('.part'))).toEqual([]);
    const table = runWithin(8, 'survey', 'survey.json', '--threads', '2', '--out', 'full-7');
    expect(table.status).toBe(3);
    expect(table.said).toMatch(/^full-7\/survey-result\.json could not be written: /);
    expect(contents('full-7').filter((name) => /^cases.*\.json$/.test(name))).toHaveLength(2);
    expect(contents('full-7').filter((name) => name.endsWith('.part'))).toEqual([]);
  });

  // Through a link of our own: should the device be replaced by a file, it is only the link that is lost.
  test('the exact field into a device that takes nothing: status 3, and the device is left what it is', () => {
    symlinkSync('/dev/full', join(folder, 'full.csv'));
    const { status, said } = run('exact', 'small.json', '--points', 'points.csv', '--out', 'full.csv');
    expect(said).toMatch(/^full\.csv could not be written: the disk is full \(it takes \d+ B\); choose another place/);
    expect(status).toBe(3);
    expect(lstatSync(join(folder, 'full.csv')).isSymbolicLink()).toBe(true);
  });

  test('standard output that takes nothing is a failure; a reader that has read enough is none', () => {
    const shell = (line: string) => start('bash', ['-c', line, 'bash', process.execPath, MAIN]);
    for (const words of ['schema', '--help']) {
      const { status, stderr } = shell(`"$@" ${words} > /dev/full`);
      expect(stderr).toBe('standard output could not be written: the disk is full; choose another place for it\n');
      expect(status).toBe(3);
    }
    expect(shell('set -o pipefail; "$@" schema | head -c 10 > /dev/null')).toMatchObject({
      status: 0,
      stderr: '',
    });
  });
});

describe('a place that cannot be written to', () => {
  test('a folder that has vanished, or is a file', () => {
    for (const [out, why] of [
      ['gone/field.csv', 'there is no such file or folder'],
      ['points.csv/field.csv', 'a part of the path is not a folder'],
      ['sound', 'it is a folder'],
    ]) {
      const { status, said } = run('exact', 'small.json', '--points', 'points.csv', '--out', out!);
      expect(said).toBe(`${out} could not be written: ${why}; choose another place for it`);
      expect(status).toBe(3);
    }
  });

  test('is told of before anything is computed', () => {
    const place = join(folder, 'locked');
    mkdirSync(place, { mode: 0o555 });
    // The superuser may write anywhere: as somebody else, then.
    const somebody = process.geteuid!() === 0 ? { uid: 65_534, gid: 65_534 } : {};
    const judging = ['judge', 'small.json', '--traces', 'sound/traces.csv'];
    const exact = ['exact', 'small.json', '--points', 'points.csv'];
    const derive = ['derive', 'small.json', 'pulse', '--at', 'places.csv'];
    for (const args of [
      [...COMPARE, '--out', 'locked'],
      [...COMPARE, '--frames', 'locked/deeper'],
      [...COMPARE, '--junit', 'locked/checks.xml'],
      [...judging, '--out', 'locked'],
      ['plan', 'small.json', '--out', 'locked/deeper'],
      ['survey', 'survey.json', '--out', 'locked'],
      [...exact, '--out', 'locked/field.csv'],
      [...derive, '--out', 'locked/pulses.csv'],
    ]) {
      const { status, stderr } = start(process.execPath, [MAIN, ...args], {}, somebody);
      expect(stderr).toMatch(
        /^[^\n]*locked\S* could not be (written|made): permission denied; choose another place for it\n$/,
      );
      expect(status).toBe(3);
    }
    expect(contents('locked')).toEqual([]);
  });

  test('a folder that goes away while its files are written', async () => {
    const child = spawn(
      process.execPath,
      [MAIN, 'compare', 'fine.json', '--out', 'going', '--snapshots', 'vti', '--region', 'box', '--stride', '1'],
      { cwd: folder },
    );
    const gone = new Promise<number | null>((ended) => child.once('close', ended));
    let said = '';
    child.stderr.setEncoding('utf8').on('data', (text) => {
      said += text;
    });
    while (contents('going/fields').length === 0) {
      expect(child.exitCode).toBe(null);
      await new Promise((next) => setTimeout(next, 5));
    }
    // At once, with what is in it: removed file by file it would be found half empty.
    renameSync(join(folder, 'going'), join(folder, 'went'));
    expect(await gone).toBe(3);
    expect(said.trimEnd().split('\n').at(-1)).toMatch(
      /^going\/fields\/box-\d+\.vti could not be written: there is no such file or folder; choose another place for it$/,
    );
    expect(contents('going')).toEqual([]);
  });

  test('a folder that may only be read', () => {
    const place = join(folder, 'read-only');
    mkdirSync(place, { mode: 0o555 });
    // The superuser may write anywhere: as somebody else, then.
    const superuser = process.geteuid!() === 0;
    try {
      if (superuser) process.seteuid!(65_534);
      expect(() => writeFolder(place, { 'a.txt': 'a' })).toThrow(/could not be written: permission denied; choose/);
      expect(() => writeFolder(join(place, 'deeper'), { 'a.txt': 'a' })).toThrow(
        /could not be made: permission denied/,
      );
    } finally {
      if (superuser) process.seteuid!(0);
    }
    expect(readdirSync(place)).toEqual([]);
  });

  test('a link stays a link: the file that it leads to is replaced', () => {
    put('kept.txt', 'before');
    symlinkSync('kept.txt', join(folder, 'link.txt'));
    writeFolder(folder, { 'link.txt': 'after' });
    expect(lstatSync(join(folder, 'link.txt')).isSymbolicLink()).toBe(true);
    expect(readFileSync(join(folder, 'kept.txt'), 'utf8')).toBe('after');
  });
});

describe('a worker that dies, memory that cannot be had', () => {
  const DIED = /^a worker thread ended before it was done with .* \(exit code 7\); .* Run it again with fewer threads/;

  test.each([
    ['compare', [...COMPARE, '--out', 'dead-1']],
    ['judge', ['judge', 'small.json', '--traces', 'sound/traces.csv', '--out', 'dead-2']],
  ] as const)('%s: status 3, what it was at and what may help; nothing written', (_, args) => {
    const { status, said } = runWith('dies.cjs', ...args);
    expect(said).toMatch(DIED);
    expect(status).toBe(3);
    expect(contents(args.at(-1)!)).toEqual([]);
  });

  test('a survey tells of the case, does the others, and does that one when it is run again', () => {
    const args = ['survey', 'survey.json', '--threads', '2', '--out', 'dead-3'];
    expect(runWith('dies.cjs', ...args).status).toBe(3);
    const { cases } = JSON.parse(readFileSync(join(folder, 'dead-3/survey-result.json'), 'utf8'));
    expect(cases.map(({ status }: { status: string }) => status).sort()).toEqual(['done', 'failed']);
    expect(cases.find(({ status }: { status: string }) => status === 'failed').reason).toMatch(DIED);
    expect(run(...args).status).toBe(0);
  });

  test('no room for the program itself: one line', () => {
    // Less than what WebAssembly sets apart of addresses for a memory of any size.
    const { status, stderr } = start('bash', [
      '-c',
      'ulimit -v 4000000; exec "$@"',
      'bash',
      process.execPath,
      MAIN,
      ...COMPARE,
    ]);
    expect(stderr).toMatch(/^[^\n]*[Oo]ut of memory[^\n]*\n$/);
    expect(status).toBe(3);
  });

  test('memory: how much, and how to need less', () => {
    const { status, said } = runWith('scarce.cjs', ...COMPARE, '--out', 'scarce-1');
    expect(said).toMatch(
      /^the run needs \d.* GiB .*; this machine does not give as much\. Raise grid\.cellSize .*, shrink/,
    );
    expect(status).toBe(3);
    expect(contents('scarce-1')).toEqual([]);
    expect(runWith('scarce.cjs', 'survey', 'survey.json', '--out', 'scarce-2').status).toBe(3);
    expect(readFileSync(join(folder, 'scarce-2/survey-result.json'), 'utf8')).toContain('this machine does not give');
  });
});
