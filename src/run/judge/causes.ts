import { axisTrials } from './causes/axes.ts';
import { decibelTrials } from './causes/decibels.ts';
import { factorTrials } from './causes/factors.ts';
import { mediumTrials } from './causes/medium.ts';
import { placeTrials } from './causes/place.ts';
import { staticTrials } from './causes/statics.ts';
import { timeTrials } from './causes/time.ts';
import { wallTrials } from './causes/walls.ts';
import type { Refit } from './refit.ts';
import type { Trial } from './trial.ts';

/** All trials but those that look for a wall's place, in the order of `CAUSES`. */
export function* trials(refit: Refit, json: unknown): Generator<Trial> {
  yield* timeTrials(refit);
  yield* placeTrials(refit);
  yield* axisTrials(refit);
  yield* factorTrials(refit);
  yield* decibelTrials(refit);
  yield* staticTrials(refit);
  yield* wallTrials(refit, [0, 1]);
  yield* mediumTrials(refit, json);
}
