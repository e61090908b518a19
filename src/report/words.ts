import type { ObserverFieldResult, Result, Routes } from '../compare/result.ts';
import { formatPercent, formatQuantity, formatScientific, formatUpperBound } from '../elementary/quantity.ts';

/** Phrases that the terminal and the HTML report share. */

/** A fraction that may have no value. */
export const percentOr = (value: number | null): string => (value === null ? '—' : formatPercent(value));

/** A signed fraction: a plus makes "too strong" plain. */
export const signedPercentOr = (value: number | null): string =>
  value !== null && value > 0 ? `+${formatPercent(value)}` : percentOr(value);

export const quantityOr = (value: number | null, unit: string): string =>
  value === null ? '—' : formatQuantity(value, unit);

/** "up to 2.4 GHz", in a table's cell. */
export function bandText({ band }: ObserverFieldResult): string {
  const { limit } = band;
  if (limit.status === 'limit') return formatQuantity(limit.frequency, 'Hz', 2);
  if (limit.status === 'noEnergyAbove') return `≥ ${formatQuantity(limit.frequency, 'Hz', 2)}`;
  return limit.status === 'none' ? 'none' : '—';
}

/** A whole number with thin spaces between thousands. */
export const countText = (count: number): string => String(count).replace(/\B(?=(\d{3})+$)/g, ' ');

/** What ran, how long it took and how fast: label, time, rate. */
export function timingRows({ timings }: Result): (readonly [string, string, string])[] {
  const { box, free, exact, comparison } = timings;
  const rate = (work: number, seconds: number, unit: string) =>
    seconds > 0 ? formatQuantity(work / seconds, unit) : '—';
  const time = (seconds: number) => formatQuantity(seconds, 's');
  return [
    ['grid in its box', time(box.seconds), rate(box.cellUpdates, box.seconds, 'cells/s')],
    ...(free
      ? ([['grid in free space', time(free.seconds), rate(free.cellUpdates, free.seconds, 'cells/s')]] as const)
      : []),
    ['exact fields', time(exact.seconds), rate(exact.evaluations, exact.seconds, 'elements/s')],
    ['comparison', time(comparison.seconds), ''],
  ];
}

/** The grid in a line: cells, step, steps, memory. */
export function gridText({ grid }: Result): string {
  return (
    `${grid.shape.join(' × ')} cells (${countText(grid.cells)}), ${countText(grid.steps)} steps of ` +
    `${formatQuantity(grid.timeStep, 's')}, ${formatQuantity(grid.memoryBytes, 'B')}`
  );
}

const SYMBOLS = { E: 'E', H: 'H', phi: 'φ', A: 'A' } as const;

/** What the integral's two routes, one in time and one by frequency, say of each other. */
export function routesText({ status, reason, largest, quantity, observer, places, instants, limit }: Routes): string {
  if (largest === null || limit === null) return `the retarded integral is not compared with its spectra: ${reason}`;
  const where = `${quantity ? SYMBOLS[quantity] : ''}${observer === null ? '' : ` at observer ${observer}`}`;
  const tried = `${places} ${places === 1 ? 'place' : 'places'}, ${instants} instants each`;
  const within = status === 'agree' ? 'agree' : 'DIFFER';
  return `the retarded integral and its spectra ${within}: ≤ ${formatUpperBound(largest)} of the peak apart (${where}; ${tried}; limit ${formatScientific(limit, 2)})`;
}

/** Sections of a text for the terminal, those without lines left out, an empty line between. */
export const sectionsText = (sections: readonly (readonly string[])[]): string =>
  `${sections
    .filter((lines) => lines.length > 0)
    .map((lines) => lines.map((line) => line.trimEnd()).join('\n'))
    .join('\n\n')}\n`;

/** Rows as lines, cells padded to their columns' widths, two spaces in front and between. */
export function columns(rows: readonly (readonly string[])[], align: readonly ('left' | 'right')[] = []): string[] {
  const width = (text: string) => [...text].length;
  const widths = rows[0]!.map((_, c) => Math.max(...rows.map((row) => width(row[c]!))));
  return rows.map((row) =>
    row
      .map((cell, c) => {
        const padding = ' '.repeat(widths[c]! - width(cell));
        return `  ${align[c] === 'right' ? padding + cell : cell + padding}`;
      })
      .join('')
      .trimEnd()
      .padEnd(widths.reduce((sum, w) => sum + w + 2, 0)),
  );
}

/**
 * A word of a command line as one would type it: nothing in it is a variable or a command to a shell. Quotes are double
 * ones, which all shells know, where that is enough.
 */
export function quoted(word: string): string {
  if (/^[\w./][\w./-]*$/.test(word)) return word;
  return /["$`\\!%]/.test(word) ? `'${word.replaceAll("'", "'\\''")}'` : `"${word}"`;
}
