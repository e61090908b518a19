import { z } from 'zod';
import { COMPONENTS } from '../trace/trace.ts';
import type { Band } from './band.ts';
import { boundarySchema } from './boundaryWords.ts';
import type { Budget } from './budget.ts';
import type { MaximumNorm, Norm, SampledNorm } from './norms.ts';
import type { ObserverErrors } from './observer.ts';
import type { PointStatus } from './pointError.ts';
import { quantitiesSchema } from './quantities.ts';

/**
 * `result.json`: what a comparison found, in SI units. Numbers are raw, also where they lie below their floors; a figure
 * that has no value (a relative error of a field that vanishes) is null.
 */

export const fraction = (what: string) => z.number().describe(`${what}; a fraction, 0.05 for 5 %`);
export const inUnit = (unit: string, what: string) => z.number().describe(`${what}, ${unit}`);
export const vector = (what: string) =>
  z.tuple([z.number(), z.number(), z.number()]).readonly().describe(`${what}: x, y, z, m`);
const fieldName = z.enum(['E', 'H']).describe('the field that decides');

const normsOfField = z.object({
  relativeL2: fraction('√(Σ w (grid − exact)²)/√(Σ w exact²) over samples outside the mask').nullable(),
  relativeL1: fraction('Σ w |grid − exact| / Σ w |exact|').nullable(),
  relativeLinf: fraction('max |grid − exact| / max |exact|').nullable(),
  standardError: fraction('standard error of relativeL2 that sampling the volume leaves').nullable(),
  scale: z
    .object({ L1: z.number(), L2: z.number(), Linf: z.number(), unit: z.enum(['V/m', 'A/m']) })
    .describe('the exact field: mean, root mean square and peak of its components, in `unit`; null without samples')
    .nullable(),
  samples: z.int().describe('component samples used'),
  masked: z.int().describe('points left out, nearer to a source than the mask'),
  largest: z
    .object({ component: z.enum(COMPONENTS), at: vector('place'), time: inUnit('s', 'instant') })
    .describe('where and when the difference is largest; null without samples')
    .nullable(),
});

const budgetEntry = z.object({
  relativeL2: fraction('√(Σ part²)/√(Σ exact²)').nullable(),
  share: z.number().nullable().describe('⟨part, total⟩/⟨total, total⟩: signed, the shares sum to 1'),
  floor: fraction('what relativeL2 cannot be told from').nullable(),
});

export const budgetSchema = z.object({
  boundary: budgetEntry.nullable().describe('grid − free space; null where the free-space run could not fit'),
  lattice: budgetEntry.nullable().describe('free space − integral of gridded currents; null as above'),
  boundaryAndLattice: budgetEntry.nullable().describe('their sum, where they are not known apart; else null'),
  gridding: budgetEntry.describe('integral of gridded − of designed currents'),
  quadrature: budgetEntry.describe('computed integral − closed form'),
  total: budgetEntry.describe('grid − exact'),
});

/** Schemas of a union told apart by `status`, each with some more keys. */
const best = z.object({ error: fraction('lowest 95th percentile'), distance: inUnit('m', 'where') });

const thresholdWith = <Shape extends z.ZodRawShape>(more: Shape) =>
  z.discriminatedUnion('status', [
    z.object({ status: z.literal('crossing'), distance: inUnit('m', 'the limit'), best, ...more }),
    z.object({ status: z.literal('closestSampled'), distance: inUnit('m', 'the closest sample'), best, ...more }),
    z.object({ status: z.literal('none'), best, ...more }),
    z.object({ status: z.literal('unmeasured'), reason: z.string(), ...more }),
  ]);

const errorBin = z.object({
  from: inUnit('m', 'lower edge'),
  to: inUnit('m', 'upper edge'),
  centre: inUnit('m', 'geometric middle'),
  nearest: inUnit('m', 'least distance sampled'),
  samples: z.int(),
  percentile95: fraction('95th percentile of the point error'),
});
const bins = z.array(errorBin).readonly();
const interval = z
  .tuple([z.number().nullable(), z.number().nullable()])
  .readonly()
  .optional()
  .describe('bootstrap interval of a crossing, 5th to 95th percentile, m; an end is null where there is no crossing');

const closestOfField = thresholdWith({ bins, interval });
const wallOfField = thresholdWith({ bins });

