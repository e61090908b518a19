import { scaleLinear, scaleLog } from 'd3-scale';
import { line } from 'd3-shape';
import { formatNumber, prefixOf } from '../elementary/quantity.ts';
import { type Markup, markup } from './markup.ts';
import { type ColourName, paletteCss } from './palette.ts';

/**
 * Charts as SVG text, for reports: no DOM, no script, colours by CSS variables of `palette.ts` so that one drawing serves
 * both themes. Coordinates are pixels of the view box.
 */
export interface Axis {
  readonly label: string;
  /** SI unit; linear axes get a prefix that suits them. Empty: none */
  readonly unit: string;
  readonly scale: 'linear' | 'log';
  readonly domain: readonly [number, number];
  /** where ticks stand; absent: at round values */
  readonly ticks?: readonly number[];
  /** how a tick is written; absent: its number in the axis's unit */
  readonly format?: (value: number) => string;
}

export interface Series {
  readonly name: string;
  readonly colour: ColourName;
  readonly points: readonly (readonly [number, number])[];
  readonly dashed?: boolean;
  readonly thin?: boolean;
  /** dots alone, no line between them */
  readonly scatter?: boolean;
  /** draws a dot at each point, in red where this holds */
  readonly dots?: (point: readonly [number, number]) => 'within' | 'outside';
  /** what each point stands for: a page that draws the chart finds it in its dot's `data-key` */
  readonly keys?: readonly string[];
}

/** A line across the plot at a value of x or y. */
export interface Mark {
  readonly axis: 'x' | 'y';
  readonly at: number;
  readonly label: string;
}

export interface Chart {
  readonly title: string;
  /** what is seen, for those who do not see it */
  readonly description: string;
  readonly x: Axis;
  readonly y: Axis;
  readonly series: readonly Series[];
  readonly marks?: readonly Mark[];
  /** a range of x to shade: what is trusted */
  readonly shaded?: readonly [number, number];
}

/** Width and height of a chart, pixels of the view box. */
export interface ChartSize {
  readonly width: number;
  readonly height: number;
}

const REPORT_SIZE: ChartSize = { width: 560, height: 280 };

/** Where the plot lies in the chart, and what value lies where in it, pixels of the view box. */
export interface ChartLayout extends ChartSize {
  readonly left: number;
  readonly right: number;
  readonly top: number;
  readonly bottom: number;
  readonly x: Position;
  readonly y: Position;
}

export type Position = (value: number) => number;

/** The layout of a chart drawn at a size. */
export function chartLayout(chart: Chart, { width, height }: ChartSize = REPORT_SIZE): ChartLayout {
  const [left, right, bottom] = [62, width - 14, height - 42];
  const top = 54 + LEGEND_LINE * Math.max(0, ...legendPlaces(chart.series, width).map(({ line }) => line));
  return {
    width,
    height,
    left,
    right,
    top,
    bottom,
    x: positionOf(chart.x, left, right),
    y: positionOf(chart.y, bottom, top),
  };
}

/** The chart as one SVG element. */
export function chartSvg(chart: Chart, size: ChartSize = REPORT_SIZE): Markup {
  const at = chartLayout(chart, size);
  return markup`<svg class="chart" xmlns="http://www.w3.org/2000/svg" viewBox="0 0 ${at.width} ${at.height}" role="img">
<title>${chart.title}</title><desc>${chart.description}</desc>
<text class="title" x="${LEGEND_LEFT}" y="16">${chart.title}</text>
${legend(chart.series, at)}
${shade(chart.shaded, at)}
${xAxis(chart.x, at)}${yAxis(chart.y, at)}
${chart.series.map((series) => path(series, chart, at))}
${markLines(chart, at)}
</svg>`;
}

/** The chart as a file of its own, with the style it needs. */
export function chartFile(chart: Chart, size?: ChartSize): string {
  const { text } = chartSvg(chart, size);
  return `${text.replace('>', `><style>${paletteCss()}${CHART_CSS}svg{background:var(--background)}</style>`)}\n`;
}

