import { decibels } from '../../../elementary/elementary.ts';
import { formatNumber } from '../../../elementary/quantity.ts';
import type { Refit } from '../refit.ts';
import type { Trial } from '../trial.ts';

/** Decibels: v ↦ 20 log₁₀|v| + c, c fitted; what lies further below the peak than this is left out. */
const DECIBEL_DEPTH = 40;

export function* decibelTrials(refit: Refit): Generator<Trial> {
  const { bases, given } = refit;
  for (const base of bases) {
    const peaks = base.map((values) => values.reduce((most, v) => Math.max(most, Math.abs(v)), 0));
    let offset = 0;
    let count = 0;
    const level = base.map((values, k) =>
      values.map((v, n) => {
        const dB = decibels(Math.abs(v));
        if (!(Math.abs(v) > 0) || dB < decibels(peaks[k]!) - DECIBEL_DEPTH) return Number.NaN;
        offset += given[k]!.values[n]! - dB;
        count++;
        return dB;
      }),
    );
    if (count === 0) continue;
    const c = offset / count;
    // What is left out is taken as given: there a logarithm tells of noise alone.
    const model = level.map((values, k) => values.map((dB, n) => (Number.isNaN(dB) ? given[k]!.values[n]! : dB + c)));
    yield {
      cause: 'decibels',
      words: `the values are decibels${Math.abs(c) < 1 ? '' : ` (offset ${formatNumber(c, 3)} dB)`}, not field strengths`,
      remedy: 'write field strengths with their sign: decibels have lost it',
      parameters: 1,
      model,
    };
  }
}
