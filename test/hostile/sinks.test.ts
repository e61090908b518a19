import { spawnSync } from 'node:child_process';
import { mkdtempSync, readdirSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { XMLParser, XMLValidator } from 'fast-xml-parser';
import { expect, test } from 'vitest';
import type { SurveyResult } from '../../src/compare/surveyResult.ts';
import { readTraces, writeTraces } from '../../src/files/traces.ts';
import { fileWords } from '../../src/files/words.ts';
import { chartFiles } from '../../src/report/folder.ts';
import { junitXml } from '../../src/report/junit.ts';
import { surveyCsv } from '../../src/report/surveyCsv.ts';
import { surveyText } from '../../src/report/surveyText.ts';
import { chartFile } from '../../src/report/svg.ts';
import { resultText } from '../../src/report/text.ts';
import { quoted } from '../../src/report/words.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import { loadSurvey } from '../../src/scenario/survey.ts';
import { jsonText, printable } from '../../src/scenario/text.ts';
import { exampleReport } from '../report/example.ts';
import { cellsOf, isFormula } from './csv.ts';
import { HOSTILE, SHOWING, UNSEEN, UNSEEN_CHARACTER } from './strings.ts';

const reports = HOSTILE.map((text) => exampleReport({ title: text, observer: text }));

/** A survey whose one case was refused, with a text wherever somebody can put one. */
const surveyWith = (text: string) =>
  ({
    title: text,
    version: '0',
    survey: {},
    vary: [text],
    cases: [{ settings: { [text]: text }, status: 'refused', reason: text, hash: '0' }],
    ladders: [],
    boundaries: [],
  }) as unknown as SurveyResult;

test('terminal: every text shows, none acts or makes a line of its own', () => {
  const lines = resultText(exampleReport({ title: 'x', observer: 'x' }).result).split('\n').length;
  reports.forEach(({ result }, n) => {
    const text = resultText(result, { written: [HOSTILE[n]!] });
    expect(text).not.toMatch(UNSEEN_CHARACTER);
    expect(text).toContain(printable(HOSTILE[n]!).trimEnd());
    expect(text.split('\n')).toHaveLength(lines + 2);
  });
  for (const hostile of HOSTILE) {
    const text = surveyText(surveyWith(hostile), [hostile]);
    expect(text).not.toMatch(UNSEEN_CHARACTER);
    expect(text.split('\n')).toHaveLength(surveyText(surveyWith('x'), ['x']).split('\n').length);
  }
});

test('texts that differ by what does not show are told apart', () => {
  expect(new Set(HOSTILE.map(printable)).size).toBe(HOSTILE.length);
});

test('scenario and survey files: texts that do not show are refused, all others are kept as they are', () => {
  const { scenario } = exampleReport({ title: 'x', observer: 'x' }).result;
  for (const title of SHOWING) {
    const survey = loadSurvey({ title, scenario: 'x', vary: { title: [title] } }, () => scenario);
    expect('survey' in survey && survey.survey.title).toBe(title);
  }
  for (const title of UNSEEN) {
    const loaded = loadScenario({ ...(scenario as object), title });
    if (!('problems' in loaded)) throw new Error(`${JSON.stringify(title)} was taken`);
    expect(loaded.problems[0]).toMatchObject({ path: 'title', message: expect.stringMatching(/holds U\+/) });
    for (const file of [{ vary: { title: [title] } }, { vary: { [title]: [1] } }, { title, vary: { title: ['x'] } }]) {
      const survey = loadSurvey({ scenario: 'x', ...file }, () => scenario);
      expect('problems' in survey, JSON.stringify(file)).toBe(true);
    }
  }
});

test('SVG: well-formed, texts as they were, no script, no event, no address', () => {
  const parser = new XMLParser({ ignoreAttributes: false, preserveOrder: true, processEntities: true });
  const seen = new Set<string>();
  const walk = (nodes: readonly Record<string, unknown>[]): void => {
    for (const node of nodes)
      for (const [name, value] of Object.entries(node)) {
        if (name === ':@') {
          for (const attribute of Object.keys(value as object))
            expect(attribute).not.toMatch(/^@_(on|href|xlink|src|style$)/i);
        } else if (Array.isArray(value)) {
          seen.add(name);
          walk(value);
        }
      }
  };
  reports.slice(0, 12).forEach(({ result, traces, spectra }) => {
    for (const [name, svg] of Object.entries(chartFiles({ result, traces, spectra })).slice(0, 3)) {
      expect(XMLValidator.validate(svg), name).toBe(true);
      walk(parser.parse(svg));
    }
  });
  for (const text of HOSTILE) {
    const axis = { label: text, unit: text, scale: 'linear', domain: [0, 1] } as const;
    const svg = chartFile({
      title: text,
      description: text,
      x: axis,
      y: axis,
      series: [{ name: text, colour: 'ink', points: [[0, 1]], dots: () => 'within', keys: [text] }],
      marks: [{ axis: 'x', at: 0.5, label: text }],
    });
    expect(XMLValidator.validate(svg)).toBe(true);
    expect(svg).not.toMatch(UNSEEN_CHARACTER);
    walk(parser.parse(svg));
  }
  expect([...seen].sort()).toEqual(['circle', 'desc', 'g', 'line', 'path', 'rect', 'style', 'svg', 'text', 'title']);
});

test('JUnit XML: well-formed, one suite, as many cases as there were, their names in one line', () => {
  const xml = junitXml(
    HOSTILE[0]!,
    HOSTILE.flatMap((name) => [{ name, failure: name }, { name, skipped: name }, { name }]),
    1,
  );
  expect(XMLValidator.validate(xml)).toBe(true);
  expect(xml).not.toMatch(UNSEEN_CHARACTER);
  const parsed = new XMLParser({ ignoreAttributes: false, processEntities: true }).parse(xml);
  const { testsuite } = parsed.testsuites;
  expect(Object.keys(parsed.testsuites).filter((key) => !key.startsWith('@_'))).toEqual(['testsuite']);
  expect(testsuite.testcase).toHaveLength(3 * HOSTILE.length);
  for (const one of testsuite.testcase)
    expect(Object.keys(one).every((key) => /^(@_name|@_classname|failure|skipped)$/.test(key))).toBe(true);
});

test('CSV: no cell is a formula, numbers are numbers, names come back as they were', () => {
  reports.forEach(({ traces }, n) => {
    const some = traces.slice(0, 1).map((trace) => ({ ...trace, time: trace.time.slice(0, 3) }));
    const text = writeTraces(some);
    const [head, ...rows] = cellsOf(text);
    for (const row of rows) {
      expect(row).toHaveLength(head!.length);
      expect(row.filter(isFormula)).toEqual([]);
      for (const cell of row.slice(2)) expect(Number.isFinite(Number(cell))).toBe(true);
    }
    expect(readTraces(text)[0]!.observer).toBe(HOSTILE[n]);
  });
  for (const hostile of HOSTILE) {
    const [head, row, ...more] = cellsOf(surveyCsv(surveyWith(hostile)));
    expect(more).toEqual([]);
    expect([...head!, ...row!].filter((cell) => isFormula(cell) || UNSEEN_CHARACTER.test(cell))).toEqual([]);
    expect(row).toHaveLength(head!.length);
  }
});

test('JSON: the same value, and every character of its text shows', () => {
  const value = { [HOSTILE[0]!]: HOSTILE, map: Object.fromEntries(UNSEEN.map((key) => [key, key])) };
  expect(JSON.parse(jsonText(value))).toEqual(value);
  expect(jsonText(value)).not.toMatch(UNSEEN_CHARACTER);
});

test('names of files: in their folder, each its own on any file system', () => {
  const words = fileWords(HOSTILE);
  const folder = mkdtempSync(join(tmpdir(), 'fieldassay-words-'));
  try {
    for (const [n, word] of words.entries()) {
      const name = `${word}-0001.vti`;
      expect(resolve(folder, name)).toBe(join(folder, name));
      expect(Buffer.byteLength(`.${name}.1234567.part`)).toBeLessThanOrEqual(255);
      expect(word).toMatch(/^[\p{L}\p{N}]([\p{L}\p{N}-]*[\p{L}\p{N}])?$/u);
      expect(word).not.toMatch(/^(con|prn|aux|nul|com\d|lpt\d)$/i);
      writeFileSync(join(folder, name), HOSTILE[n]!);
    }
    expect(readdirSync(folder)).toHaveLength(HOSTILE.length);
    for (const of of ['NFC', 'NFD', 'NFKC', 'NFKD'] as const)
      expect(new Set(fileWords(['é', 'e\u0301', 'É']).map((w) => w.normalize(of).toUpperCase())).size).toBe(3);
  } finally {
    rmSync(folder, { recursive: true });
  }
});

test('commands to paste: a shell sees the word and nothing else', () => {
  // A shell cannot be given a zero byte at all, and gives back half a pair as another character.
  const words = HOSTILE.filter((word) => !/[\0\p{Cs}]/u.test(word));
  const folder = mkdtempSync(join(tmpdir(), 'fieldassay-shell-'));
  try {
    const { stdout } = spawnSync('sh', ['-c', words.map((word) => `printf '%s\\0' ${quoted(word)}`).join('\n')], {
      cwd: folder,
      encoding: 'utf8',
    });
    expect(stdout.split('\0').slice(0, -1)).toEqual(words);
    expect(readdirSync(folder)).toEqual([]);
  } finally {
    rmSync(folder, { recursive: true });
  }
  expect(quoted('my scenario.json')).toBe('"my scenario.json"');
});
