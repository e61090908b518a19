import { z } from 'zod';
import { COMPONENTS } from '../trace/trace.ts';
import { fsvSchema } from './featureSelective.ts';
import { fraction, inUnit, observerSchema, vector } from './result.ts';

/** `result.json` of `judge`: another solver's traces against the exact field; `observers[]` as in a comparison's, and more. */
const fitted = z
  .object({
    timeOffset: inUnit('s', 'by which the trace comes late: the offset with which it fits best'),
    scale: z.number().describe('factor on the exact field with which the trace fits best'),
    relativeL2: fraction('what is left then, of the exact field'),
  })
  .describe(
    'a fitted delay absorbs dispersion and a fitted scale a wrong source: what is left proves nothing by itself',
  );

const sound = z.object({
  relativeL2: fraction('predicted for a sound Yee grid: lattice and gridding, walls where they are known').nullable(),
  ratio: z.number().nullable().describe('measured over predicted'),
  reason: z.string().nullable().describe('why nothing is predicted: “the error of a sound grid …”'),
});

const judgedField = z.object({
  components: z.array(z.enum(COMPONENTS)).readonly().describe('those that the file has; norms are over them'),
  samples: z.int().describe('instants'),
  instants: z.enum(['even', 'nearly', 'uneven']).describe('uneven: norms are by the trapezoidal rule; no spectra'),
  exactError: fraction('bound of the exact field’s own error, relative to the field').nullable(),
  fitted: fitted.nullable(),
  sound,
  featureSelective: fsvSchema.nullable().describe('of the strongest component; null where instants are uneven'),
});

const judgedObserver = observerSchema.extend({
  sites: z
    .partialRecord(z.enum(COMPONENTS), vector('where the component was sampled'))
    .nullable()
    .describe('those of the file'),
  judged: z.object({ E: judgedField.nullable(), H: judgedField.nullable() }),
});

const trial = z.object({
  cause: z.string().describe('halfTimeStep, amplitude, wall, …'),
  words: z.string(),
  remedy: z.string(),
  explained: fraction(
    '1 − ‖trace − model‖²/‖trace − sound‖² over all traces, sound being the exact field, or with what a sound grid adds, whichever is nearer',
  ),
  remaining: fraction('√(Σ (trace − model)²) of the weaker of trace and exact field, all fields counting alike'),
  parameters: z.int().describe('numbers that were fitted'),
});

export const judgeSchema = z.object({
  title: z.string(),
  version: z.string().describe('of Fieldassay'),
  tolerance: fraction('what the traces are held against'),
  traces: z.object({
    file: z.string(),
    count: z.int().describe('component traces judged'),
    error: fraction('√(Σ (trace − exact)²/Σ exact²), the fields at all observers counting alike').nullable(),
  }),
  observers: z.array(judgedObserver).readonly(),
  sound: z.object({
    cellSize: vector('dx, dy, dz of the Yee grid that predictions are for'),
    timeStep: inUnit('s', 'Δt'),
    walls: z.boolean().describe('whether what walls send back is in the predictions'),
  }),
  causes: z.object({
    status: z
      .enum(['likely', 'sound', 'none'])
      .describe('likely: the first of the list explains at least half of what is wrong; sound: nothing to explain'),
    tried: z.array(trial).readonly().describe('the best trial of each cause, likeliest first'),
  }),
  sentence: z.string(),
  details: z.array(z.string()).readonly(),
  timings: z.object({ seconds: z.number() }),
  environment: z.record(z.string(), z.union([z.string(), z.number(), z.boolean()])),
  notes: z.array(z.string()).readonly(),
  scenario: z.unknown().describe('the scenario file as given'),
});

export type Judgement = z.infer<typeof judgeSchema>;
export type JudgedObserver = z.infer<typeof judgedObserver>;
export type JudgedField = z.infer<typeof judgedField>;
export type TriedCause = z.infer<typeof trial>;

/** The published description of `judge`’s `result.json` (JSON Schema 2020-12). */
export const judgeJsonSchema = (): object => z.toJSONSchema(judgeSchema);

/**
 * What decides the exit status: the largest `observers[].E.relativeL2` is within the tolerance; H's where no E was given.
 */
export function tracesWithinTolerance({ observers, tolerance }: Pick<Judgement, 'observers' | 'tolerance'>): boolean {
  const errors = (field: 'E' | 'H') => observers.flatMap((o) => o[field]?.relativeL2 ?? []);
  const list = errors('E').length > 0 ? errors('E') : errors('H');
  return list.length > 0 && Math.max(...list) <= tolerance;
}
