import { FIELD_UNIT, FIELDS, type Field } from '../compare/fields.ts';
import {
  type JudgedObserver,
  type Judgement,
  judgeSchema,
  type TriedCause,
  tracesWithinTolerance,
} from '../compare/judgeResult.ts';
import { formatNumber, formatPercent, formatQuantity } from '../elementary/quantity.ts';
import { type ObserverTrace, writeTraces } from '../files/traces.ts';
import { jsonText, printable } from '../scenario/text.ts';
import type { Component } from '../trace/trace.ts';
import { spectrumChart, traceChart } from './charts.ts';
import { JUDGE_DEFINITIONS } from './definitions.ts';
import { type Markup, markup } from './markup.ts';
import { page } from './page.ts';
import type { ObserverSpectra } from './report.ts';
import { type Chart, chartSvg, type Series } from './svg.ts';
import { bandText, columns, percentOr, quantityOr, sectionsText, signedPercentOr } from './words.ts';

/** A judgement with the signals behind it. */
export interface JudgeFindings {
  readonly result: Judgement;
  readonly traces: readonly SignalsOfTrace[];
  readonly spectra: readonly ObserverSpectra[];
}

/** A trace, the exact field at its places and instants, and what a sound grid would add to that. */
export interface SignalsOfTrace {
  readonly observer: string;
  readonly component: Component;
  readonly at: readonly [number, number, number];
  readonly time: Float64Array;
  readonly given: Float64Array;
  readonly exact: Float64Array;
  readonly sound: Float64Array | null;
}

/** The files of a judgement's folder. */
export const JUDGE_FILES = ['result.json', 'traces.csv', 'report.html'] as const;
export type JudgeFile = (typeof JUDGE_FILES)[number];

/** The text of one file of the folder. @param command what to type to get it again */
export function judgeFile(file: JudgeFile, findings: JudgeFindings, command: string): string {
  if (file === 'result.json') return judgeJson(findings.result);
  if (file === 'traces.csv') return writeTraces(findings.traces.map(asObserverTrace));
  return judgeHtml(findings, command);
}

/**
 * The text of `result.json`. What is written is what the published schema describes.
 * @throws Error where the result holds something that the schema does not allow, NaN among it
 */
export function judgeJson(result: Judgement): string {
  return jsonText(judgeSchema.parse(result));
}

const asObserverTrace = ({ observer, component, at, time, given, exact }: SignalsOfTrace): ObserverTrace => ({
  observer,
  component,
  at,
  time,
  signals: { grid: given, exact },
});

const HEAD = [
  '',
  'error',
  'sound grid',
  'ratio',
  'fitted: offset',
  'scale',
  'error left',
  'peak',
  'rise time',
  'band',
  'GDM',
];

/** One line a field of an observer: raw figures, what a sound grid makes, what a fit leaves. */
function rowsOf({ observers }: Judgement): {
  readonly name: string;
  readonly field: Field;
  readonly error: number | null;
  readonly cells: string[];
}[] {
  return observers.flatMap((observer) =>
    FIELDS.flatMap((field) => {
      const found = observer[field];
      const judged = observer.judged[field];
      if (!found || !judged) return [];
      const { fitted, sound, featureSelective } = judged;
      return [
        {
          name: observer.name,
          field,
          error: found.relativeL2,
          cells: [
            percentOr(found.relativeL2),
            percentOr(sound.relativeL2),
            sound.ratio === null ? '—' : formatNumber(sound.ratio, 2),
            quantityOr(fitted?.timeOffset ?? null, 's'),
            fitted ? formatNumber(fitted.scale, 4) : '—',
            percentOr(fitted?.relativeL2 ?? null),
            signedPercentOr(found.peakError),
            signedPercentOr(found.riseTimeError),
            bandText(found),
            featureSelective ? `${formatNumber(featureSelective.GDM.total, 2)} ${featureSelective.GDM.grade}` : '—',
          ],
        },
      ];
    }),
  );
}

/** A cause that explains less of what is wrong is not worth reading. */
const WORTH = 0.005;

/** The likeliest cause, then those that explain most, as many as are worth reading; none where nothing is to be explained. */
function shownCauses({ causes }: Judgement): TriedCause[] {
  const [best, ...others] = causes.tried;
  if (causes.status === 'sound' || !best) return [];
  const telling = others.filter(({ explained }) => explained >= WORTH).sort((a, b) => b.explained - a.explained);
  return [best, ...telling].slice(0, 6);
}

export interface JudgeTextOptions {
  readonly colour?: boolean;
  readonly written?: readonly string[];
}

