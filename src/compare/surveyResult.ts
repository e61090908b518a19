import { z } from 'zod';
import type { Ladder } from './ladder.ts';
import { budgetSchema, observerSchema, type Result, resultSchema } from './result.ts';

/**
 * `survey-result.json`: what a survey found, in SI units; levels in decibels of the exact peak. Numbers are raw, also where
 * they lie below their floors; a figure that has no value is null.
 */

const fraction = (what: string) => z.number().describe(`${what}; a fraction, 0.05 for 5 %`);
const inUnit = (unit: string, what: string) => z.number().describe(`${what}, ${unit}`);
const level = (what: string) => z.number().nullable().describe(`${what}, dB`);
const numbers = z.array(z.number().nullable()).readonly();

const result = resultSchema.shape;

const reflectionAtSchema = z.object({
  observer: z.string().nullable().describe('null: the worst of the places that stand in for observers'),
  peak: level('largest component of what came back, over that of the exact field, at any instant'),
  transient: level('the same up to the passing of every wall’s first echo'),
  late: level('the same afterwards; null where the window ends before'),
  static: level('averages afterwards over the exact field’s static rest; null where there is none'),
  echoesPast: inUnit('s', 'instant by which the first echo of every wall has passed'),
  time: z.object({ t: numbers, reflected: numbers, exact: numbers }).describe('s; dB of the exact peak'),
  frequency: z.object({ f: numbers, ratio: numbers }).describe('Hz; dB of the exact field at that frequency'),
});

const angleSchema = z.object({
  wall: z.string(),
  faces: z.array(z.string()).readonly(),
  frequency: inUnit('Hz', 'at which the angles are told'),
  cellsPerWavelength: z.number(),
  floor: level('what it cannot be told from'),
  angle: numbers.describe('of incidence, from the normal, degrees'),
  reflected: numbers.describe('|R| of a plane wave with E along the wall, dB'),
});

export const reflectionSchema = z.object({
  floor: level('what is left of reflections in the lattice without walls'),
  observers: z.array(reflectionAtSchema).readonly(),
  angles: z.array(angleSchema).readonly(),
});

/** What one case came to. */
export const outcomeSchema = z.object({
  norms: result.norms,
  budget: budgetSchema,
  grid: result.grid,
  timings: result.timings,
  observers: z.array(observerSchema).readonly(),
  verdict: z.string().describe('the sentence'),
  notes: result.notes,
  environment: result.environment,
  walls: z.object({
    description: z.string(),
    layers: z.array(z.int()).readonly().describe('behind each face: x-, x+, y-, y+, z-, z+'),
    thickness: z.array(z.number()).readonly().describe('m'),
    clearance: inUnit('m', 'least distance from the box around the sources to a wall'),
  }),
  cost: z.object({
    cells: z.int().describe('cells of the lattice, absorber included'),
    cellUpdates: z.number().describe('cells × steps'),
    memoryBytes: inUnit('B', 'of the grid in its box'),
  }),
  cellSize: z.tuple([z.number(), z.number(), z.number()]).readonly().describe('dx, dy, dz, m'),
  expectedOrder: z.number().describe('of the grid, for these waveforms'),
  reflection: reflectionSchema.nullable().describe('where walls or clearance are varied'),
});
export type Outcome = z.infer<typeof outcomeSchema>;
export type ReflectionResult = z.infer<typeof reflectionSchema>;
export type AngleResult = z.infer<typeof angleSchema>;

const settings = z.record(z.string(), z.unknown()).describe('the varied keys and their values, as given');

/** The outcome of a finished case lies flat in it. */
const caseSchema = z.object({
  settings,
  status: z.enum(['done', 'refused', 'failed']),
  reason: z.string().nullable().describe('why it was refused or failed'),
  hash: z.string().describe('of the version and the whole scenario: the name of the case’s file'),
  ...Object.fromEntries(Object.entries(outcomeSchema.shape).map(([key, schema]) => [key, schema.nullable()])),
});

