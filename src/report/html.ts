import { type ObserverResult, type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent, formatQuantity, formatUpperBound } from '../elementary/quantity.ts';
import { textOf } from '../scenario/text.ts';
import { type BudgetRow, budgetRows } from './budgetRows.ts';
import { boxCharts, type NamedChart, observerCharts } from './charts.ts';
import { DEFINITIONS } from './definitions.ts';
import { type Markup, markup } from './markup.ts';
import { page } from './page.ts';
import { PULSE_HEAD, pulseRows, quantitySentences } from './quantities.ts';
import type { Report } from './report.ts';
import { chartSvg } from './svg.ts';
import { bandText, gridText, percentOr, quantityOr, routesText, signedPercentOr, timingRows } from './words.ts';

/** `report.html`. */
export function reportHtml({ result, traces, spectra, command }: Report): string {
  const { verdict } = result;
  const title = result.title === '' ? 'Untitled scenario' : result.title;
  const within = withinTolerance(result);
  return page(
    title,
    markup`<p class="muted">Fieldassay ${result.version} · <bdi>${title}</bdi></p>
<h1>${verdict.sentence}</h1>
${within ? null : markup`<p class="outside">Outside the tolerance of ${formatPercent(result.tolerance, 3)}.</p>`}
${verdict.remedy ? markup`<p>${verdict.remedy.sentence}</p>` : null}
${verdict.details.map((detail) => markup`<p>${detail}</p>`)}
${result.checks.map(({ status, sentence }) => markup`<p${status === 'differs' ? markup` class="outside"` : null}>${sentence}</p>`)}
${budgetSection(result)}
${section('How far, and how near', boxCharts(result))}
${observersSection(result)}
${result.observers.map((observer) => chartsSection(observer, { result, traces, spectra, command }))}
${quantitiesSection(result)}
${normsSection(result)}
${runSection(result)}
${DEFINITIONS}
${repeatSection(result, command)}`,
  );
}

const section = (title: string, charts: readonly NamedChart[]): Markup | null =>
  charts.length === 0 ? null : markup`<h2>${title}</h2>${figures(charts)}`;

const figures = (charts: readonly NamedChart[]): Markup =>
  markup`<div class="charts">${charts.map(({ chart }) => markup`<figure>${chartSvg(chart)}</figure>`)}</div>`;

function budgetSection(result: Result): Markup {
  const rows = budgetRows(result.budget);
  const over = result.observers.some(({ inside }) => inside)
    ? 'pooled over the observers'
    : 'over the box outside the mask';
  return markup`<h2>Error budget of E, ${over}</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">grid solver − exact</th><th scope="col" class="number">relative L2</th><th scope="col" class="number">share</th><th scope="col">shares, signed</th><th scope="col" class="number">floor</th></tr></thead>
<tbody>${rows.map(
    (row) => markup`<tr class="${row.name === 'total' ? 'total' : 'part'}"><th scope="row">${row.name}</th>
<td class="number">${row.error}</td><td class="number">${row.shareText}</td><td>${bar(row, rows)}</td><td class="number muted">${row.floor}</td></tr>`,
  )}</tbody></table></div>
<p class="muted">Signals add, their sizes do not: shares say how much of the total each part makes, and sum to 100 %. A negative share cancels others.</p>`;
}

/** A bar from zero to the share, all on one scale. */
function bar(row: BudgetRow, rows: readonly BudgetRow[]): Markup | null {
  if (row.name === 'total') return null;
  const shares = rows.filter(({ name }) => name !== 'total').map(({ share }) => share ?? 0);
  const low = Math.min(0, ...shares);
  const high = Math.max(0.01, ...shares);
  const pixel = (share: number) => Math.round(((share - low) / (high - low)) * 2580) / 10 + 1;
  const [from, to] = [Math.min(0, row.share ?? 0), Math.max(0, row.share ?? 0)].map(pixel) as [number, number];
  return markup`<svg class="bars" viewBox="0 0 260 16" aria-hidden="true"><rect x="${from}" y="2" width="${Math.round((to - from) * 10) / 10}" height="12" fill="var(--${row.colour})"/><line x1="${pixel(0)}" x2="${pixel(0)}" y1="0" y2="16" stroke="var(--muted)"/></svg>`;
}

function observersSection(result: Result): Markup | null {
  if (result.observers.length === 0) return null;
  const columns = ['E', 'H', 'static rest', 'peak', 'rise time', 'shift', 'amplitude', 'band', 'from source'];
  return markup`<h2>Observers</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">name</th>${columns.map((c) => markup`<th scope="col" class="number">${c}</th>`)}<th scope="col">read at</th></tr></thead>
<tbody>${result.observers.map((observer) => observerRow(observer, result.tolerance))}</tbody></table></div>
<p class="muted">E and H: relative L2 of the trace. Peak, rise time, shift, amplitude and band are of E. An observer is read at its nearest node; each component lives up to half a cell from it.</p>`;
}

