import { pow } from '../../../elementary/elementary.ts';
import { formatQuantity } from '../../../elementary/quantity.ts';
import { firstArrival, lastArrival } from '../../../scenario/distance.ts';
import { leastOf, type Refit } from '../refit.ts';
import type { Trial } from '../trial.ts';

/** A static field counts from this share of the peak on: −60 dB, as for the observers' figures. */
const STATIC_SHARE = 1e-3;

export function* staticTrials(refit: Refit): Generator<Trial> {
  const { bases, given, scenario, own } = refit;
  const { sources, medium } = scenario;
  const hasStatic = bases[0]!.some((values, k) => {
    const peak = values.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
    return own(k) < 3 && Math.abs(values.at(-1)!) > STATIC_SHARE * peak;
  });
  if (!hasStatic) return;
  const trial = {
    cause: 'staticLost' as const,
    remedy:
      'walls that do not carry a static field (Mur near the source), a hard source, or a high-pass on the way to the file: use a CPML with α > 0, or further walls',
  };
  const scale = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  const scan = Array.from({ length: 25 }, (_, n) => scale * pow(10, n / 8 - 0.5));
  for (const base of bases) {
    yield {
      ...trial,
      words: 'E has no mean: its static part is taken off the whole window',
      parameters: 0,
      model: base.map((values, k) => {
        const mean = own(k) < 3 ? values.reduce((sum, v) => sum + v, 0) / values.length : 0;
        return values.map((v) => v - mean);
      }),
    };
    yield {
      ...trial,
      words: 'E returns to zero where charge leaves a static field',
      parameters: 0,
      model: base.map((values, k) => {
        if (own(k) >= 3) return values;
        const { time } = given[k]!.group;
        const [from, to] = [
          firstArrival(sources, medium, given[k]!.place),
          lastArrival(sources, medium, given[k]!.place, 0.01),
        ];
        const rest = values.at(-1)!;
        return values.map((v, n) => v - rest * Math.min(1, Math.max(0, (time[n]! - from) / (to - from))));
      }),
    };
    const model = (T: number) =>
      base.map((values, k) => (own(k) < 3 ? highPass(values, given[k]!.group.time, T) : values));
    const { x } = leastOf((T) => refit.residual(model(T)), scan, 12);
    yield {
      ...trial,
      words: `E loses its static field with a time constant of ${formatQuantity(x, 's', 2)}`,
      parameters: 1,
      model: model(x),
    };
  }
}

/** y′ = x′ − y/T, the trapezoidal rule, from y = 0. */
function highPass(values: Float64Array, time: Float64Array, T: number): Float64Array {
  const out = new Float64Array(values.length);
  let y = values[0]!;
  out[0] = y;
  for (let n = 1; n < values.length; n++) {
    const half = (time[n]! - time[n - 1]!) / (2 * T);
    y = (y * (1 - half) + values[n]! - values[n - 1]!) / (1 + half);
    out[n] = y;
  }
  return out;
}