/** CSS of charts, to stand once beside them. */
export const CHART_CSS = `.chart{display:block;width:100%;height:auto;font:12px system-ui,sans-serif;font-variant-numeric:tabular-nums}
.chart text{fill:var(--muted)}.chart .title{fill:var(--ink);font-weight:600}
.chart .rule{stroke:var(--line);stroke-width:1}.chart .zero{stroke:var(--muted)}
.chart .series{fill:none;stroke-width:1.8;stroke-linejoin:round}.chart .thin{stroke-width:1}.chart .dashed{stroke-dasharray:6 4}
.chart .mark{stroke:var(--ink);stroke-width:1;stroke-dasharray:2 3}.chart .mark-label{fill:var(--ink);paint-order:stroke;stroke:var(--background);stroke-width:3px}
.chart .shaded{fill:var(--trusted)}
.chart .dot{stroke:var(--background);stroke-width:1}`;

const round = (pixels: number): number => Math.round(pixels * 10) / 10;

function positionOf(axis: Axis, start: number, end: number): Position {
  const scale = axis.scale === 'log' ? scaleLog() : scaleLinear();
  const position = scale
    .domain(axis.domain)
    .range([start, end])
    .clamp(axis.scale === 'log');
  return (value) => round(position(value));
}

/** 1, 2 and 5 times powers of ten in a short range, powers of ten in a long one. */
function logTicks([from, to]: readonly [number, number]): number[] {
  const ticks = scaleLog().domain([from, to]).ticks(40);
  const leading = (value: number) => Number(value.toExponential().split('e')[0]);
  const round = ticks.filter((t) => leading(t) === 1);
  return round.length > 2 ? round : ticks.filter((t) => [1, 2, 5].includes(leading(t)));
}

interface Tick {
  readonly value: number;
  readonly text: string;
}

function ticksOf(axis: Axis, count: number): { readonly ticks: readonly Tick[]; readonly unit: string } {
  const largest = Math.max(Math.abs(axis.domain[0]), Math.abs(axis.domain[1]));
  const { factor, prefix } = axis.unit === '' ? { factor: 1, prefix: '' } : prefixOf(largest);
  const format = axis.format ?? ((value: number) => formatNumber(value / factor, 4));
  const values =
    axis.ticks ?? (axis.scale === 'log' ? logTicks(axis.domain) : scaleLinear().domain(axis.domain).ticks(count));
  return {
    ticks: values.map((value) => ({ value, text: format(value) })),
    unit: axis.format ? '' : prefix + axis.unit,
  };
}

const withUnit = (label: string, unit: string): string => (unit === '' ? label : `${label} (${unit})`);

function xAxis(axis: Axis, { x, left, right, bottom, width, height }: ChartLayout): Markup {
  const { ticks, unit } = ticksOf(axis, Math.round(width / 80));
  return markup`${apart(ticks, x).map(
    ({ value, text }) =>
      markup`<line class="rule" x1="${x(value)}" x2="${x(value)}" y1="${bottom}" y2="${bottom + 4}"/><text x="${x(value)}" y="${bottom + 17}" text-anchor="middle">${text}</text>`,
  )}<line class="rule" x1="${left}" x2="${right}" y1="${bottom}" y2="${bottom}"/><text x="${(left + right) / 2}" y="${height - 8}" text-anchor="middle">${withUnit(axis.label, unit)}</text>`;
}

/** The ticks whose texts do not run into one before them. */
function apart(ticks: readonly Tick[], x: Position): Tick[] {
  let end = Number.NEGATIVE_INFINITY;
  const inOrder = ticks.toSorted((a, b) => x(a.value) - x(b.value));
  return inOrder.filter(({ value, text }) => {
    const half = widthOf(text) / 2;
    if (x(value) - half < end) return false;
    end = x(value) + half + 6;
    return true;
  });
}

function yAxis(axis: Axis, { y, left, right, top, bottom }: ChartLayout): Markup {
  const { ticks, unit } = ticksOf(axis, 5);
  const middle = (top + bottom) / 2;
  return markup`${ticks.map(
    ({ value, text }) =>
      markup`<line class="${value === 0 && axis.domain[0] < 0 ? 'rule zero' : 'rule'}" x1="${left}" x2="${right}" y1="${y(value)}" y2="${y(value)}"/><text x="${left - 6}" y="${y(value) + 4}" text-anchor="end">${text}</text>`,
  )}<text transform="translate(14 ${middle}) rotate(-90)" text-anchor="middle">${withUnit(axis.label, unit)}</text>`;
}

