import { spawn, spawnSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { uniformInt } from 'pure-rand/distribution/uniformInt';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import type { Result } from '../../src/compare/result.ts';
import type { SurveyResult } from '../../src/compare/surveyResult.ts';

/** The built command line, as it is installed. */
const MAIN = new URL('../../dist/main.js', import.meta.url).pathname;

/** A dipole in a box of a few cells: a case takes some tenths of a second. */
export const SMALL = {
  title: 'Small box',
  sources: [
    {
      type: 'dipole',
      at: ['1 mm', '-2 mm', '3 mm'],
      direction: [0.2, 0, 1],
      length: '10 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '12 mm', box: { from: ['-84 mm', '-84 mm', '-84 mm'], to: ['84 mm', '84 mm', '84 mm'] } },
  duration: '3 ns',
  observers: [{ name: '=A1', at: ['50 mm', '20 mm', '10 mm'] }],
};

/** Six cases to be killed among. */
export const KILLED = {
  scenario: { ...SMALL, duration: '2.4 ns' },
  vary: { 'grid.courant': [0.5, 0.6, 0.7], 'grid.gridding': ['trilinear', 'staircase'] },
};

/** A folder of its own, with what runs surveys in it. */
export class SurveyFolder {
  readonly path = mkdtempSync(join(tmpdir(), 'fieldassay-survey-'));

  write(name: string, content: unknown): string {
    const path = join(this.path, name);
    writeFileSync(path, typeof content === 'string' ? content : JSON.stringify(content));
    return path;
  }

  run(...args: string[]): { status: number | null; stdout: string; stderr: string } {
    return spawnSync(process.execPath, [MAIN, 'survey', ...args], { cwd: this.path, encoding: 'utf8' });
  }

  /** What `compare` prints of a scenario. */
  compare(scenario: string): Result {
    const { stdout } = spawnSync(process.execPath, [MAIN, 'compare', scenario, '--json'], {
      cwd: this.path,
      encoding: 'utf8',
    });
    return JSON.parse(stdout);
  }

  start(...args: string[]) {
    return spawn(process.execPath, [MAIN, 'survey', ...args], { cwd: this.path });
  }

  /** Starts a survey, kills it some milliseconds after its first sign of life, and waits until it is gone. */
  async kill(after: number, ...args: string[]): Promise<void> {
    const child = this.start(...args);
    const gone = new Promise<void>((ended) => child.once('exit', () => ended()));
    let timer: NodeJS.Timeout | undefined;
    child.stderr.once('data', () => {
      timer = setTimeout(() => child.kill('SIGKILL'), after);
    });
    await gone;
    clearTimeout(timer);
  }

  /** Milliseconds from a survey's first sign of life to its end. */
  async time(...args: string[]): Promise<number> {
    const child = this.start(...args);
    const gone = new Promise<void>((ended) => child.once('exit', () => ended()));
    let started = 0;
    child.stderr.once('data', () => {
      started = performance.now();
    });
    await gone;
    return performance.now() - started;
  }

  read(name: string): string {
    return readFileSync(join(this.path, name), 'utf8');
  }

  exists(name: string): boolean {
    return existsSync(join(this.path, name));
  }

  /** Finished cases: file names with the instants they were written. */
  cases(out: string): Map<string, number> {
    const folder = join(this.path, out, 'cases');
    if (!existsSync(folder)) return new Map();
    return new Map(
      readdirSync(folder)
        .filter((name) => !name.startsWith('.'))
        .map((name) => [name, statSync(join(folder, name)).mtimeMs]),
    );
  }

  /** Puts a folder in the place of a file. */
  obstruct(name: string): void {
    rmSync(join(this.path, name));
    mkdirSync(join(this.path, name));
  }

  remove(): void {
    rmSync(this.path, { recursive: true, force: true });
  }
}

/** A result without what depends on the run: timings and environment. */
export function timeless(result: string): SurveyResult {
  return JSON.parse(result, (key, value) => (key === 'timings' || key === 'environment' ? null : value));
}

/** Milliseconds drawn by a seed. */
export function moments(count: number, seed: number, longest: number): number[] {
  const random = xoroshiro128plus(seed);
  return Array.from({ length: count }, () => uniformInt(random, 0, Math.round(longest)));
}

export interface Killed {
  readonly moment: number;
  /** cases that had been finished */
  readonly finished: number;
  /** names of those that the resumed survey wrote again */
  readonly repeated: string[];
  readonly same: boolean;
}

/** Kills a survey at each moment, lets it go on, and holds the outcome against that of one that was left alone. */
export async function killAndResume(folder: SurveyFolder, survey: string, at: (milliseconds: number) => number[]) {
  const time = await folder.time(survey, '--out', 'whole', '--threads', '2');
  const whole = JSON.stringify(timeless(folder.read('whole/survey-result.json')));
  const found: Killed[] = [];
  for (const [n, moment] of at(time).entries()) {
    const out = `killed-${n}`;
    await folder.kill(moment, survey, '--out', out, '--threads', '2');
    const before = folder.cases(out);
    folder.run(survey, '--out', out, '--threads', '2');
    const after = folder.cases(out);
    found.push({
      moment,
      finished: before.size,
      repeated: [...before].filter(([name, written]) => after.get(name) !== written).map(([name]) => name),
      same: JSON.stringify(timeless(folder.read(`${out}/survey-result.json`))) === whole,
    });
  }
  return found;
}
