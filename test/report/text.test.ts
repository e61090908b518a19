import { describe, expect, it } from 'vitest';
import { resultText } from '../../src/report/text.ts';
import { exampleReport } from './example.ts';

const { result } = exampleReport();
const plain = resultText(result, { colour: false, written: ['out/result.json', 'out/report.html'] });
const ESCAPE = '\u001b';

describe('the terminal’s text', () => {
  it('begins with title and verdict, and says where the result lies', () => {
    const lines = plain.split('\n');
    expect(lines[0]).toBe('Bench cable pulse');
    expect(lines[1]).toMatch(/^Within 5 %: from /);
    expect(lines[2]).toMatch(/^Largest part: lattice/);
    expect(plain.trimEnd().split('\n').pop()).toBe('Written: out/result.json, out/report.html');
  });

  it('has a line for every part with figure, share, floor and bar', () => {
    expect(plain).toMatch(/^ {2}boundary +0\.0\d+ % +[−\d.]+ % +−\d+ dB {2}│/m);
    expect(plain).toMatch(/^ {2}lattice +3\.3 % +\d+ % +−\d+ dB {2}│█+$/m);
    expect(plain).toMatch(/^ {2}quadrature +< −\d+ dB \(floor\) +— +−\d+ dB {2}│$/m);
    expect(plain).toMatch(/^ {2}total +3\.3 % +100 % +−\d+ dB$/m);
  });

  it('draws negative shares to the left of one zero line', () => {
    const budget = {
      ...result.budget,
      lattice: { relativeL2: 0.03, share: 1.5, floor: 1e-6 },
      gridding: { relativeL2: 0.01, share: -0.5, floor: 1e-6 },
    };
    const lines = resultText({ ...result, budget }, { colour: false }).split('\n');
    const find = (part: string) => lines.find((line) => line.startsWith(`  ${part}`))!;
    const zero = find('lattice').indexOf('│');
    expect(find('gridding').indexOf('│')).toBe(zero);
    expect(find('lattice').slice(zero)).toBe(`│${'█'.repeat(24)}`);
    expect(find('gridding').slice(0, zero)).toMatch(/[^█]█{8}$/);
  });

  it('has no line that ends in blanks, and columns that line up', () => {
    for (const line of plain.split('\n')) expect(line).toBe(line.trimEnd());
    const rows = plain.split('\n').filter((line) => /^ {2}(A|near the wall|corner) /.test(line));
    expect(rows).toHaveLength(3);
    expect(new Set(rows.map((line) => line.length)).size).toBe(1);
  });

  it('has escapes only where colour is wanted, and the same words', () => {
    expect(plain).not.toContain(ESCAPE);
    const coloured = resultText(result, { colour: true, written: ['out/result.json', 'out/report.html'] });
    expect(coloured).toContain(`${ESCAPE}[38;5;74m│█`);
    // biome-ignore lint/suspicious/noControlCharactersInRegex: terminal escapes are what is taken off
    expect(coloured.replace(/\u001b\[[0-9;]*m/g, '')).toBe(plain);
  });

  it('marks what is outside the tolerance', () => {
    const bad = exampleReport({ lag: 1.5 }).result;
    expect(resultText(bad, { colour: false })).toContain('Outside the tolerance of 5 %.');
    expect(resultText(bad, { colour: true })).toContain(`${ESCAPE}[38;5;160m  A `);
  });

  it('lets no escape of a name or title through', () => {
    const hostile = `x${ESCAPE}]0;owned\u0007${ESCAPE}[2J\u202e`;
    const text = resultText(exampleReport({ title: hostile, observer: hostile }).result, { colour: false });
    // biome-ignore lint/suspicious/noControlCharactersInRegex: they must not be there
    expect(text.replaceAll('\n', '')).not.toMatch(/[\u0000-\u001f\u007f-\u009f\u202e]/);
    expect(text).toContain('x\\u{1b}]0;owned\\u{7}\\u{1b}[2J\\u{202e}');
  });
});