/** Where titles and legends begin, and the height of a line of a legend. */
const LEGEND_LEFT = 14;
const LEGEND_LINE = 16;

/** About so many pixels is a text wide. */
function widthOf(text: string): number {
  let width = 0;
  for (const character of text) width += /[mwMW%−µΩ]/.test(character) ? 11 : /[ijlft.,:;|()’ ]/.test(character) ? 4 : 7;
  return width;
}

/** Names beside a stroke of their line, in rows under the title. */
function legendPlaces(series: readonly Series[], width: number): { readonly x: number; readonly line: number }[] {
  let left = LEGEND_LEFT;
  let line = 0;
  return series.map(({ name }) => {
    const length = 26 + widthOf(name);
    if (left > LEGEND_LEFT && left + length > width) {
      left = LEGEND_LEFT;
      line++;
    }
    const x = round(left);
    left += length + 12;
    return { x, line };
  });
}

function legend(series: readonly Series[], { width }: ChartLayout): Markup {
  const places = legendPlaces(series, width);
  const entries = series.map(({ name, colour, dashed, thin }, n) => {
    const { x, line } = places[n]!;
    const y = 34 + LEGEND_LINE * line;
    return markup`<line class="series${dashed ? ' dashed' : ''}${thin ? ' thin' : ''}" stroke="var(--${colour})" x1="${x}" x2="${x + 20}" y1="${y}" y2="${y}"/><text x="${round(x + 26)}" y="${y + 4}">${name}</text>`;
  });
  return markup`<g>${entries}</g>`;
}

function shade(range: Chart['shaded'], { x, left, right, top, bottom }: ChartLayout): Markup | null {
  if (!range) return null;
  const [from, to] = range.map((value) => Math.min(right, Math.max(left, x(value)))) as [number, number];
  return markup`<rect class="shaded" x="${from}" y="${top}" width="${round(Math.max(0, to - from))}" height="${bottom - top}"/>`;
}

function path(series: Series, chart: Chart, { x, y, left, right, top, bottom, width }: ChartLayout): Markup {
  const clampY = (value: number) => Math.min(bottom, Math.max(top, y(value)));
  const pixels = thinned(series.points, width).map((p) => [x(p[0]), clampY(p[1])] as [number, number]);
  const d = line()(pixels.filter(([px]) => px >= left - 0.05 && px <= right + 0.05)) ?? '';
  const dots = series.dots
    ? series.points.map(
        (p, n) =>
          markup`<circle class="dot"${keyOf(series, n)} r="3.5" cx="${x(p[0])}" cy="${clampY(p[1])}" fill="var(--${series.dots!(p) === 'outside' ? 'outside' : series.colour})"><title>${readout(p, chart)}</title></circle>`,
      )
    : [];
  if (series.scatter) return markup`${dots}`;
  return markup`<path class="series${series.dashed ? ' dashed' : ''}${series.thin ? ' thin' : ''}" stroke="var(--${series.colour})" d="${d}"/>${dots}`;
}

const keyOf = ({ keys }: Series, n: number): Markup | null =>
  keys?.[n] === undefined ? null : markup` data-key="${keys[n]}"`;

/** A point's figures in full, for hovering. */
const readout = (point: readonly [number, number], { x, y }: Chart): string =>
  `${x.label} ${point[0]}${x.unit && ` ${x.unit}`}, ${y.label} ${point[1]}${y.unit && ` ${y.unit}`}`;

/** Points beyond three a pixel column: of each run, its first, lowest, highest and last. */
function thinned(
  points: readonly (readonly [number, number])[],
  width: number,
): readonly (readonly [number, number])[] {
  const run = Math.ceil(points.length / width);
  if (run <= 3) return points;
  const kept: (readonly [number, number])[] = [];
  for (let start = 0; start < points.length; start += run) {
    const end = Math.min(points.length, start + run);
    let low = start;
    let high = start;
    for (let i = start; i < end; i++) {
      if (points[i]![1] < points[low]![1]) low = i;
      if (points[i]![1] > points[high]![1]) high = i;
    }
    for (const i of [...new Set([start, low, high, end - 1])].sort((a, b) => a - b)) kept.push(points[i]!);
  }
  return kept;
}

