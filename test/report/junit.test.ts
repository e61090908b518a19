import { XMLValidator } from 'fast-xml-parser';
import { expect, test } from 'vitest';
import { baselineCases, heldText, junitXml } from '../../src/report/junit.ts';

test('counts cases, and lets no name become markup or a character that XML does not know', () => {
  const xml = junitXml(
    'compare "a" <b>',
    [
      { name: 'fine' },
      { name: ']]><x>', failure: '5 % > 2 % & \u001b[31m\u0000\ud800\uffff' },
      { name: 'later', skipped: 'not known' },
    ],
    1.23456,
  );
  expect(xml).toContain(
    '<testsuite name="compare &quot;a&quot; &lt;b&gt;" tests="3" failures="1" errors="0" skipped="1" time="1.235">',
  );
  expect(xml).toContain('<testcase classname="fieldassay" name="fine"></testcase>');
  expect(xml).toContain('name="]]&gt;&lt;x&gt;"');
  expect(xml).toContain('message="5 % &gt; 2 % &amp; \\u{1b}[31m\\u{0}\ufffd\ufffd"');
  expect(xml).toContain('<skipped message="not known"/>');
  expect(XMLValidator.validate(xml)).toBe(true);
});

test('says by how much a figure grew', () => {
  const held = { figure: 'observer A, E: relative L2', before: 0.02, now: 0.03, grew: true };
  expect(heldText(held)).toBe('observer A, E: relative L2 was 2 % and is 3 %, 50 % more');
  expect(heldText({ ...held, now: null })).toBe('observer A, E: relative L2 was 2 % and has no value now');
  expect(baselineCases([held, { ...held, grew: false }]).map(({ failure }) => failure !== undefined)).toEqual([
    true,
    false,
  ]);
});
