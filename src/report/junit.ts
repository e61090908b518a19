import type { Held } from '../compare/baseline.ts';
import { type Judgement, tracesWithinTolerance } from '../compare/judgeResult.ts';
import { type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent } from '../elementary/quantity.ts';
import { type Markup, markup } from './markup.ts';

/** One thing that a build server counts as passed, failed or skipped. */
export interface TestCase {
  readonly name: string;
  /** what failed; absent where nothing did */
  readonly failure?: string;
  readonly skipped?: string;
}

/** Half of a surrogate pair, and the two code points that XML does not know. */
const NO_XML = /\p{Surrogate}|[\ufffe\uffff]/gu;
const clean = (text: string): string => text.replace(NO_XML, '\ufffd');

/**
 * Test cases in the XML that build servers read ("JUnit style": common practice, no standard): one suite, a case each, with
 * `failure` or `skipped` inside.
 * @param seconds that the whole took
 */
export function junitXml(suite: string, cases: readonly TestCase[], seconds: number): string {
  const count = (of: keyof TestCase) => cases.filter((one) => one[of] !== undefined).length;
  const body = (one: TestCase): Markup | null => {
    if (one.failure !== undefined) return markup`<failure message="${clean(one.failure)}"/>`;
    return one.skipped === undefined ? null : markup`<skipped message="${clean(one.skipped)}"/>`;
  };
  const time = Number(seconds.toFixed(3));
  const counts = markup`tests="${cases.length}" failures="${count('failure')}" errors="0" skipped="${count('skipped')}" time="${time}"`;
  return markup`<?xml version="1.0" encoding="UTF-8"?>
<testsuites ${counts}>
<testsuite name="${clean(suite)}" ${counts}>
${cases.map((one) => markup`<testcase classname="fieldassay" name="${clean(one.name)}">${body(one)}</testcase>\n`)}</testsuite>
</testsuites>
`.text;
}

const within = (name: string, error: number | null, tolerance: number): TestCase => {
  const title = `${name}: E within ${formatPercent(tolerance, 3)}`;
  if (error === null) return { name: title, skipped: 'E has no value there' };
  return error <= tolerance
    ? { name: title }
    : { name: title, failure: `relative L2 of E is ${formatPercent(error, 3)}` };
};

/** What a comparison is counted as: every observer in the box, the whole, and the checks. */
export function comparisonCases(result: Result): TestCase[] {
  const { observers, tolerance, checks, verdict } = result;
  return [
    ...observers
      .filter(({ inside }) => inside)
      .map(({ name, E }) => within(`observer ${name}`, E?.relativeL2 ?? null, tolerance)),
    { name: 'within the tolerance', ...(withinTolerance(result) ? {} : { failure: verdict.sentence }) },
    ...checks.map(({ name, status, sentence }) => ({
      name,
      ...(status === 'differs' ? { failure: sentence } : status === 'not judged' ? { skipped: sentence } : {}),
    })),
  ];
}

/** What a judgement is counted as: every observer, and the whole. */
export function judgementCases(result: Judgement): TestCase[] {
  const { observers, tolerance, sentence, details } = result;
  return [
    ...observers.flatMap(({ name, E }) => (E ? [within(`observer ${name}`, E.relativeL2, tolerance)] : [])),
    {
      name: 'within the tolerance',
      ...(tracesWithinTolerance(result) ? {} : { failure: [sentence, ...details].join(' ') }),
    },
  ];
}

/** A figure that was held against an earlier one, in words: by how much it grew. */
export function heldText({ figure, before, now }: Held): string {
  if (now === null) return `${figure} was ${formatPercent(before, 3)} and has no value now`;
  const growth = before > 0 ? `, ${formatPercent(now / before - 1, 2)} more` : '';
  return `${figure} was ${formatPercent(before, 3)} and is ${formatPercent(now, 3)}${growth}`;
}

/** Every figure that was held against a baseline. */
export const baselineCases = (held: readonly Held[]): TestCase[] =>
  held.map((one) => ({
    name: `${one.figure}, against the baseline`,
    ...(one.grew ? { failure: heldText(one) } : {}),
  }));