/** Marks across the plot; their labels stand where they lie on no line and on no other label, if there is such a place. */
function markLines({ marks = [], series }: Chart, layout: ChartLayout): Markup {
  const { x, y, left, right, top, bottom } = layout;
  const lines = series.map(({ points }) => thinned(points, layout.width).map((p) => [x(p[0]), y(p[1])] as const));
  const taken: Place[] = [];
  const drawn = marks.map(({ axis, at, label }) => {
    const p = (axis === 'x' ? x : y)(at);
    if (axis === 'x' && (p < left || p > right)) return markup``;
    const places = (axis === 'x' ? besideUpright : besideLevel)(p, label, layout);
    const cost = (place: Place) =>
      lines.filter((line) => runsThrough(line, place)).length +
      2 * taken.filter((other) => overlap(other, place)).length;
    const best = places.reduce((a, b) => (cost(b) < cost(a) ? b : a));
    taken.push(best);
    const line =
      axis === 'x'
        ? markup`<line class="mark" x1="${p}" x2="${p}" y1="${top}" y2="${bottom}"/>`
        : markup`<line class="mark" x1="${left}" x2="${right}" y1="${p}" y2="${p}"/>`;
    const { from, to, base, anchor } = best;
    return markup`${line}<text class="mark-label" x="${round(anchor === 'end' ? to : from)}" y="${round(base)}" text-anchor="${anchor}">${label}</text>`;
  });
  return markup`${drawn}`;
}

/** Room of a label in the plot, pixels, from its left to its right end, and its base line. */
interface Place {
  readonly from: number;
  readonly to: number;
  readonly base: number;
  readonly anchor: 'start' | 'end';
}

/** Height of a label above its base line. */
const ASCENT = 11;

/** Where the label of an upright mark may stand, best first: on the side with more room, then lower and lower. */
function besideUpright(p: number, label: string, { left, right, top, bottom }: ChartLayout): Place[] {
  const length = widthOf(label);
  const before: Omit<Place, 'base'> = { from: p - 4 - length, to: p - 4, anchor: 'end' };
  const behind: Omit<Place, 'base'> = { from: p + 4, to: p + 4 + length, anchor: 'start' };
  const sides = p > (left + right) / 2 ? [before, behind] : [behind, before];
  const places: Place[] = [];
  for (let base = top + 12; base <= bottom - 4; base += 14)
    for (const side of sides) if (side.from >= left && side.to <= right + 10) places.push({ ...side, base });
  return places.length > 0 ? places : [{ ...sides[0]!, base: top + 12 }];
}

/** Where the label of a level mark may stand, best first: at its left end below it, then above, then at its right end. */
function besideLevel(p: number, label: string, { left, right }: ChartLayout): Place[] {
  const length = widthOf(label);
  const atLeft = { from: left + 4, to: left + 4 + length, anchor: 'start' } as const;
  const atRight = { from: right - 4 - length, to: right - 4, anchor: 'end' } as const;
  return [atLeft, atRight].flatMap((end) => [p + 14, p - 5].map((base) => ({ ...end, base })));
}

const overlap = (a: Place, b: Place): boolean =>
  a.from < b.to && b.from < a.to && Math.abs(a.base - b.base) < ASCENT + 2;

/** Whether a line through points of growing x runs through the room of a label. */
function runsThrough(line: readonly (readonly [number, number])[], { from, to, base }: Place): boolean {
  const [high, low] = [base - ASCENT, base + 2];
  return line.some(([x1, y1], n) => {
    const [x0, y0] = line[n - 1] ?? [x1, y1];
    if (x1 < from || x0 > to) return false;
    const at = (x: number) => (x1 === x0 ? y1 : y0 + ((y1 - y0) * (x - x0)) / (x1 - x0));
    const [a, b] = [at(Math.max(x0, from)), at(Math.min(x1, to))];
    return Math.max(a, b) > high && Math.min(a, b) < low;
  });
}
