import { formatNumber } from '../../../elementary/quantity.ts';
import { loadScenario } from '../../../scenario/load.ts';
import type { Scenario } from '../../../scenario/model.ts';
import { leastOf, type Refit, type Signals } from '../refit.ts';
import type { Trial } from '../trial.ts';

/** Factors on the wave speed that are tried first. */
const SPEEDS = [0.5, 0.577, 0.667, 0.75, 0.85, 0.95, 1.05, 1.15, 1.3, 1.5, 1.75, 2];

/** The same currents in another medium. */
export function* mediumTrials(refit: Refit, json: unknown): Generator<Trial> {
  const { scenario, own } = refit;
  const inMedium = (relativePermittivity: number, relativePermeability: number): Signals | null => {
    const other = withMedium(json, relativePermittivity, relativePermeability);
    return other ? refit.arrangement(refit.places(), other).signals((t) => t, own, false) : null;
  };
  const { relativePermittivity: permittivity, relativePermeability: permeability } = scenario.medium;
  const remedy = 'check permittivity and permeability of the medium';
  if (permittivity !== 1 || permeability !== 1) {
    const model = inMedium(1, 1);
    if (model)
      yield {
        cause: 'medium',
        words: 'the field is that of the same currents in vacuum',
        remedy,
        parameters: 0,
        model,
      };
  }
  const at = (speed: number) => inMedium(permittivity / (speed * speed), permeability);
  const { x } = leastOf(
    (speed) => {
      const model = at(speed);
      return model ? refit.residual(model) : Number.POSITIVE_INFINITY;
    },
    SPEEDS,
    10,
  );
  const model = at(x);
  if (model)
    yield {
      cause: 'medium',
      words: `waves travel ${formatNumber(x, 3)} times as fast as in the medium (relative permittivity ${formatNumber(permittivity / (x * x), 3)})`,
      remedy,
      parameters: 1,
      model,
    };
}

/** The scenario in another medium; null where it is none then. */
function withMedium(json: unknown, relativePermittivity: number, relativePermeability: number): Scenario | null {
  if (relativePermittivity < 1) return null;
  const loaded = loadScenario({ ...(json as object), medium: { relativePermittivity, relativePermeability } });
  return 'problems' in loaded ? null : loaded.scenario;
}
