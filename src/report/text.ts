import { type Result, withinTolerance } from '../compare/result.ts';
import { formatPercent } from '../elementary/quantity.ts';
import { printable } from '../scenario/text.ts';
import { type BudgetRow, budgetRows } from './budgetRows.ts';
import type { ColourName } from './palette.ts';
import { quantitySentences } from './quantities.ts';
import {
  bandText,
  columns,
  gridText,
  percentOr,
  quantityOr,
  routesText,
  sectionsText,
  signedPercentOr,
  timingRows,
} from './words.ts';

/** Nearest entries of the 256-colour set to the palette's colours. */
const ANSI: Readonly<Partial<Record<ColourName, number>>> = {
  boundary: 214,
  lattice: 74,
  gridding: 36,
  quadrature: 175,
  outside: 160,
};

/** Characters that the longest bar of shares takes. */
const BAR_LENGTH = 24;

export interface TextOptions {
  /** colours by ANSI escapes; off where the output is no terminal or NO_COLOR is set */
  readonly colour?: boolean;
  /** files that were written, as they are to be shown */
  readonly written?: readonly string[];
}

/**
 * What `compare` prints: verdict, budget, observers, timings, and where the result lies. Whatever the scenario's names and
 * title hold, only this function's own escapes reach the terminal.
 */
export function resultText(result: Result, { colour = false, written = [] }: TextOptions = {}): string {
  const paint = (text: string, name: ColourName): string =>
    colour && ANSI[name] ? `\u001b[38;5;${ANSI[name]}m${text}\u001b[0m` : text;
  const strong = (text: string): string => (colour ? `\u001b[1m${text}\u001b[0m` : text);
  const { verdict, tolerance, checks } = result;
  const { routes } = result.integral;
  const outside = `Outside the tolerance of ${formatPercent(tolerance, 3)}.`;
  const sections = [
    [
      ...(result.title === '' ? [] : [printable(result.title)]),
      strong(printable(verdict.sentence)),
      ...(withinTolerance(result) ? [] : [paint(outside, 'outside')]),
      ...(verdict.remedy ? [printable(verdict.remedy.sentence)] : []),
      ...verdict.details.map(printable),
      ...checks.map(({ status, sentence }) => paint(printable(sentence), status === 'differs' ? 'outside' : 'ink')),
    ],
    ['Error budget of E (relative L2; share of the total, signed; floor)', ...budgetLines(result, paint)],
    result.observers.length === 0 ? [] : ['Observers', ...observerLines(result, paint)],
    result.quantities ? quantitySentences(result.quantities).map(printable) : [],
    [
      `Grid        ${gridText(result)}`,
      ...columns(timingRows(result).map((row) => [...row])).map(
        (line, i) => `${i === 0 ? 'Time' : '    '}      ${line}`,
      ),
      ...(routes
        ? [paint(`Routes      ${printable(routesText(routes))}`, routes.status === 'differ' ? 'outside' : 'ink')]
        : []),
    ],
    result.notes.map((note) => `Note: ${printable(note)}`),
    written.length === 0 ? [] : [`Written: ${written.map(printable).join(', ')}`],
  ];
  return sectionsText(sections);
}

type Paint = (text: string, name: ColourName) => string;

function budgetLines(result: Result, paint: Paint): string[] {
  const rows = budgetRows(result.budget);
  const bars = barsOf(rows);
  const cells = columns(
    rows.map(({ name, error, shareText, floor }) => [name, error, shareText, floor]),
    ['left', 'right', 'right', 'right'],
  );
  return rows.map(({ colour }, i) => `${cells[i]}  ${paint(bars[i]!, colour)}`.trimEnd());
}

/** Bars of shares on one scale, zero in one column: negative ones to its left. The total has none. */
function barsOf(rows: readonly BudgetRow[]): string[] {
  const shares = rows.map(({ name, share }) => (name === 'total' ? 0 : (share ?? 0)));
  const unit = BAR_LENGTH / Math.max(1, ...shares.map(Math.abs));
  const lengths = shares.map((share) => Math.round(share * unit));
  const left = Math.max(0, ...lengths.map((length) => -length));
  return lengths.map((length, i) =>
    rows[i]!.name === 'total'
      ? ''
      : `${' '.repeat(left + Math.min(0, length))}${'█'.repeat(Math.max(0, -length))}│${'█'.repeat(Math.max(0, length))}`,
  );
}

function observerLines(result: Result, paint: Paint): string[] {
  const head = ['', 'E', 'H', 'peak', 'rise time', 'shift', 'band', ''];
  const rows = result.observers.map(({ name, E, H, inside, extrapolated }) =>
    inside && E
      ? [
          printable(name),
          percentOr(E.relativeL2),
          percentOr(H?.relativeL2 ?? null),
          signedPercentOr(E.peakError),
          signedPercentOr(E.riseTimeError),
          quantityOr(E.timeShift, 's'),
          bandText(E),
          E.status === 'counted' ? '' : E.status,
        ]
      : [
          printable(name),
          '—',
          '—',
          '—',
          '—',
          '—',
          '—',
          `outside the box, predicted ${percentOr(extrapolated?.error ?? null)}`,
        ],
  );
  const lines = columns([head, ...rows], ['left', 'right', 'right', 'right', 'right', 'right', 'right', 'left']);
  return lines.map((line, i) => {
    const error = i === 0 ? null : (result.observers[i - 1]!.E?.relativeL2 ?? null);
    return error !== null && error > result.tolerance ? paint(line.trimEnd(), 'outside') : line.trimEnd();
  });
}