const farthestWith = <Shape extends z.ZodRawShape>(more: Shape) =>
  z.discriminatedUnion('status', [
    z.object({
      status: z.literal('extrapolated'),
      distance: inUnit('m', 'the limit beyond the box'),
      direction: z.string(),
      agreement: z.number().describe('worst factor between prediction and measurement in the outermost bins'),
      ...more,
    }),
    z.object({ status: z.literal('measured'), distance: inUnit('m', 'the limit in the box'), ...more }),
    z.object({ status: z.literal('boxEdge'), distance: inUnit('m', 'the edge'), reason: z.string(), ...more }),
    z.object({ status: z.literal('none'), ...more }),
    z.object({ status: z.literal('unmeasured'), ...more }),
  ]);
const farthestOfField = farthestWith({});

const bandLimitWith = <Shape extends z.ZodRawShape>(more: Shape) =>
  z.discriminatedUnion('status', [
    z.object({ status: z.literal('limit'), frequency: inUnit('Hz', 'the limit'), ...more }),
    z.object({ status: z.literal('noEnergyAbove'), frequency: inUnit('Hz', 'the last band that counts'), ...more }),
    z.object({
      status: z.literal('none'),
      best: z.object({ error: fraction('lowest error'), frequency: inUnit('Hz', 'where') }),
      ...more,
    }),
    z.object({ status: z.literal('unmeasured'), reason: z.string(), ...more }),
  ]);

const bandSchema = z.object({
  lowEnd: inUnit('Hz', '2/T, below which the window is too short'),
  bands: z
    .array(
      z.object({
        from: inUnit('Hz', 'lower edge'),
        to: inUnit('Hz', 'upper edge'),
        error: fraction('√(Σ|grid − exact|²)/√(Σ|exact|²)'),
        magnitudeRatio: z.number().describe('√(Σ|grid|²)/√(Σ|exact|²)'),
        phase: inUnit('rad', 'positive where the grid leads'),
      }),
    )
    .readonly(),
  limit: bandLimitWith({}),
});

const perField = <Each extends z.ZodType>(each: Each) => ({ field: fieldName, E: each, H: each });

export const remedySchema = z.object({
  sentence: z.string(),
  change: z
    .object({
      cellSize: vector('dx, dy, dz'),
      boundary: boundarySchema,
      clearance: z.int().describe('cells by which the walls move outwards'),
      box: z.object({ from: vector('lower corner'), to: vector('upper corner') }),
      cells: z.number().describe('cells, absorbing layers included'),
      steps: z.int(),
      work: z.number().describe('cells × steps, as a multiple of this run’s'),
      predicted: fraction('the largest predicted error of E'),
    })
    .nullable()
    .describe('the cheapest change whose predicted total meets the tolerance; null where none was found'),
});
export type Remedy = z.infer<typeof remedySchema>;

export const verdictSchema = z.object({
  closest: thresholdWith({ ...perField(closestOfField), interval }).describe(
    'closest trusted distance from a source; the worse of E and H',
  ),
  farthest: farthestWith(perField(farthestOfField)).describe('farthest trusted distance from the source'),
  wallClearance: thresholdWith(perField(wallOfField)).describe(
    'distance from the walls inside which nothing is trusted',
  ),
  band: bandLimitWith({
    observer: z.string().nullable(),
    field: z.enum(['E', 'H']).nullable(),
    lowEnd: inUnit('Hz', '2/T').nullable(),
  }).describe('the band of the worst observer inside the trusted distances'),
  remedy: remedySchema.optional().describe('absent where the tolerance is met or nothing could be predicted'),
  largestPart: z.enum(['boundary', 'lattice', 'boundaryAndLattice', 'gridding', 'quadrature']).nullable(),
  boundary: z.object({
    description: z.string(),
    level: z
      .object({ peak: fraction('max |grid − free| / max |exact|, the worst observer'), floor: fraction('its floor') })
      .nullable(),
  }),
  sentence: z.string().describe('begins "Within X %:"'),
  details: z.array(z.string()).readonly(),
});

