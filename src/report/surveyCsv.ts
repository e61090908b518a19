import Papa from 'papaparse';
import { type CaseResult, isDone, type Outcome, type SurveyResult } from '../compare/surveyResult.ts';
import { FORMULA } from '../files/traces.ts';
import { printable } from '../scenario/text.ts';

type Cell = string | number | null;

const peakOf = (each: Outcome, key: 'peak' | 'transient' | 'late' | 'static'): number | null =>
  (each.reflection?.observers ?? []).reduce<number | null>(
    (worst, o) => (worst === null || (o[key] ?? worst) > worst ? o[key] : worst),
    null,
  );

/** Columns of a case that is done, SI units; reflections in dB. */
const COLUMNS: readonly (readonly [string, (each: Outcome) => Cell])[] = [
  ['dx', ({ cellSize }) => cellSize[0]],
  ['dy', ({ cellSize }) => cellSize[1]],
  ['dz', ({ cellSize }) => cellSize[2]],
  ['timeStep', ({ grid }) => grid.timeStep],
  ['steps', ({ grid }) => grid.steps],
  ['walls', ({ walls }) => walls.description],
  ['clearance', ({ walls }) => walls.clearance],
  ['cells', ({ cost }) => cost.cells],
  ['cellUpdates', ({ cost }) => cost.cellUpdates],
  ['memoryBytes', ({ cost }) => cost.memoryBytes],
  ['seconds', ({ timings }) => timings.box.seconds],
  ...(['total', 'boundary', 'lattice', 'boundaryAndLattice', 'gridding', 'quadrature'] as const).flatMap((part) => [
    [part, ({ budget }: Outcome) => budget[part]?.relativeL2 ?? null] as const,
    [`${part}Floor`, ({ budget }: Outcome) => budget[part]?.floor ?? null] as const,
  ]),
  ['boxE', ({ norms }) => norms.E.relativeL2],
  ['boxH', ({ norms }) => norms.H.relativeL2],
  ['reflection', (each) => peakOf(each, 'peak')],
  ['reflectionTransient', (each) => peakOf(each, 'transient')],
  ['reflectionLate', (each) => peakOf(each, 'late')],
  ['reflectionStatic', (each) => peakOf(each, 'static')],
  ['reflectionFloor', ({ reflection }) => reflection?.floor ?? null],
];

/**
 * `survey.csv`: one row a case. First the varied keys as given, then status and reason, then what a case that is done
 * has; numbers in shortest round-trip form, cells empty where there is no value. What a spreadsheet would take for a
 * formula gets an apostrophe in front.
 */
export function surveyCsv({ vary, cases }: SurveyResult): string {
  const head = [...vary.map(printable), 'status', 'reason', ...COLUMNS.map(([name]) => name), 'hash'];
  const rows = cases.map((each: CaseResult) => [
    ...vary.map((key) => plain(each.settings[key])),
    each.status,
    each.reason === null ? null : printable(each.reason),
    ...COLUMNS.map(([, of]) => (isDone(each) ? of(each) : null)),
    each.hash,
  ]);
  return `${Papa.unparse([head, ...rows] as unknown[][], { newline: '\n', escapeFormulae: FORMULA })}\n`;
}

const plain = (value: unknown): Cell =>
  typeof value === 'number' ? value : printable(typeof value === 'string' ? value : JSON.stringify(value));
