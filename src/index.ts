/**
 * Fieldassay as a library, in Node and in browsers: `import { compare } from 'fieldassay'`. A contents page:
 *
 * - the question: `EXAMPLES`, `loadScenario`; every function that takes a scenario checks it and refuses it by `Refusal`
 * - both solvers, the error budget and the verdict: `compare`; the cheapest set-up for a tolerance: `plan`
 * - another solver's traces: `judgeQuestion`, `readForeignTraces`, `judge`
 * - the exact field alone: `fieldAt`, `fieldBySpectrum`, `steadyField`, and what follows from it (src/derived/)
 * - what was found as text and files: `resultText`, `resultFile`, `tracesOf`, `writeTraces`, `writeTracesNpz`; `planText`,
 *   `planFile`; `judgeText`, `judgeFile`
 *
 * What fails throws `Refusal` (what was asked), `WorkerDied` or `OutOfMemory` (the machine), or the reason of an AbortSignal.
 */

export {
  type JudgedField,
  type JudgedObserver,
  type Judgement,
  judgeJsonSchema,
  type TriedCause,
  tracesWithinTolerance,
} from './compare/judgeResult.ts';
export { type Plan, planJsonSchema } from './compare/planResult.ts';
export { type Result, resultJsonSchema, withinTolerance } from './compare/result.ts';
export { DERIVED, type Derived, derivedJsonSchema } from './derived/catalogue.ts';
export { fluxThrough, inducedVoltage, voltageAlong } from './derived/paths.ts';
export { pulseAt } from './derived/pulse.ts';
export { directivityOf, radiatedEnergy, radiatedPower } from './derived/radiation.ts';
export { type KnownPlaces, type ReadTraces, readForeignTraces } from './files/foreignTraces.ts';
export { writeTracesNpz } from './files/npz.ts';
export { parseTraceMap, type TraceMap, traceMapJsonSchema } from './files/traceMap.ts';
export { type ObserverTrace, readTraces, writeTraces } from './files/traces.ts';
export { RESULT_FILES, type ResultFile, resultFile, tracesOf } from './report/folder.ts';
export { JUDGE_FILES, type JudgeFile, judgeFile, judgeText } from './report/judge.ts';
export { PLAN_FILES, type PlanFile, planFile, planText } from './report/plan.ts';
export { resultText } from './report/text.ts';
export { type FieldOptions, type FieldValue, fieldAt } from './retarded/field.ts';
export { fieldBySpectrum, steadyField } from './retarded/spectral.ts';
export {
  type CompareOptions,
  type Comparison,
  compareSolvers as compare,
  OutOfMemory,
  Refusal,
  WorkerDied,
} from './run/compare.ts';
export {
  type Judged,
  type JudgedTrace,
  type JudgeOptions,
  type JudgeQuestion,
  judge,
  judgeQuestion,
} from './run/judge.ts';
export { type PlanOptions, planScenario as plan } from './run/plan.ts';
export type { Progress } from './run/progress.ts';
export { EXAMPLES } from './scenario/examples.ts';
export { loadScenario } from './scenario/load.ts';
export type { Medium, Scenario, Source, Vec3 } from './scenario/model.ts';
export type { Problem } from './scenario/reading.ts';
export { scenarioJsonSchema } from './scenario/schema.ts';
export { COMPONENTS, type Component, type Trace } from './trace/trace.ts';
