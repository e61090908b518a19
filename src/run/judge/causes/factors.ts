import { log } from '../../../elementary/elementary.ts';
import { formatNumber } from '../../../elementary/quantity.ts';
import { ELECTRIC_CONSTANT, MAGNETIC_CONSTANT } from '../../../scenario/constants.ts';
import type { Medium } from '../../../scenario/model.ts';
import { COMPONENTS } from '../../../trace/trace.ts';
import { oneByOne, plus, type Refit, times } from '../refit.ts';
import { type CauseName, type Scope, scopesOf, type Trial } from '../trial.ts';

/** A factor that has a name. */
interface NamedFactor {
  readonly cause: CauseName;
  readonly factor: number;
  readonly scope: Scope;
  readonly words: string;
  readonly remedy: string;
}

function namedFactors({ impedance, permeability }: Medium): NamedFactor[] {
  const eta = 'E or H is scaled by the wave impedance, as solvers do inside: scale it back on the way out';
  const flux = 'give B as B (--column Bz=HEADER with its unit), or H in A/m';
  const vacuum = Math.sqrt(MAGNETIC_CONSTANT / ELECTRIC_CONSTANT);
  const impedances = Math.abs(impedance / vacuum - 1) < 1e-9 ? [impedance] : [impedance, vacuum];
  const permeabilities =
    Math.abs(permeability / MAGNETIC_CONSTANT - 1) < 1e-9 ? [permeability] : [permeability, MAGNETIC_CONSTANT];
  return [
    ...impedances.flatMap((z): NamedFactor[] => [
      {
        cause: 'impedance',
        scope: 'E',
        factor: 1 / z,
        words: `E is divided by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'E',
        factor: z,
        words: `E is multiplied by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'H',
        factor: z,
        words: `H is multiplied by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'H',
        factor: 1 / z,
        words: `H is divided by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
    ]),
    ...permeabilities.flatMap((mu): NamedFactor[] => [
      { cause: 'fluxForField', scope: 'H', factor: mu, words: 'what is given as H is B = μH', remedy: flux },
      {
        cause: 'fluxForField',
        scope: 'H',
        factor: 1 / mu,
        words: 'what is given as H is H/μ: H was taken for B',
        remedy: flux,
      },
    ]),
  ];
}

export function* factorTrials(refit: Refit): Generator<Trial> {
  const { bases, own, scenario, given } = refit;
  const scopes = scopesOf(refit);
  const g = refit.signals();
  for (const base of bases) {
    for (const { scope, factor, ...named } of namedFactors(scenario.medium)) {
      const over = scopes.find((s) => s.scope === scope)?.over;
      if (over) yield { ...named, parameters: 0, model: times(base, (k) => (over(k) ? factor : 1)) };
    }
    for (const { who, over } of scopes) yield { ...turned(who), model: times(base, (k) => (over(k) ? -1 : 1)) };
    for (const c of new Set(given.map((_, k) => own(k))))
      yield { ...turned(COMPONENTS[c]!), model: times(base, (k) => (own(k) === c ? -1 : 1)) };
    for (const { scope, who, are, over } of scopes) {
      const a = refit.inner(g, base, over) / refit.inner(base, base, over);
      if (!Number.isFinite(a) || a === 0) continue;
      const power = Math.round(log(Math.abs(a)) / Math.LN10);
      const round = Math.sign(a) * Number(`1e${power}`);
      if (power !== 0)
        yield {
          cause: 'powerOfTen',
          words: `${who} ${are} ${formatNumber(round)} times what ${are === 'are' ? 'they' : 'it'} should be`,
          remedy: `give the unit of the column (--unit ${scope === 'H' ? 'H=mA/m' : 'E=kV/m'}), or check the unit of the source’s current`,
          parameters: 0,
          model: times(base, (k) => (over(k) ? round : 1)),
        };
      yield {
        cause: 'amplitude',
        words: `${who} ${are} ${formatNumber(a, 4)} times what ${are === 'are' ? 'they' : 'it'} should be`,
        remedy:
          scope === scopes[0]!.scope
            ? 'check the amplitude of the source, its moment (current × length), and the area that its current is spread over'
            : 'check how this field is scaled on its way to the file',
        parameters: 1,
        model: times(base, (k) => (over(k) ? a : 1)),
      };
    }
  }
  for (const emitters of oneByOne(scenario.sources, scenario.medium)) {
    const alone = refit.arrangement(refit.places(), emitters).signals((t) => t, own, false);
    const size = refit.inner(alone, alone);
    for (const base of bases) {
      const more = refit.inner(plus(g, base, -1), alone) / size;
      if (Number.isFinite(more))
        yield {
          cause: 'amplitude',
          words: `source “${emitters.sources[0]!.name}” is ${formatNumber(1 + more, 4)} times as strong as it should be`,
          remedy: 'check the amplitude and sign of this source',
          parameters: 1,
          model: plus(base, alone, more),
        };
    }
  }
}

const turned = (who: string): Omit<Trial, 'model'> => ({
  cause: 'sign',
  words: `the sign of ${who} is turned`,
  remedy: 'check the direction of positive current and of the axes',
  parameters: 0,
});
