import type { ErrorBin } from '../compare/bins.ts';
import { PARTS } from '../compare/budget.ts';
import { FIELD_UNIT, FIELDS, type Field } from '../compare/fields.ts';
import type { ObserverResult, Result } from '../compare/result.ts';
import type { Spectra } from '../compare/spectrum.ts';
import { decibels } from '../elementary/elementary.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';
import type { ObserverTrace } from '../files/traces.ts';
import type { ObserverSpectra } from './report.ts';
import type { Chart, Mark, Series } from './svg.ts';

type Point = readonly [number, number];

/** Spectra below this much of their peak are not shown, dB. */
const SPECTRUM_DEPTH = -100;

/** A little room around the data of a linear axis, 0 included. */
function domainOf(values: readonly Float64Array[]): [number, number] {
  let low = 0;
  let high = 0;
  for (const signal of values)
    for (const v of signal) {
      low = Math.min(low, v);
      high = Math.max(high, v);
    }
  const room = 0.06 * (high - low) || 1;
  return [low < 0 ? low - room : 0, high + room];
}

const pointsOf = (x: Float64Array, y: Float64Array): Point[] => Array.from(x, (v, n) => [v, y[n]!] as const);

function timeChart(
  trace: ObserverTrace,
  title: string,
  description: string,
  signals: readonly (Omit<Series, 'points'> & { readonly values: Float64Array })[],
): Chart {
  const unit = FIELD_UNIT[trace.component[0] as Field];
  return {
    title,
    description,
    x: { label: 'time', unit: 's', scale: 'linear', domain: [0, trace.time[trace.time.length - 1]!] },
    y: { label: trace.component, unit, scale: 'linear', domain: domainOf(signals.map(({ values }) => values)) },
    series: signals.map(({ values, ...series }) => ({ ...series, points: pointsOf(trace.time, values) })),
  };
}

/** What both solvers saw of one component at an observer. */
export function traceChart(trace: ObserverTrace): Chart {
  const { grid, exact } = trace.signals;
  return timeChart(
    trace,
    `${trace.component}, observer ${trace.observer}`,
    'Field against time: exact solid, grid solver dashed.',
    [
      ...(exact ? [{ name: 'exact', colour: 'exact' as const, values: exact }] : []),
      ...(grid ? [{ name: 'grid solver', colour: 'grid' as const, dashed: true, values: grid }] : []),
    ],
  );
}

/** The difference and the parts it is the sum of. */
export function partsChart(trace: ObserverTrace): Chart | null {
  const { grid, exact } = trace.signals;
  if (!grid || !exact) return null;
  const parts = PARTS.flatMap((part) => {
    const values = trace.signals[part];
    return values ? [{ name: part, colour: part, values }] : [];
  });
  const total = {
    name: 'grid − exact',
    colour: 'muted' as const,
    thin: true,
    values: grid.map((g, n) => g - exact[n]!),
  };
  return timeChart(
    trace,
    `${trace.component}, observer ${trace.observer}: difference and parts`,
    'The difference against time, and the parts that add up to it.',
    [total, ...parts],
  );
}

/** Spectra of both solvers and of their difference, in decibels of the exact peak, with the trusted band shaded. */
export function spectrumChart(observer: ObserverResult, field: Field, spectra: Spectra): Chart | null {
  const errors = observer[field];
  const peak = spectra.exact.reduce((a, b) => Math.max(a, b), 0);
  if (!errors || peak === 0) return null;
  const level = (values: Float64Array): Point[] =>
    Array.from(values, (v, k) => [spectra.frequency[k]!, Math.max(decibels(v / peak), SPECTRUM_DEPTH)] as const);
  // Up to where the exact field last stands above the chart's lower half.
  const exact = level(spectra.exact);
  const highest = exact.findLast(([, dB]) => dB > SPECTRUM_DEPTH / 2) ?? exact[exact.length - 1]!;
  const { limit, lowEnd } = errors.band;
  const marks: Mark[] =
    limit.status === 'limit' || limit.status === 'noEnergyAbove'
      ? [{ axis: 'x', at: limit.frequency, label: formatQuantity(limit.frequency, 'Hz', 2) }]
      : [];
  return {
    title: `${field} by frequency, observer ${observer.name}`,
    description: 'Spectra in decibels of the exact peak; shaded is the band within the tolerance.',
    x: { label: 'frequency', unit: 'Hz', scale: 'linear', domain: [0, highest[0] * 1.3] },
    y: { label: 'dB of exact peak', unit: '', scale: 'linear', domain: [SPECTRUM_DEPTH, 5] },
    series: [
      { name: 'exact', colour: 'exact', points: exact },
      { name: 'grid solver', colour: 'grid', dashed: true, points: level(spectra.grid) },
      { name: '|grid − exact|', colour: 'muted', thin: true, points: level(spectra.difference) },
    ],
    marks,
    ...(marks.length > 0 ? { shaded: [lowEnd, marks[0]!.at] as const } : {}),
  };
}

