import { z } from 'zod';

/**
 * A result held against an earlier one, for build servers: which figures of error grew by more than is allowed. It reads the
 * `result.json` of a comparison and of a judgement alike.
 */
const figure = z.number().nullable();
const field = z.object({ relativeL2: figure, peakError: figure, riseTimeError: figure }).nullable();
const norm = z.object({ relativeL2: figure, relativeLinf: figure });

export const baselineSchema = z.object({
  observers: z.array(z.object({ name: z.string(), E: field, H: field })).readonly(),
  norms: z.object({ E: norm, H: norm }).optional(),
});
/** What of a result is held against another. */
export type Baseline = z.infer<typeof baselineSchema>;

/** One figure in both results. */
export interface Held {
  /** "observer A, E: relative L2" */
  readonly figure: string;
  readonly before: number;
  /** null: it has no value any more, or its observer is gone */
  readonly now: number | null;
  readonly grew: boolean;
}

/** Below this a figure is rounding: two runs of one scenario on different hosts may differ by it. */
const ROUNDING = 1e-9;

const WORDS = { relativeL2: 'relative L2', peakError: 'peak error', riseTimeError: 'rise time error' } as const;

/** Sizes of the figures of error of a result, by name. */
function figuresOf({ observers, norms }: Baseline): Map<string, number | null> {
  const found = new Map<string, number | null>();
  const size = (value: number | null) => (value === null ? null : Math.abs(value));
  for (const observer of observers)
    for (const of of ['E', 'H'] as const)
      for (const [key, words] of Object.entries(WORDS) as [keyof typeof WORDS, string][]) {
        const own = observer[of];
        if (own) found.set(`observer ${observer.name}, ${of}: ${words}`, size(own[key]));
      }
  for (const of of ['E', 'H'] as const)
    if (norms) {
      found.set(`the box, ${of}: relative L2`, norms[of].relativeL2);
      found.set(`the box, ${of}: relative L∞`, norms[of].relativeLinf);
    }
  return found;
}

/**
 * Every figure that the baseline has a value of, held against this result's.
 * @param allow growth that is allowed, a fraction of the earlier value
 */
export function holdAgainst(now: Baseline, before: Baseline, allow: number): Held[] {
  const present = figuresOf(now);
  // A judgement has no norms over a box: a comparison's are not missed there.
  const { norms, ...traces } = before;
  return [...figuresOf(now.norms && norms ? before : traces)].flatMap(([name, earlier]) => {
    if (earlier === null) return [];
    const value = present.get(name) ?? null;
    return [
      { figure: name, before: earlier, now: value, grew: value === null || value > earlier * (1 + allow) + ROUNDING },
    ];
  });
}
