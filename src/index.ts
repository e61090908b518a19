/**
 * The library's public face.
 */

export { type Plan, planJsonSchema } from './compare/planResult.ts';
export { resultJsonSchema, withinTolerance } from './compare/result.ts';
export { DERIVED, type Derived, derivedJsonSchema } from './derived/catalogue.ts';
export { fluxThrough, inducedVoltage, voltageAlong } from './derived/paths.ts';
export { pulseAt } from './derived/pulse.ts';
export { directivityOf, radiatedEnergy, radiatedPower } from './derived/radiation.ts';
export { resultText } from './report/text.ts';
export { type FieldOptions, type FieldValue, fieldAt } from './retarded/field.ts';
export { fieldBySpectrum, steadyField } from './retarded/spectral.ts';
export { type CompareOptions, type Comparison, compareSolvers, Refusal } from './run/compare.ts';
export { type PlanOptions, planScenario } from './run/plan.ts';
export type { Progress } from './run/progress.ts';
export { loadScenario } from './scenario/load.ts';
export { scenarioJsonSchema } from './scenario/schema.ts';