/** Points and lines of 95th percentiles in bins, against a logarithmic distance; red where outside the tolerance. */
function percentileChart(
  bins: Readonly<Record<Field, readonly ErrorBin[]>>,
  tolerance: number,
  words: Pick<Chart, 'title' | 'description'> & { readonly distance: string },
  extras: Pick<Chart, 'marks' | 'shaded'>,
): Chart | null {
  const all = [...bins.E, ...bins.H];
  if (all.length === 0) return null;
  const errors = [...all.map(({ percentile95 }) => percentile95), tolerance].filter((e) => e > 0);
  const series = (field: Field): Series => ({
    name: field,
    colour: field === 'E' ? 'ink' : 'muted',
    dashed: field === 'H',
    points: bins[field].map(({ centre, percentile95 }) => [centre, percentile95] as const),
    dots: ([, error]) => (error > tolerance ? 'outside' : 'within'),
  });
  const marks = extras.marks ?? [];
  const places = [...all.flatMap(({ from, to }) => [from, to]), ...marks.map(({ at }) => at)];
  return {
    title: words.title,
    description: words.description,
    x: {
      label: words.distance,
      unit: 'm',
      scale: 'log',
      domain: [Math.min(...places), Math.max(...places) * 1.05],
      format: (value) => formatQuantity(value, 'm'),
    },
    y: {
      label: '95th percentile',
      unit: '',
      scale: 'log',
      domain: [Math.min(...errors) / 1.5, Math.max(...errors) * 1.5],
      format: (value) => formatPercent(value),
    },
    series: [series('E'), series('H')],
    ...extras,
    marks: [{ axis: 'y', at: tolerance, label: `tolerance ${formatPercent(tolerance, 3)}` }, ...marks],
  };
}

const distanceMark = (at: number, word: string): Mark => ({
  axis: 'x',
  at,
  label: `${word} ${formatQuantity(at, 'm', 2)}`,
});

/** The point error without walls against distance to the source, and what it trusts. */
export function distanceChart({ verdict, tolerance }: Result): Chart | null {
  const { closest, farthest } = verdict;
  const trusted = 'distance' in closest && 'distance' in farthest && closest.distance < farthest.distance;
  return percentileChart(
    { E: closest.E.bins, H: closest.H.bins },
    tolerance,
    {
      title: 'Error by distance to the source',
      description: '95th percentile of the point error, no walls, in bins of distance; shaded is what is trusted.',
      distance: 'distance from the nearest source',
    },
    trusted
      ? {
          marks: [distanceMark(closest.distance, 'closest'), distanceMark(farthest.distance, 'farthest')],
          shaded: [closest.distance, farthest.distance],
        }
      : {},
  );
}

/** The total point error against distance to the walls. */
export function wallChart({ verdict, tolerance }: Result): Chart | null {
  const { wallClearance } = verdict;
  return percentileChart(
    { E: wallClearance.E.bins, H: wallClearance.H.bins },
    tolerance,
    {
      title: 'Error by distance to the walls',
      description: '95th percentile of the total point error in bins of distance to the nearest wall.',
      distance: 'distance from the nearest wall',
    },
    wallClearance.status === 'crossing' ? { marks: [distanceMark(wallClearance.distance, 'clearance')] } : {},
  );
}

/** An observer's strongest component of a field, among its traces. */
export function strongestTrace(
  observer: ObserverResult,
  field: Field,
  traces: readonly ObserverTrace[],
): ObserverTrace | undefined {
  const own = traces.filter(({ observer: name, component }) => name === observer.name && component.startsWith(field));
  const strength = ({ signals }: ObserverTrace) => signals.exact?.reduce((sum, v) => sum + v * v, 0) ?? 0;
  return own.reduce<ObserverTrace | undefined>((a, b) => (a && strength(a) >= strength(b) ? a : b), undefined);
}

/** A chart with the name that its file has. */
export interface NamedChart {
  readonly file: string;
  readonly chart: Chart;
}

const named = (file: string, chart: Chart | null): NamedChart[] => (chart ? [{ file, chart }] : []);

/** The charts of the box: how near to the source, how near to the walls. */
export const boxCharts = (result: Result): NamedChart[] => [
  ...named('error-by-distance', distanceChart(result)),
  ...named('error-by-wall', wallChart(result)),
];

/** The charts of an observer: for each field its trace and what the difference is made of; then the two spectra. */
export function observerCharts(
  observer: ObserverResult,
  traces: readonly ObserverTrace[],
  spectra: readonly ObserverSpectra[],
): NamedChart[] {
  return [
    ...FIELDS.flatMap((field) => {
      const trace = strongestTrace(observer, field, traces);
      return trace
        ? [...named(`${field}-trace`, traceChart(trace)), ...named(`${field}-parts`, partsChart(trace))]
        : [];
    }),
    ...spectra
      .filter(({ observer: name }) => name === observer.name)
      .flatMap(({ field, spectra: own }) => named(`${field}-spectrum`, spectrumChart(observer, field, own))),
  ];
}
