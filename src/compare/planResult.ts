import { z } from 'zod';
import { boundarySchema } from './boundaryWords.ts';

/** `plan.json`: what a plan found, in SI units. */

const fraction = (what: string) => z.number().describe(`${what}; a fraction, 0.05 for 5 %`);
const inUnit = (unit: string, what: string) => z.number().describe(`${what}, ${unit}`);
const vector = (what: string) => z.tuple([z.number(), z.number(), z.number()]).readonly().describe(what);

const setupShape = {
  cellSize: vector('dx, dy, dz, m'),
  boundary: boundarySchema,
  clearance: z.int().describe('cells between the walls and what the box must hold, at least'),
  box: z.object({ from: vector('lower corner, m'), to: vector('upper corner, m') }),
  shape: vector('cells of the box along x, y, z'),
  cells: z.number().describe('cells, absorbing layers included'),
  steps: z.int(),
  timeStep: inUnit('s', 'Δt'),
  work: z.number().describe('cells × steps'),
  memoryBytes: inUnit('B', 'field components and the memory of the layers'),
  predicted: fraction('the largest predicted error of E'),
};
const setupSchema = z.object(setupShape);

const placeSchema = z.object({
  name: z.string(),
  at: vector('where it was asked for, m'),
  snapped: vector('the node whose cell is read, m'),
  total: fraction('predicted error of E: free space and boundary added'),
  free: fraction('lattice and gridding together, with what they cancel of each other'),
  lattice: fraction('lattice part'),
  gridding: fraction('gridding part'),
  boundary: fraction('boundary part'),
  measured: fraction('error of E in the run that checked the plan').nullable(),
});

export const planSchema = z.object({
  title: z.string(),
  version: z.string().describe('of Fieldassay'),
  tolerance: fraction('what was asked for'),
  band: inUnit('Hz', 'errors are those of sixth-octave bands up to here; null: of the whole signal').nullable(),
  met: z.boolean().describe('whether any set-up is predicted to meet the tolerance'),
  chosen: setupSchema.nullable().describe('the cheapest set-up that meets it; where none does, the best one found'),
  places: z.array(placeSchema).readonly().describe('errors of the chosen set-up'),
  alternatives: z
    .array(setupSchema)
    .readonly()
    .describe('the cheapest set-up with each boundary that meets the tolerance'),
  curve: z
    .array(setupSchema)
    .readonly()
    .describe('the chosen boundary and clearance at other cell sizes, coarse to fine'),
  machine: z.object({
    cellsPerSecond: z.number().describe('cell updates a second, measured here'),
    seconds: inUnit('s', 'one run of the chosen set-up here').nullable(),
    fits: z.boolean().describe('whether the chosen set-up can be run here'),
  }),
  own: z
    .object({ cellsPerSecond: z.number(), seconds: inUnit('s', 'one run of the chosen set-up') })
    .nullable()
    .describe('for a stated speed of another solver'),
  check: z
    .object({
      measured: fraction('the largest measured error of E'),
      ratio: z.number().describe('predicted/measured'),
      seconds: inUnit('s', 'time of the run'),
    })
    .nullable()
    .describe('what a run of the chosen set-up showed; null where none was made'),
  searchSeconds: inUnit('s', 'time of the search'),
  sentence: z.string(),
  notes: z.array(z.string()).readonly(),
  scenario: z.unknown().describe('the scenario file with the chosen grid; null where none was found'),
});

export type Plan = z.infer<typeof planSchema>;
export type PlannedSetup = z.infer<typeof setupSchema>;
export type PlannedPlace = z.infer<typeof placeSchema>;

/** The published description of `plan.json` (JSON Schema 2020-12). */
export const planJsonSchema = (): object => z.toJSONSchema(planSchema);
