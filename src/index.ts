/**
 * Fieldassay as a library, in Node and in browsers: `import { compare } from 'fieldassay'`. A contents page:
 *
 * - the question: `EXAMPLES`, `loadScenario`; every function that takes a scenario checks it and refuses it by `Refusal`
 * - both solvers, the error budget and the verdict: `compare`; the cheapest set-up for a tolerance: `plan`
 * - the exact field alone: `fieldAt`, `fieldBySpectrum`, `steadyField`, and what follows from it (src/derived/)
 * - what was found as text and files: `resultText`, `resultFile`, `tracesOf`, `writeTraces`, `writeTracesNpz`
 */

export { type Plan, planJsonSchema } from './compare/planResult.ts';
export { type Result, resultJsonSchema, withinTolerance } from './compare/result.ts';
export { DERIVED, type Derived, derivedJsonSchema } from './derived/catalogue.ts';
export { fluxThrough, inducedVoltage, voltageAlong } from './derived/paths.ts';
export { pulseAt } from './derived/pulse.ts';
export { directivityOf, radiatedEnergy, radiatedPower } from './derived/radiation.ts';
export { writeTracesNpz } from './files/npz.ts';
export { type ObserverTrace, readTraces, writeTraces } from './files/traces.ts';
export { RESULT_FILES, type ResultFile, resultFile, tracesOf } from './report/folder.ts';
export { resultText } from './report/text.ts';
export { type FieldOptions, type FieldValue, fieldAt } from './retarded/field.ts';
export { fieldBySpectrum, steadyField } from './retarded/spectral.ts';
export { type CompareOptions, type Comparison, compareSolvers as compare, Refusal } from './run/compare.ts';
export { type PlanOptions, planScenario as plan } from './run/plan.ts';
export type { Progress } from './run/progress.ts';
export { EXAMPLES } from './scenario/examples.ts';
export { loadScenario } from './scenario/load.ts';
export type { Medium, Scenario, Source, Vec3 } from './scenario/model.ts';
export { scenarioJsonSchema } from './scenario/schema.ts';
