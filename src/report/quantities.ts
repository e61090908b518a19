import type { PatternLine, Quantities, TracePulse } from '../compare/quantities.ts';
import { formatPercent, formatQuantity } from '../elementary/quantity.ts';

/** What engineers ask for beside errors, in words and rows that the terminal and the report share. */

/** A sentence each: energy, and where the parts of the field take over. */
export function quantitySentences({ radiatedEnergy, regions, pattern, patternRefused }: Quantities): string[] {
  const sentences: string[] = [];
  if (radiatedEnergy) sentences.push(`Radiated energy: ${formatQuantity(radiatedEnergy.value, 'J')}.`);
  if (regions) {
    const { nearTo, radiationFrom } = regions;
    const near = nearTo === null ? null : `the near part (1/r³) is the largest up to ${formatQuantity(nearTo, 'm')}`;
    const far =
      radiationFrom === null
        ? 'the radiation part (1/r) is the largest everywhere outside the sources'
        : `the radiation part (1/r) from ${formatQuantity(radiationFrom, 'm')} on`;
    sentences.push(`From the middle of the sources towards the first observer ${near ? `${near}, ` : ''}${far}.`);
  }
  if (patternRefused) sentences.push(`No far-field pattern: ${patternRefused}`);
  for (const line of pattern?.lines ?? []) sentences.push(patternSentence(line));
  return sentences;
}

function patternSentence({ frequency, mainLobe, axes, ownError, energy }: PatternLine): string {
  const worst = axes.reduce((w, axis) => (axis.error > w.error ? axis : w));
  return (
    `Far field at ${formatQuantity(frequency, 'Hz')}: grid ${formatPercent(mainLobe)} off in the main lobe, ` +
    `${formatPercent(worst.error)} of the largest along ${worst.direction}; energy ` +
    `${signed(energy.gridThroughSurface / energy.exactThroughSurface - 1)} (transform’s own error ${formatPercent(ownError)}).`
  );
}

const signed = (share: number): string => `${share > 0 ? '+' : ''}${formatPercent(share)}`;

export const PULSE_HEAD = ['', 'largest part', 'E', 'peak', 'grid', 'rise time', 'grid', 'H', 'peak', 'grid'] as const;

/** A row an observer: peak and rise time of E and peak of H, exact and grid. */
export function pulseRows({ observers }: Quantities): string[][] {
  return observers.map(({ name, largestPart, E, H }) => [
    name,
    largestPart ?? '—',
    ...peaks(E, 'V/m'),
    rise(E?.riseTime),
    rise(E?.gridRiseTime),
    ...peaks(H, 'A/m'),
  ]);
}

const peaks = (pulse: TracePulse | null, unit: string): string[] =>
  pulse ? [pulse.component, formatQuantity(pulse.peak, unit), formatQuantity(pulse.gridPeak, unit)] : ['—', '—', '—'];

const rise = (time: number | null | undefined): string => (typeof time === 'number' ? formatQuantity(time, 's') : '—');