const observerField = z.object({
  relativeL2: fraction('√(Σ_t Σ_c |grid − exact|²)/√(Σ_t Σ_c |exact|²)').nullable(),
  status: z.enum(['counted', 'window too short', 'below floor']),
  transient: fraction('the same up to the last retarded arrival').nullable(),
  staticResidue: fraction('error of the static field that is left after it').nullable(),
  component: z.enum(COMPONENTS).describe('the strongest, which peak and rise time are read from'),
  exactPeak: z.number().describe('V/m or A/m'),
  peakError: fraction('(grid − exact)/exact').nullable(),
  riseTimeError: fraction('(grid − exact)/exact, 10–90 %').nullable(),
  timeShift: inUnit('s', 'positive where the grid comes late').nullable(),
  amplitudeRatio: z.number().nullable(),
  band: bandSchema,
});

export const observerSchema = z.object({
  name: z.string(),
  at: vector('where it was asked for'),
  snapped: vector('the node whose cell is read'),
  sites: z.record(z.enum(COMPONENTS), vector('where the component lives')).nullable().describe('null outside the box'),
  inside: z.boolean().describe('false: outside the box, so no grid trace'),
  distance: inUnit('m', 'to the nearest source'),
  E: observerField.nullable(),
  H: observerField.nullable(),
  budget: budgetSchema.nullable().describe('of E'),
  extrapolated: z
    .object({
      exactPeakE: inUnit('V/m', 'largest component'),
      exactPeakH: inUnit('A/m', 'largest component'),
      error: fraction('predicted').nullable(),
    })
    .nullable()
    .describe('for observers outside the box'),
});

const checkSchema = z.object({
  name: z.string(),
  status: z.enum(['agrees', 'differs', 'not judged']),
  reason: z.string().nullable().describe('why it was not judged; else null'),
  points: z.int().describe('points judged'),
  of: z.int().describe('points of the budget'),
  observer: z.string().nullable().describe('the worst point, where it is an observer'),
  field: z.enum(['E', 'H']).nullable(),
  mismatch: fraction('‖free − gridded − predicted‖/‖field‖, the worst, the field being E or ηH, the larger').nullable(),
  limit: fraction('what it may be: 0.1 %, three floors, or what the next order of the prediction may add').nullable(),
  sentence: z.string(),
});

/** null where no field reaches the points tried */
const residual = (equation: string) =>
  z.number().nullable().describe(`largest |${equation}| over its largest term, by differences that leave 1e-8`);

const routesSchema = z.object({
  status: z.enum(['agree', 'differ', 'not compared']),
  reason: z.string().nullable().describe('why they were not compared; else null'),
  places: z.int().describe('drawn by lot, of observers or samples of the volume'),
  instants: z.int().describe('at each of them'),
  largest: fraction('the largest difference over the peak at the same place').nullable(),
  quantity: z.enum(['E', 'H', 'phi', 'A']).nullable().describe('in which that is'),
  observer: z.string().nullable().describe('where that is, if at an observer'),
  limit: fraction('what it may be: 1e-8 and what both routes tell of their own errors').nullable(),
});
export type Routes = z.infer<typeof routesSchema>;

export const resultSchema = z.object({
  title: z.string(),
  version: z.string().describe('of Fieldassay'),
  tolerance: fraction('what the verdict is for'),
  norms: z.object({ E: normsOfField, H: normsOfField }).describe('over box samples outside the mask'),
  budget: budgetSchema.describe('of E, pooled over observers; with none, over box samples outside the mask'),
  observers: z.array(observerSchema).readonly(),
  verdict: verdictSchema,
  checks: z.array(checkSchema).readonly().describe('what every comparison is held against; a difference is a fault'),
  integral: z.object({
    errorEstimate: fraction('bound of the integral’s own relative error'),
    gaugeResidual: residual('∇·A + με ∂φ/∂t'),
    waveResidual: residual('∇²φ − με ∂²φ/∂t², and the same of A'),
    potentialResidual: residual('E + ∇φ + ∂A/∂t, and B − ∇×A'),
    continuityResidual: fraction('Σ I + dQ/dt at the nodes of the grid, over the largest current'),
    routes: routesSchema
      .optional()
      .describe('retarded integrals against spectra and back (`exact --route spectral`); of `compare` alone'),
  }),
  grid: z.object({
    cells: z.int().describe('cells of the working box'),
    shape: z.tuple([z.int(), z.int(), z.int()]).readonly().describe('the same along x, y, z'),
    steps: z.int(),
    timeStep: inUnit('s', 'Δt'),
    memoryBytes: inUnit('B', 'largest grid run'),
  }),
  timings: z.object({
    box: z.object({ seconds: z.number(), cellUpdates: z.number().describe('cells with absorber × steps') }),
    rounding: z
      .object({ seconds: z.number(), cellUpdates: z.number() })
      .describe('the box once more, driven so that it rounds differently: it measures the rounding floor'),
    free: z.object({ seconds: z.number(), cellUpdates: z.number() }).nullable(),
    exact: z.object({ seconds: z.number(), evaluations: z.number() }),
    comparison: z.object({ seconds: z.number() }),
  }),
  environment: z.record(z.string(), z.union([z.string(), z.number(), z.boolean()])),
  notes: z.array(z.string()).readonly().describe('what should be known though nothing was refused'),
  quantities: quantitiesSchema.optional().describe('what engineers ask for beside errors; of `compare` alone'),
  scenario: z.unknown().describe('the scenario file as given'),
});