/** What `judge` prints. Whatever names and files hold, only this function's own escapes reach the terminal. */
export function judgeText(result: Judgement, { colour = false, written = [] }: JudgeTextOptions = {}): string {
  const strong = (text: string): string => (colour ? `\u001b[1m${text}\u001b[0m` : text);
  const red = (text: string): string => (colour ? `\u001b[38;5;160m${text}\u001b[0m` : text);
  const rows = rowsOf(result);
  const lines = columns(
    [HEAD, ...rows.map(({ name, field, cells }) => [`${printable(name)}, ${field}`, ...cells.map(printable)])],
    ['left', ...HEAD.slice(2).map(() => 'right' as const), 'left'],
  );
  const tried = shownCauses(result);
  const sections = [
    [
      ...(result.title === '' ? [] : [printable(result.title)]),
      strong(printable(result.sentence)),
      ...(tracesWithinTolerance(result)
        ? []
        : [red(`Outside the tolerance of ${formatPercent(result.tolerance, 3)}.`)]),
      ...result.details.map(printable),
    ],
    ['Relative L2 of each field, and what is left of it with an offset and a scale fitted', ...lines],
    tried.length === 0
      ? []
      : [
          'Causes by how much of what is wrong they explain',
          ...columns(
            tried.map(({ explained, words }) => [shareText(explained), printable(words)]),
            ['right', 'left'],
          ),
        ],
    result.notes.map((note) => `Note: ${printable(note)}`),
    written.length === 0 ? [] : [`Written: ${written.map(printable).join(', ')}`],
  ];
  return sectionsText(sections);
}

const shareText = (explained: number): string => (explained <= 0 ? 'none' : formatPercent(explained, 3));

/** The difference against time, and what a sound grid would make of it. */
export function differenceChart({ observer, component, time, given, exact, sound }: SignalsOfTrace): Chart {
  const difference = given.map((v, n) => v - exact[n]!);
  const points = (values: Float64Array) => Array.from(time, (t, n) => [t, values[n]!] as const);
  const lists = sound ? [difference, sound] : [difference];
  const most = Math.max(...lists.map((list) => list.reduce((m, v) => Math.max(m, Math.abs(v)), 0))) || 1;
  const series: Series[] = [
    { name: 'trace − exact', colour: 'grid', points: points(difference) },
    ...(sound ? [{ name: 'a sound Yee grid', colour: 'lattice' as const, dashed: true, points: points(sound) }] : []),
  ];
  return {
    title: `${component}, observer ${observer}: difference`,
    description:
      'The difference of trace and exact field against time, and what a sound Yee grid is predicted to show.',
    x: { label: 'time', unit: 's', scale: 'linear', domain: [Math.min(0, time[0]!), time.at(-1)!] },
    y: {
      label: component,
      unit: FIELD_UNIT[component[0] as Field],
      scale: 'linear',
      domain: [-1.06 * most, 1.06 * most],
    },
    series,
  };
}

/** The charts of one observer: each field's strongest component, its difference, its spectra. */
export function judgeCharts(
  observer: JudgedObserver,
  { traces, spectra }: Pick<JudgeFindings, 'traces' | 'spectra'>,
): Chart[] {
  return FIELDS.flatMap((field) => {
    const component = observer[field]?.component;
    const trace = traces.find((t) => t.observer === observer.name && t.component === component);
    const own = spectra.find((s) => s.observer === observer.name && s.field === field);
    const spectrum = own ? spectrumChart(observer as never, field, own.spectra) : null;
    if (!trace) return [];
    const chart = traceChart(asObserverTrace(trace));
    const named = chart.series.map((series) => (series.name === 'grid solver' ? { ...series, name: 'trace' } : series));
    return [{ ...chart, series: named }, differenceChart(trace), ...(spectrum ? [spectrum] : [])];
  });
}

/** `report.html`. */
export function judgeHtml({ result, traces, spectra }: JudgeFindings, command: string): string {
  const title = result.title === '' ? 'Untitled scenario' : result.title;
  return page(
    title,
    markup`<p class="muted">Fieldassay ${result.version} · <bdi>${title}</bdi> ·${result.traces.file ? markup` traces of <bdi>${result.traces.file}</bdi>` : ' traces'}</p>
<h1>${result.sentence}</h1>
${tracesWithinTolerance(result) ? null : markup`<p class="outside">Outside the tolerance of ${formatPercent(result.tolerance, 3)}.</p>`}
${result.details.map((detail) => markup`<p>${detail}</p>`)}
${figuresSection(result)}
${causesSection(result)}
${result.observers.map((observer) => {
  const charts = judgeCharts(observer, { traces, spectra });
  return charts.length === 0
    ? null
    : markup`<h3>Observer <bdi>${observer.name}</bdi></h3><div class="charts">${charts.map((chart) => markup`<figure>${chartSvg(chart)}</figure>`)}</div>`;
})}
${featuresSection(result)}
${placesSection(result)}
${result.notes.map((note) => markup`<p>Note: ${note}</p>`)}
${JUDGE_DEFINITIONS}
<h2>To repeat it</h2>
<p>Save the scenario below and run</p>
<pre>${command}</pre>
<pre>${JSON.stringify(result.scenario, null, 2)}</pre>`,
  );
}

