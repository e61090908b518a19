import type { Method } from '../retarded/prepare.ts';
import type { Scenario } from '../scenario/model.ts';
import { type FieldHistory, type Instants, samplePoints } from '../trace/trace.ts';
import type { Team } from './pool.ts';

/** Cells handed to a worker at a time: small enough for progress and balance, large enough to pay for the journey. */
const CELLS_A_TASK = 64;

/** A field by integrals at the sites of cells, with how far it can be trusted. */
export interface IntegralField {
  readonly history: FieldHistory;
  /** bound on the error of every value of a site (point·6 + component), V/m or A/m */
  readonly errorBound: Float64Array;
  readonly evaluations: number;
}

/** The exact field of the designed currents, shared out over the team. */
export function exactField(
  team: Team,
  scenario: Scenario,
  json: unknown,
  cells: Int32Array,
  instants: Instants,
  method: Method,
  onCells: (cells: number) => void,
): Promise<IntegralField> {
  return assemble(scenario, cells, instants, onCells, (part) => team.run('exactField', [json, part, instants, method]));
}

/** Accuracy that histories of gridded currents are asked for, relative to the peak at a point. */
const GRIDDED_ACCURACY = 1e-8;

/** The exact field of the gridded currents; its bound is what was asked for, or what the checks found if that is more. */
export function griddedField(
  team: Team,
  scenario: Scenario,
  json: unknown,
  cells: Int32Array,
  instants: Instants,
  onCells: (cells: number) => void,
): Promise<IntegralField> {
  return assemble(scenario, cells, instants, onCells, async (part) => {
    const piece = await team.run('griddedField', [json, part, instants, GRIDDED_ACCURACY]);
    return {
      ...piece,
      errorBound: peaks(piece.values, instants.count).map(
        (peak) => peak * Math.max(GRIDDED_ACCURACY, piece.difference),
      ),
    };
  });
}

interface Piece {
  readonly values: Float64Array;
  readonly errorBound: Float64Array;
  readonly evaluations: number;
}

async function assemble(
  scenario: Scenario,
  cells: Int32Array,
  instants: Instants,
  onCells: (cells: number) => void,
  evaluate: (part: Int32Array) => Promise<Piece>,
): Promise<IntegralField> {
  const { grid } = scenario;
  const points = samplePoints(cells, grid.box.from, grid.cellSize);
  const values = new Float64Array(points.count * 6 * instants.count);
  const errorBound = new Float64Array(points.count * 6);
  let evaluations = 0;
  const starts = Array.from({ length: Math.ceil(points.count / CELLS_A_TASK) }, (_, m) => m * CELLS_A_TASK);
  await Promise.all(
    starts.map(async (start) => {
      const part = cells.slice(3 * start, 3 * (start + CELLS_A_TASK));
      const piece = await evaluate(part);
      values.set(piece.values, start * 6 * instants.count);
      errorBound.set(piece.errorBound, start * 6);
      evaluations += piece.evaluations;
      onCells(part.length / 3);
    }),
  );
  return { history: { points, instants, values }, errorBound, evaluations };
}

/** Peak of the vector (E or H) at each site's point: point·6 + component. */
function peaks(values: Float64Array, instants: number): Float64Array {
  const sites = values.length / instants;
  const result = new Float64Array(sites);
  for (let first = 0; first < sites; first += 3) {
    let square = 0;
    for (let n = 0; n < instants; n++) {
      let sum = 0;
      for (let c = 0; c < 3; c++) sum += values[(first + c) * instants + n]! ** 2;
      square = Math.max(square, sum);
    }
    result.fill(Math.sqrt(square), first, first + 3);
  }
  return result;
}