function observerRow({ name, E, H, snapped, distance, extrapolated }: ObserverResult, tolerance: number): Markup {
  const place = snapped.map((x) => formatQuantity(x, 'm')).join(', ');
  const head = markup`<th scope="row"><bdi>${name}</bdi></th>`;
  if (!E || !H)
    return markup`<tr>${head}<td colspan="9">outside the box: exact field only; predicted error ${percentOr(extrapolated?.error ?? null)}</td><td class="muted">${place}</td></tr>`;
  const error = (value: number | null) =>
    markup`<td class="number${value !== null && value > tolerance ? ' outside' : ''}">${percentOr(value)}</td>`;
  const cells = [
    percentOr(E.staticResidue),
    signedPercentOr(E.peakError),
    signedPercentOr(E.riseTimeError),
    quantityOr(E.timeShift, 's'),
    E.amplitudeRatio === null ? '—' : E.amplitudeRatio.toPrecision(3),
    bandText(E),
    formatQuantity(distance, 'm'),
  ];
  const status = E.status === 'counted' ? '' : ` (${E.status})`;
  return markup`<tr>${head}${error(E.relativeL2)}${error(H.relativeL2)}${cells.map((c) => markup`<td class="number">${c}</td>`)}<td class="muted">${place}${status}</td></tr>`;
}

function chartsSection(observer: ObserverResult, { traces, spectra }: Report): Markup | null {
  const charts = observerCharts(observer, traces, spectra);
  return charts.length === 0 ? null : markup`<h3>Observer <bdi>${observer.name}</bdi></h3>${figures(charts)}`;
}

function quantitiesSection({ quantities }: Result): Markup | null {
  if (!quantities) return null;
  const rows = pulseRows(quantities);
  return markup`<h2>Quantities</h2>
${quantitySentences(quantities).map((sentence) => markup`<p>${sentence}</p>`)}
${
  rows.length === 0
    ? null
    : markup`<div class="scroll"><table>
<thead><tr>${PULSE_HEAD.map((c, n) => markup`<th scope="col"${n > 0 ? markup` class="number"` : null}>${c}</th>`)}</tr></thead>
<tbody>${rows.map(([name, ...cells]) => markup`<tr><th scope="row"><bdi>${name!}</bdi></th>${cells.map((c) => markup`<td class="number">${c}</td>`)}</tr>`)}</tbody></table></div>
<p class="muted">Peaks and 10–90 % rise times are of the exact field’s strongest component, exact and grid. Near, induction and radiation parts are summed over current elements; the largest is that of E with the largest peak.</p>`
}`;
}

function normsSection({ norms }: Result): Markup {
  const row = (field: 'E' | 'H') => {
    const { relativeL1, relativeL2, relativeLinf, standardError, scale, samples, masked, largest } = norms[field];
    const place = (at: readonly number[]) => at.map((x) => formatQuantity(x, 'm')).join(', ');
    const where = largest && `${largest.component} at ${place(largest.at)}, ${formatQuantity(largest.time, 's')}`;
    return markup`<tr><th scope="row">${field}</th><td class="number">${percentOr(relativeL1)}</td><td class="number">${percentOr(relativeL2)} ± ${percentOr(standardError)}</td><td class="number">${percentOr(relativeLinf)}</td><td class="number">${scale ? formatQuantity(scale.L2, scale.unit) : '—'}</td><td class="number">${samples}</td><td class="number">${masked}</td><td class="muted">${where ?? 'no samples: the mask covers the box'}</td></tr>`;
  };
  return markup`<h2>Over the box, outside the mask</h2>
<div class="scroll"><table>
<thead><tr><th scope="col">field</th>${['relative L1', 'relative L2', 'relative L∞', 'exact, rms', 'samples', 'points masked'].map((c) => markup`<th scope="col" class="number">${c}</th>`)}<th scope="col">largest difference</th></tr></thead>
<tbody>${row('E')}${row('H')}</tbody></table></div>`;
}

function runSection(result: Result): Markup {
  const { integral, environment, notes } = result;
  return markup`<h2>The run</h2>
<p>${gridText(result)}. The integral’s own error is ≤ ${formatUpperBound(integral.errorEstimate)}.${residualText(integral)}</p>
${integral.routes ? markup`<p>Two routes to the exact field: ${routesText(integral.routes)}.</p>` : null}
<div class="scroll"><table><tbody>${timingRows(result).map(
    ([what, time, rate]) =>
      markup`<tr><th scope="row">${what}</th><td class="number">${time}</td><td class="number muted">${rate}</td></tr>`,
  )}</tbody></table></div>
${notes.map((note) => markup`<p>Note: ${note}</p>`)}
<p class="muted">Fieldassay ${result.version}${Object.entries(environment).map(([name, value]) => markup` · ${name} ${String(value)}`)}</p>`;
}

/** What the exact field leaves of the equations that it must satisfy. */
function residualText({
  gaugeResidual,
  waveResidual,
  potentialResidual,
  continuityResidual,
}: Result['integral']): string {
  const left = [
    ['the Lorenz gauge', gaugeResidual],
    ['the wave equation', waveResidual],
    ['E and B from the potentials', potentialResidual],
    ['continuity at the grid’s nodes', continuityResidual],
  ] as const;
  const told = left.flatMap(([name, x]) => (x === null ? [] : [`${name} ${formatUpperBound(x)}`]));
  return ` Residuals: ${told.join(', ')}.`;
}

function repeatSection({ scenario }: Result, command: string): Markup {
  return markup`<h2>To repeat it</h2>
<p>Save the scenario below and run</p>
<pre>${command}</pre>
<pre class="listing">${textOf(scenario)}</pre>`;
}