const part = z.object({ part: z.string(), errors: numbers, floors: numbers, orders: numbers });
const ladderSchema = z.object({
  settings: settings.describe('what is the same on all its grids'),
  cases: z.array(z.int()).readonly().describe('indices into `cases`, coarse to fine'),
  sizes: z.array(z.number()).readonly().describe('∛(dx dy dz), m'),
  errors: numbers.describe('relative L2 of total E pooled over observers'),
  orders: numbers.describe('ln(e₁/e₂)/ln(h₁/h₂) of total E, one for each consecutive pair'),
  expectedOrder: z.number(),
  richardson: z.union([
    z.object({ limit: fraction('what the error tends to as h → 0'), order: z.number(), orderFrom: z.string() }),
    z.object({ limit: z.null(), reason: z.string() }),
  ]),
  gci: z.union([
    z.object({
      value: fraction('grid convergence index of the finest grid, Fs |f₂ − f₁|/(r^p − 1)'),
      safetyFactor: z.number(),
      order: z.number(),
      trueError: fraction('error of the finest grid against the exact field'),
      covered: z.boolean().describe('value ≥ trueError'),
    }),
    z.object({ value: z.null(), reason: z.string(), trueError: z.number().nullable() }),
  ]),
  parts: z.array(part).readonly(),
  held: z.enum(['layers', 'thickness', 'layers and thickness', 'neither', 'no layers']),
});
export type LadderResult = z.infer<typeof ladderSchema>;

const boundarySchema = z.object({
  settings,
  case: z.int().describe('index into `cases`'),
  description: z.string(),
  reflection: level('largest component of what came back over that of the exact field, the worst observer'),
  floor: level('what `reflection` cannot be told from: below it nothing is called a reflection'),
  observer: z.string().nullable().describe('the worst one'),
  transient: level('the worst observer, up to the passing of every wall’s first echo'),
  late: level('the worst observer, afterwards'),
  static: level('the worst observer, of the static rest'),
  totalError: fraction('relative L2 of E pooled over observers').nullable(),
  front: z.boolean().describe('no other is as cheap and better, or as good and cheaper (cell updates, total error)'),
});
export type BoundaryResult = z.infer<typeof boundarySchema>;

export const surveyResultSchema = z.object({
  title: z.string(),
  version: z.string().describe('of Fieldassay'),
  combine: z.enum(['all', 'paired']),
  vary: z.array(z.string()).readonly().describe('the keys, in order'),
  mask: inUnit('m', 'samples nearer to a source are left out of box norms, in every case').nullable(),
  cases: z.array(caseSchema).readonly(),
  ladder: ladderSchema.nullable().describe('where cell sizes are an axis: the first of `ladders`'),
  ladders: z.array(ladderSchema).readonly().describe('one for each combination of the other settings'),
  boundaries: z
    .array(boundarySchema)
    .readonly()
    .describe('where walls or clearance are varied: one for each case done'),
  environment: result.environment,
  survey: z.unknown().describe('the survey as given, the scenario in it'),
});

/** A case: its settings and status, and where it is done all of its outcome. */
export type CaseResult = {
  readonly settings: Readonly<Record<string, unknown>>;
  readonly status: 'done' | 'refused' | 'failed';
  readonly reason: string | null;
  readonly hash: string;
} & (Outcome | { readonly [Key in keyof Outcome]: null });
export type SurveyResult = Omit<z.infer<typeof surveyResultSchema>, 'cases'> & {
  readonly cases: readonly CaseResult[];
};

/** The description of what one case came to. */
export const outcomeJsonSchema = (): object => z.toJSONSchema(outcomeSchema);

/** The published description of `survey-result.json` (JSON Schema 2020-12). */
export const surveyResultJsonSchema = (): object => z.toJSONSchema(surveyResultSchema);

const orNull = (value: number): number | null => (Number.isFinite(value) ? value : null);

/** A ladder as it is written. */
export function ladderResult(
  ladder: Ladder,
  about: Pick<LadderResult, 'settings' | 'cases' | 'expectedOrder'>,
): LadderResult {
  const { gci } = ladder;
  return {
    ...about,
    sizes: ladder.sizes,
    errors: ladder.errors.map(orNull),
    orders: ladder.orders.map(orNull),
    richardson: ladder.richardson,
    gci: gci.value === null ? { ...gci, trueError: orNull(gci.trueError) } : gci,
    parts: ladder.parts.map(({ part, errors, floors, orders }) => ({
      part,
      errors: errors.map(orNull),
      floors: floors.map(orNull),
      orders: orders.map(orNull),
    })),
    held: ladder.held,
  };
}

/** Whether a case is done, so that all of its outcome is there. */
export const isDone = (
  each: CaseResult,
): each is CaseResult & Outcome & { readonly status: 'done'; readonly norms: Result['norms'] } =>
  each.status === 'done';
