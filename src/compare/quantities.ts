import { z } from 'zod';
import { COMPONENTS, type FieldHistory } from '../trace/trace.ts';
import { type Field, samplesOf } from './fields.ts';
import { dominantComponent, riseTime } from './observer.ts';

/** What engineers ask for beside errors, in `result.json`; SI units. */

const inUnit = (unit: string, what: string) => z.number().describe(`${what}, ${unit}`);
const vector = (what: string) => z.tuple([z.number(), z.number(), z.number()]).readonly().describe(what);
const share = (what: string) => z.number().describe(`${what}; a fraction, 0.05 for 5 %`);

const pulseSchema = z.object({
  component: z.enum(COMPONENTS).describe('the strongest of the exact field'),
  peak: inUnit('V/m or A/m', 'of the exact field, with its sign'),
  peakTime: inUnit('s', 'when'),
  riseTime: inUnit('s', '10–90 % of the peak')
    .nullable()
    .describe('null where the field does not rise from below 10 %'),
  gridPeak: inUnit('V/m or A/m', 'of the grid'),
  gridPeakTime: inUnit('s', 'when'),
  gridRiseTime: inUnit('s', '10–90 %').nullable(),
});

/** The far field of a grid's fields against the exact one, at one frequency. */
const patternLineSchema = z.object({
  frequency: inUnit('Hz', 'of the line'),
  mainLobe: share('largest |grid − exact|/|exact| over directions within 3 dB of the largest'),
  mainLobeDirection: vector('where that is'),
  axes: z
    .array(z.object({ direction: z.string(), error: share('|grid − exact| over the largest |exact|') }))
    .readonly(),
  ownError: share(
    'what the transform makes of the exact field on the same surface, over the largest |exact|, the worst',
  ),
  energy: z
    .object({
      exact: inUnit('J/Hz', 'from the exact far field'),
      exactThroughSurface: inUnit('J/Hz', 'exact fields, Poynting vector through the surface'),
      gridThroughSurface: inUnit('J/Hz', 'the grid’s'),
      gridFar: inUnit('J/Hz', 'over the directions of the grid’s far field (Parseval)'),
    })
    .describe('radiated per hertz, told in four ways'),
});

const patternSchema = z.object({
  /** cells between the surface and the walls */
  depth: z.int().describe('cells between the surface and the walls'),
  samples: z.int().describe('cells read on the surface'),
  lines: z.array(patternLineSchema).readonly(),
});

export const quantitiesSchema = z.object({
  radiatedEnergy: z
    .object({ value: inUnit('J', 'by the exact far field'), error: inUnit('J', 'bound of its error') })
    .nullable()
    .describe('null where it has no finite value, or would take long: `derive … radiation` gives it'),
  regions: z
    .object({
      centre: vector('middle of the sources, m'),
      direction: vector('of the line, towards the first observer'),
      nearTo: inUnit('m', 'up to here from the centre the near part (1/r³) has the largest peak').nullable(),
      radiationFrom: inUnit('m', 'from here on the radiation part (1/r) has').nullable(),
    })
    .nullable()
    .describe('null without an observer, or where it would take long; nulls in it: nowhere, everywhere'),
  observers: z
    .array(
      z.object({
        name: z.string(),
        largestPart: z
          .enum(['near', 'induction', 'radiation'])
          .nullable()
          .describe('which part of E has the largest peak there'),
        E: pulseSchema.nullable().describe('null where it vanishes by symmetry'),
        H: pulseSchema.nullable().describe('null where it vanishes by symmetry'),
      }),
    )
    .readonly()
    .describe('inside the box'),
  pattern: patternSchema
    .nullable()
    .describe('error of the grid’s far field by direction; null where it was not asked for (`--pattern`)'),
  patternRefused: z.string().optional().describe('why a pattern that was asked for could not be had'),
});

export type Quantities = z.infer<typeof quantitiesSchema>;
export type Pattern = z.infer<typeof patternSchema>;
export type PatternLine = z.infer<typeof patternLineSchema>;
export type TracePulse = z.infer<typeof pulseSchema>;

/** Peak and 10–90 % rise time of both solvers' signals at a point, on the exact field's strongest component. */
export function tracePulse(grid: FieldHistory, exact: FieldHistory, field: Field, point: number): TracePulse {
  const component = dominantComponent(exact, field, point);
  const instants = exact.instants[field];
  const step = instants.length > 1 ? instants[1]! - instants[0]! : 0;
  const read = (history: FieldHistory) => {
    const samples = samplesOf(history, point, component);
    let index = 0;
    samples.forEach((v, n) => {
      if (Math.abs(v) > Math.abs(samples[index]!)) index = n;
    });
    const rise = samples[index] === 0 ? Number.NaN : riseTime(samples) * step;
    return { peak: samples[index]!, time: instants[index]!, rise: Number.isFinite(rise) ? rise : null };
  };
  const [g, x] = [read(grid), read(exact)];
  return {
    component: COMPONENTS[component]!,
    peak: x.peak,
    peakTime: x.time,
    riseTime: x.rise,
    gridPeak: g.peak,
    gridPeakTime: g.time,
    gridRiseTime: g.rise,
  };
}
