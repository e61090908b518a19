import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { surveyResultSchema } from '../../src/compare/surveyResult.ts';
import { KILLED, killAndResume, moments, SMALL, SurveyFolder, timeless } from '../run/surveyFolder.ts';

let folder: SurveyFolder;
beforeAll(() => {
  folder = new SurveyFolder();
});
afterAll(() => folder.remove());

const SIZES = ['14 mm', '12 mm', '10 mm'];
const WALLS = [{ type: 'mur1' }, { type: 'cpml', layers: 6 }];

describe('survey', () => {
  test('end to end: every case, ladders, walls, files that agree with each other', () => {
    const survey = folder.write('survey.json', {
      title: 'Walls <b>and</b> steps',
      scenario: SMALL,
      vary: { 'grid.boundary': WALLS, 'grid.cellSize': SIZES },
    });
    const { status, stdout, stderr } = folder.run(survey, '--out', 'out', '--threads', '2');
    expect(stderr).toContain('6 of 6 cases');
    expect(status).toBe(0);
    expect(stdout).toContain('6 cases: 6 done');

    const written = folder.read('out/survey-result.json');
    expect(surveyResultSchema.safeParse(JSON.parse(written)).error).toBeUndefined();
    const result = timeless(written);
    // By this and the cases the page follows a survey that runs elsewhere.
    expect(JSON.parse(folder.read('out/survey.json'))).toEqual(result.survey);
    // The last key varies fastest.
    expect(result.cases.map(({ settings }) => settings)).toEqual(
      WALLS.flatMap((wall) => SIZES.map((size) => ({ 'grid.boundary': wall, 'grid.cellSize': size }))),
    );
    // One mask for all: eight of the coarsest cells.
    expect(result.mask).toBeCloseTo(8 * 14e-3, 15);
    expect(result.ladders).toHaveLength(2);
    expect(result.ladder).toEqual(result.ladders[0]);
    for (const { orders, errors, cases } of result.ladders) {
      expect(orders).toHaveLength(2);
      expect(errors).toEqual(cases.map((n) => result.cases[n]!.budget!.total.relativeL2));
      orders.forEach((order, m) => {
        const sizes = [14e-3, 12e-3, 10e-3];
        const expected = Math.log(errors[m]! / errors[m + 1]!) / Math.log(sizes[m]! / sizes[m + 1]!);
        expect(order).toBeCloseTo(expected, 10);
      });
    }
    expect(result.boundaries).toHaveLength(6);
    for (const { settings, reflection, floor } of result.boundaries) {
      const type = (settings['grid.boundary'] as { type: string }).type;
      expect(floor!).toBeLessThan(-140);
      expect(reflection!).toBeLessThan(type === 'mur1' ? 0 : -40);
      expect(reflection!).toBeGreaterThan(type === 'mur1' ? -25 : -90);
    }
    // What a spreadsheet would take for a formula is none.
    const csv = folder.read('out/survey.csv').trim().split('\n');
    expect(csv).toHaveLength(7);
    expect(csv[0]).toMatch(/^grid\.boundary,grid\.cellSize,status,reason,dx,/);
    const report = folder.read('out/survey.html');
    expect(report).toContain('Walls &lt;b&gt;and&lt;/b&gt; steps');
    expect(report).not.toMatch(/<script|<b>and/);
    expect(folder.read('out/cost.svg')).toMatch(/^<svg .*<style>/);
  });

  test('one thread or two, and once more: the same numbers but for timings and environment', () => {
    const survey = folder.write('again.json', {
      scenario: SMALL,
      vary: { 'grid.boundary': WALLS, 'grid.clearance': ['60 mm'] },
    });
    const results = ['1', '2'].map((threads) => {
      folder.run(survey, '--out', `threads-${threads}`, '--threads', threads);
      return timeless(folder.read(`threads-${threads}/survey-result.json`));
    });
    expect(results[1]).toEqual(results[0]);
    const before = folder.cases('threads-2');
    expect(before.size).toBe(2);
    const { stderr } = folder.run(survey, '--out', 'threads-2', '--threads', '2');
    expect(stderr).toContain('2 of 2 cases');
    expect(folder.cases('threads-2')).toEqual(before);
    expect(timeless(folder.read('threads-2/survey-result.json'))).toEqual(results[0]);
  });

  test('a case is what `compare` says of the same scenario; names that look like formulas are none in the table', () => {
    const vary = { 'observers.0.name': ['=A1', 'B'] };
    folder.run(folder.write('named.json', { scenario: SMALL, vary }), '--out', 'named');
    const [first] = timeless(folder.read('named/survey-result.json')).cases;
    const { norms, budget, observers, grid } = folder.compare(folder.write('scenario.json', SMALL));
    expect({ ...first, reason: null }).toMatchObject({ norms, budget, observers, grid });
    expect(folder.read('named/survey.csv').split('\n')[1]).toMatch(/^"'=A1",done,/);
  });

  test('refused cases stand apart, with the reason, and the others are done: status 0', () => {
    const survey = folder.write('some.json', {
      scenario: SMALL,
      vary: { 'grid.courant': [0.9, 1.2] },
    });
    expect(folder.run(survey, '--out', 'some').status).toBe(0);
    const { cases } = timeless(folder.read('some/survey-result.json'));
    expect(cases.map(({ status }) => status)).toEqual(['done', 'refused']);
    expect(cases[1]!.reason).toMatch(/grid\.courant.*Courant limit/);
    expect(cases[1]!.norms).toBe(null);
  });

  test('nothing but refused cases: status 2, nothing written', () => {
    const survey = folder.write('none.json', { scenario: SMALL, vary: { 'grid.courant': [1.1, 1.2] } });
    const { status, stdout, stderr } = folder.run(survey, '--out', 'never');
    expect(status).toBe(2);
    expect(stdout).toBe('');
    expect(stderr).toContain('All 2 cases are refused');
    expect(folder.exists('never')).toBe(false);
  });

  test('a case that fails: status 3, the others done', () => {
    const survey = folder.write('fails.json', { scenario: SMALL, vary: { 'grid.courant': [0.8, 0.9] } });
    folder.run(survey, '--out', 'fails');
    // A folder in the place of a case's file: the case can be run, and not be kept.
    const [name] = folder.cases('fails').keys();
    folder.obstruct(`fails/cases/${name}`);
    const { status, stdout } = folder.run(survey, '--out', 'fails');
    expect(status).toBe(3);
    expect(stdout).toContain('2 cases: 1 done, 1 failed');
    const failed = timeless(folder.read('fails/survey-result.json')).cases.filter((each) => each.status === 'failed');
    expect(failed.map(({ reason }) => reason)).toEqual([expect.stringContaining('could not be written')]);
  });

  test('a missing survey, a missing scenario and a broken file: status 2, the place named', () => {
    expect(folder.run('no-such.json', '--out', 'never').status).toBe(2);
    const lost = folder.run(
      folder.write('lost.json', { scenario: 'no-such-scenario.json', vary: { duration: ['3 ns'] } }),
      '--out',
      'never',
    );
    expect(lost.status).toBe(2);
    expect(lost.stderr).toMatch(/^scenario: .*no-such-scenario\.json could not be read/);
    const broken = folder.run(folder.write('broken.json', '{ "vary": '), '--out', 'never');
    expect(broken.status).toBe(2);
    expect(broken.stderr).toContain('line 1');
    expect(folder.exists('never')).toBe(false);
  });

  test('Ctrl-C ends it within a second, keeps what is finished, and says so', async () => {
    const survey = folder.write('slow.json', {
      scenario: SMALL,
      vary: { 'grid.cellSize': ['12 mm', '4 mm', '3.9 mm', '3.8 mm'] },
    });
    const child = folder.start(survey, '--out', 'stopped', '--threads', '1');
    let said = '';
    const ended = new Promise<number | null>((done) => child.once('exit', done));
    await new Promise<void>((running) =>
      child.stderr.on('data', (chunk) => {
        said += chunk;
        if (said.includes('0 of 4')) running();
      }),
    );
    const asked = performance.now();
    child.kill('SIGINT');
    expect(await ended).toBe(130);
    expect(performance.now() - asked).toBeLessThan(1500);
    expect(said).toContain('the same command goes on from there');
    expect(folder.exists('stopped/survey-result.json')).toBe(false);
  });

  test('killed at five moments, it goes on: the same table bit for bit, nothing run twice', async () => {
    const survey = folder.write('killed.json', KILLED);
    const found = await killAndResume(folder, survey, (whole) => moments(5, 20_240_601, whole));
    for (const { moment, finished } of found) console.log(`killed after ${moment} ms: ${finished} of 6 cases finished`);
    for (const { repeated, same } of found) {
      expect(repeated).toEqual([]);
      expect(same).toBe(true);
    }
  }, 240_000);
});
