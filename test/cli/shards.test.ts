import { rmSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { SMALL, SurveyFolder, timeless } from '../run/surveyFolder.ts';

let folder: SurveyFolder;
beforeAll(() => {
  folder = new SurveyFolder();
});
afterAll(() => folder.remove());

describe('a survey in fixed shares', () => {
  test('parts joined are the whole, bit for bit; what is missing is named; what does not belong together is refused', () => {
    const content = {
      title: 'Parts',
      scenario: { ...SMALL, duration: '2.2 ns', grid: { ...SMALL.grid, cellSize: '14 mm' } },
      vary: { 'grid.courant': [0.6, 1.2, 0.7, 0.8] },
    };
    const survey = folder.write('parts.json', content);
    folder.run(survey, '--out', 'whole');
    const whole = JSON.stringify(timeless(folder.read('whole/survey-result.json')));

    const first = folder.run(survey, '--out', 'parts/one', '--shard', '1/2');
    expect(first.status).toBe(0);
    expect(first.stdout).toMatch(/^Part 1 of 2: 2 cases, .*\nWritten: parts\/one\/part-1-of-2\.json/);
    const early = folder.run('--merge', 'parts');
    expect(early.status).toBe(3);
    expect(early.stderr).toMatch(/^missing: 2 cases of part 2 of 2, which is not here$/m);
    const reasons = timeless(folder.read('parts/survey-result.json')).cases.flatMap(({ reason }) => reason ?? []);
    expect(reasons).toContain('missing: part 2 of 2 is not here');

    expect(folder.run(survey, '--out', 'parts/two', '--shard', '2/2').status).toBe(0);
    const joined = folder.run('--merge', 'parts');
    expect(joined.stderr).toBe('');
    expect(joined.status).toBe(0);
    expect(JSON.stringify(timeless(folder.read('parts/survey-result.json')))).toBe(whole);

    rmSync(join(folder.path, 'parts/two/cases'), { recursive: true });
    expect(folder.run('--merge', 'parts').stderr).toMatch(/part 2 of 2, whose cases folder is not here/);
    const other = folder.write('other.json', { ...content, title: 'Others' });
    folder.run(other, '--out', 'parts/three', '--shard', '3/3');
    const mixed = folder.run('--merge', 'parts');
    expect(mixed.status).toBe(2);
    expect(mixed.stderr).toMatch(/Part 1 is of 2, part 3 of 3/);
  });

  test('wrong words are refused, with what would be right', () => {
    const survey = folder.write('words.json', { scenario: SMALL, vary: { 'grid.courant': [0.6] } });
    const said = (...args: string[]) => {
      const { status, stderr } = folder.run(...args);
      expect(status).toBe(2);
      return stderr;
    };
    expect(said(survey, '--out', 'x', '--shard', '4/3')).toContain('such as 3/16');
    expect(said(survey)).toContain('--out is missing');
    expect(said('--out', 'x')).toContain('name a survey file');
    expect(said('--merge', 'nowhere')).toContain('there is no folder nowhere');
    expect(said('--merge', '.')).toContain('there is no part of a survey');
    expect(said(survey, '--merge', '.')).toContain('leave the survey file');
    expect(said(survey, '--out', 'x', '--shard', '1/2', '--queue', 'postgres://h/d')).toContain('leave --shard out');
    expect(said(survey, '--out', 'x', '--threads', '2', '--queue', 'postgres://h/d')).toContain('`fieldassay work`');
    expect(folder.exists('x')).toBe(false);
  });
});