export type Result = z.infer<typeof resultSchema>;
export type ObserverResult = z.infer<typeof observerSchema>;
export type Check = z.infer<typeof checkSchema>;
export type BudgetResult = z.infer<typeof budgetSchema>;
export type ObserverFieldResult = z.infer<typeof observerField>;

/** The published description of `result.json` (JSON Schema 2020-12). */
export const resultJsonSchema = (): object => z.toJSONSchema(resultSchema);

/** A number for JSON, which knows no NaN. */
export const orNull = (value: number): number | null => (Number.isFinite(value) ? value : null);

/** The norms of a field as they are written. A mask as large as the box leaves no samples. */
export function normsResult(L1: Norm, L2: SampledNorm, Linf: MaximumNorm, masked: number): Result['norms']['E'] {
  return {
    relativeL2: orNull(L2.value),
    relativeL1: orNull(L1.value),
    relativeLinf: orNull(Linf.value),
    standardError: L2.samples > 0 ? L2.standardError : null,
    scale: L2.samples > 0 ? { L1: L1.scale, L2: L2.scale, Linf: Linf.scale, unit: L2.unit } : null,
    samples: L2.samples,
    masked,
    largest: Linf.samples > 0 ? { component: Linf.component, at: Linf.at, time: Linf.time } : null,
  };
}

/** A budget as it is written. */
export function budgetResult(budget: Budget): BudgetResult {
  const written = (entry: Budget['total']) => ({
    relativeL2: orNull(entry.relativeL2),
    share: orNull(entry.share),
    floor: orNull(entry.floor),
  });
  const orAbsent = (entry: Budget['boundary']) => (entry === null ? null : written(entry));
  return {
    boundary: orAbsent(budget.boundary),
    lattice: orAbsent(budget.lattice),
    boundaryAndLattice: orAbsent(budget.boundaryAndLattice),
    gridding: written(budget.gridding),
    quadrature: written(budget.quadrature),
    total: written(budget.total),
  };
}

/** The figures of a field at an observer as they are written. */
export function observerFieldResult(errors: ObserverErrors, status: PointStatus, band: Band): ObserverFieldResult {
  return {
    relativeL2: orNull(errors.relativeL2),
    status,
    transient: orNull(errors.transient),
    staticResidue: orNull(errors.staticResidue),
    component: errors.component,
    exactPeak: errors.exactPeak,
    peakError: orNull(errors.peakError),
    riseTimeError: orNull(errors.riseTimeError),
    timeShift: orNull(errors.timeShift),
    amplitudeRatio: orNull(errors.amplitudeRatio),
    band,
  };
}

/**
 * What decides the exit status: the largest `observers[].E.relativeL2` is within the tolerance. Observers outside the
 * box do not count; with none that has a figure, the verdict's best bin decides.
 */
export function withinTolerance(result: Pick<Result, 'observers' | 'verdict' | 'tolerance'>): boolean {
  const errors = result.observers.flatMap(({ E }) => (E && E.relativeL2 !== null ? [E.relativeL2] : []));
  if (errors.length > 0) return Math.max(...errors) <= result.tolerance;
  const { closest } = result.verdict;
  return 'best' in closest && closest.best.error <= result.tolerance;
}
