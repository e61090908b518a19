import { pow } from '../../../elementary/elementary.ts';
import { formatNumber, formatQuantity } from '../../../elementary/quantity.ts';
import { lastArrival } from '../../../scenario/distance.ts';
import { timeStepOf } from '../../../scenario/sites.ts';
import { leastOf, type Refit } from '../refit.ts';
import { scopesOf, type Trial } from '../trial.ts';

/** Time steps that the traces may be counted in: the scenario's, and the traces' own where it is another. */
function stepsOf({ scenario, given }: Refit): number[] {
  const own = timeStepOf(scenario.grid, scenario.medium);
  const sampled = given[0]!.group.step;
  return Math.abs(sampled / own - 1) < 1e-6 ? [own] : [own, sampled];
}

export function* timeTrials(refit: Refit): Generator<Trial> {
  const { plain, own, bases, scenario, end } = refit;
  const variants = bases.map((_, withSound) => withSound === 1);
  const late = (by: number) => `${formatQuantity(Math.abs(by), 's')} too ${by > 0 ? 'late' : 'early'}`;
  for (const { who, are, over } of scopesOf(refit)) {
    const shifted = (by: number, withSound: boolean) => plain.signals((t, k) => (over(k) ? t - by : t), own, withSound);
    for (const step of stepsOf(refit))
      for (const [halves, name] of [
        [1, 'half a time step'],
        [2, 'a whole time step'],
      ] as const)
        for (const sign of [1, -1])
          for (const withSound of variants) {
            const by = (sign * halves * step) / 2;
            yield {
              cause: halves === 1 ? 'halfTimeStep' : 'timeOffset',
              words: `${who} ${are} ${name} (${late(by)})`,
              remedy:
                halves === 1
                  ? 'E lives at whole time steps, H and the current between them: check which instant each sample is labelled with, and at which the source is read'
                  : 'check whether samples are counted from 0 or from 1',
              parameters: 0,
              model: shifted(by, withSound),
            };
          }
    const scale = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale));
    const reach = Math.min(0.5 * end, 20 * scale);
    const count = Math.ceil(reach / (0.5 * scale));
    const scan = Array.from({ length: 2 * count + 1 }, (_, n) => ((n - count) * reach) / count);
    for (const withSound of variants) {
      const { x } = leastOf((by) => refit.residual(shifted(by, withSound)), scan);
      yield {
        cause: 'timeOffset',
        words: `${who} ${are === 'are' ? 'come' : 'comes'} ${late(x)}`,
        remedy: 'check where the time of the file begins, and the delay of the source',
        parameters: 1,
        model: shifted(x, withSound),
      };
    }
  }
  const stretched = (by: number, withSound: boolean) => plain.signals((t) => by * t, own, withSound);
  for (const withSound of variants) {
    const scan = Array.from({ length: 61 }, (_, n) => pow(2, (n - 30) / 60));
    const { x } = leastOf((by) => refit.residual(stretched(by, withSound)), scan);
    yield {
      cause: 'timeScale',
      words: `time runs ${formatNumber(1 / x, 4)} times as fast as it should`,
      remedy: 'check the time step that the instants were counted with (Courant number, cell size, every n-th sample)',
      parameters: 1,
      model: stretched(x, withSound),
    };
  }
  const active = Math.max(...refit.places().map((at) => lastArrival(scenario.sources, scenario.medium, at, 0.5)));
  for (const power of [-15, -12, -9, -6, -3, 3, 6, 9, 12, 15]) {
    const factor = Number(`1e${power}`);
    if (end * factor < 0.3 * active || end * factor > 100 * active) continue;
    const arrangement = refit.arrangement(refit.places(), scenario, 1.5 * Math.max(1, factor));
    for (const withSound of variants)
      yield {
        cause: 'timeUnit',
        words: `the times are ${formatNumber(1 / factor)} times too large, as if ${power < 0 ? 'a smaller unit were read as seconds' : 'seconds were converted twice'}`,
        remedy: 'give the unit of the time column (--unit time=ns)',
        parameters: 0,
        model: arrangement.signals((t) => factor * t, own, withSound),
      };
  }
}
