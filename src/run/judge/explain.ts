import type { Judgement, TriedCause } from '../../compare/judgeResult.ts';
import { log } from '../../elementary/elementary.ts';
import { distantWallTrials } from './causes/walls.ts';
import { trials } from './causes.ts';
import type { Refit } from './refit.ts';
import { CAUSES, type Trial } from './trial.ts';

/** A cause is likely where it takes away at least this share of what is wrong, in power. */
const HALF = 0.5;

/** Walls are looked for anywhere where the best cause so far leaves more than this share of what is wrong. */
const UNEXPLAINED = 0.1;

/** What a fitted number must take away of the logarithm of the rest: the first halves its power, each other 15 % of it. */
const FIRST_PARAMETER = 0.7;
const ANOTHER_PARAMETER = 0.15;
const priceOf = (parameters: number) => (parameters === 0 ? 0 : FIRST_PARAMETER + (parameters - 1) * ANOTHER_PARAMETER);

/** Where two causes are the same by a symmetry of the source, the one that stands first in the list is named. */
const PLAINER = 0.01;

/** Traces are sound where they are within 30 % of the predicted error of the prediction, or within 0.3 % of the field. */
const SOUND_SHARE = 0.3;
const SOUND_LEAST = 3e-3;

/** A cause that leaves no more than this of what is wrong is told even there. */
const EXPLAINED = 0.05;

interface Tried {
  readonly trial: TriedCause;
  readonly rest: number;
  readonly score: number;
}

/**
 * The likeliest cause. Each trial's rest ‖trace − model‖² is held against that of the exact field and, where it is
 * predicted, of a sound grid's field, whichever is nearer to the traces.
 * @param predicted whether a sound grid's error is known for every field that does not vanish
 */
export function explain(
  refit: Refit,
  json: unknown,
  predicted: boolean,
  onProgress: (fraction: number) => void,
): Judgement['causes'] {
  const wrong = Math.min(...refit.bases.map((base) => refit.residual(base)));
  const best = new Map<string, Tried>();
  // Rests closer to each other than this are alike: what the exact field's own error, and rounding, leave.
  const floor = 1e-12 + 1e-9 * Math.min(1, wrong);
  const take = ({ cause, words, remedy, parameters, model }: Trial) => {
    const rest = refit.residual(model);
    if (!Number.isFinite(rest)) return;
    const score = log(rest + floor) + priceOf(parameters) + PLAINER * CAUSES.indexOf(cause);
    const known = best.get(cause);
    if (known && known.score <= score) return;
    const trial = {
      cause,
      words,
      remedy,
      explained: wrong > 0 ? 1 - rest / wrong : 0,
      remaining: Math.sqrt(rest),
      parameters,
    };
    best.set(cause, { trial, rest, score });
  };
  let furthest = 0;
  for (const trial of trials(refit, json)) {
    take(trial);
    furthest = Math.max(furthest, CAUSES.indexOf(trial.cause) + 1);
    onProgress((0.8 * furthest) / CAUSES.length);
  }
  const ordered = () => [...best.values()].sort((a, b) => a.score - b.score);
  const [exact, sound] = refit.bases;
  const level = sound ? Math.sqrt(refit.residual(sound, exact!)) : 0;
  const excess = Math.sqrt(wrong);
  // An error within the prediction's own may still be all of one fault.
  const isExplained = (ordered()[0]?.rest ?? wrong) <= EXPLAINED * wrong;
  const isSound = predicted && (excess <= SOUND_LEAST || (excess <= SOUND_SHARE * level && !isExplained));
  if (!isSound && (ordered()[0]?.rest ?? wrong) > UNEXPLAINED * wrong)
    for (const trial of distantWallTrials(refit)) take(trial);
  onProgress(1);
  const list = ordered();
  const isLikely = !isSound && list[0] !== undefined && list[0].rest <= HALF * wrong && excess > SOUND_LEAST;
  return { status: isSound ? 'sound' : isLikely ? 'likely' : 'none', tried: list.map(({ trial }) => trial) };
}