function figuresSection(result: Judgement): Markup {
  const rows = rowsOf(result);
  return markup`<h2>Against the exact field</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">observer, field</th>${HEAD.slice(1).map((c) => markup`<th scope="col" class="number">${c}</th>`)}</tr></thead>
<tbody>${rows.map(
    ({ name, field, error, cells }) =>
      markup`<tr><th scope="row"><bdi>${name}</bdi>, ${field}</th>${cells.map(
        (cell, n) =>
          markup`<td class="number${n === 0 && error !== null && error > result.tolerance ? ' outside' : ''}">${cell}</td>`,
      )}</tr>`,
  )}</tbody></table></div>
<p class="muted">Raw figures first; then those with an offset and a scale fitted to each field. A fitted offset absorbs dispersion, a fitted scale a wrong source: what is left then does not show that the solver is right.</p>`;
}

function causesSection(result: Judgement): Markup | null {
  const tried = shownCauses(result);
  if (tried.length === 0) return null;
  return markup`<h2>Likely causes, each tried by refitting</h2>
<div class="scroll"><table>
<thead><tr><th scope="col" class="number">explains</th><th scope="col">if</th><th scope="col">then</th></tr></thead>
<tbody>${tried.map(
    ({ explained, words, remedy }) =>
      markup`<tr><td class="number">${shareText(explained)}</td><td class="wrap">${words}</td><td class="wrap muted">${remedy}</td></tr>`,
  )}</tbody></table></div>`;
}

function featuresSection({ observers }: Judgement): Markup | null {
  const rows = observers.flatMap((observer) =>
    FIELDS.flatMap((field) => {
      const found = observer.judged[field]?.featureSelective;
      return found ? [{ name: observer.name, found }] : [];
    }),
  );
  if (rows.length === 0) return null;
  const grades = ['excellent', 'very good', 'good', 'fair', 'poor', 'very poor'];
  return markup`<h2>Feature selective validation (IEEE Std 1597.1)</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">observer, component</th><th scope="col">measure</th><th scope="col" class="number">total</th><th scope="col">grade</th>${grades.map((g) => markup`<th scope="col" class="number">${g}</th>`)}<th scope="col" class="number">GRADE</th><th scope="col" class="number">SPREAD</th></tr></thead>
<tbody>${rows.flatMap(({ name, found }) =>
    (['ADM', 'FDM', 'GDM'] as const).map(
      (key) =>
        markup`<tr><th scope="row"><bdi>${name}</bdi>, ${found.component}</th><td>${key}</td><td class="number">${formatNumber(found[key].total, 3)}</td><td>${found[key].grade}</td>${found[
          key
        ].histogram.map(
          (share) => markup`<td class="number">${formatPercent(share)}</td>`,
        )}<td class="number">${found[key].gradeCount}</td><td class="number">${found[key].spread}</td></tr>`,
    ),
  )}</tbody></table></div>`;
}

function placesSection({ observers }: Judgement): Markup {
  const place = (at: readonly number[]) => at.map((x) => formatQuantity(x, 'm', 6)).join(', ');
  return markup`<h2>Where the traces were taken</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">observer</th><th scope="col" class="number">from source</th><th scope="col">components, each at its place</th></tr></thead>
<tbody>${observers.map(
    ({ name, distance, sites }) =>
      markup`<tr><th scope="row"><bdi>${name}</bdi></th><td class="number">${formatQuantity(distance, 'm')}</td><td class="muted">${Object.entries(
        sites ?? {},
      )
        .map(([component, at]) => `${component} (${place(at!)})`)
        .join('; ')}</td></tr>`,
  )}</tbody></table></div>`;
}

/** The table of figures as cells, its head first. */
export const judgeFigures = (result: Judgement): string[][] => [
  ['observer, field', ...HEAD.slice(1)],
  ...rowsOf(result).map(({ name, field, cells }) => [`${name}, ${field}`, ...cells]),
];

/** The causes that were tried as cells: what each explains, what it is, what to do; none where nothing is to be explained. */
export function judgeCauses(result: Judgement): string[][] {
  const rows = shownCauses(result).map(({ explained, words, remedy }) => [shareText(explained), words, remedy]);
  return rows.length === 0 ? [] : [['explains', 'if', 'then'], ...rows];
}
