import type { EdgeCurrents } from '../gridding/edges.ts';
import type { Axis } from '../scenario/model.ts';
import { COMPONENTS, type Instants, type SamplePoints, STAGGER } from '../trace/trace.ts';
import { DelaySpread } from './delaySpread.ts';
import { EdgeResponse, type Site } from './edgeResponse.ts';
import type { Lattice } from './lattice.ts';
import { SIX } from './radialOperator.ts';

/** What to predict: the lattice's field, or that field minus the one of the same edges as filaments in free space. */
export type Quantity = 'field' | 'error';

/**
 * The field that an unbounded Yee lattice is expected to show of known edge currents, to second order in cell size and
 * time step and exact for slow fields near the source (see EdgeResponse), without a run: six delayed derivatives an edge.
 *
 * For waveforms whose four derivatives the time step resolves: 8 or more cells per shortest wavelength, and expected order
 * 2 (one with kinks wants `predictGridFieldBySpectrum`). The phase error enters to first order, so that the predicted
 * error runs some per cent low beyond 20 cells at 10 cells per shortest wavelength.
 * @returns values in the layout of `FieldHistory`; V/m and A/m
 * @throws RangeError when a sample lies on a driven edge, or when the instants are not evenly spaced by whole time steps
 */
export function predictGridField(
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  return predict('field', currents, lattice, points, instants);
}

/**
 * What the lattice adds: `predictGridField` minus the field of the same edges as uniform filaments with charges at their
 * nodes, formed coefficient by coefficient, so that it keeps its digits where the difference of two fields would lose
 * them. Arguments, result and errors as for `predictGridField`.
 */
export function predictLatticeError(
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  return predict('error', currents, lattice, points, instants);
}

function predict(
  quantity: Quantity,
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  const values = new Float64Array(points.count * COMPONENTS.length * instants.count);
  if (currents.count === 0) return values;
  const every = stride(instants, lattice.timeStep);
  const delays = delayRange(currents, lattice, points);
  const spreads = [instants.E, instants.H].map(
    (at) => new DelaySpread(currents.waveforms, at[0]!, every, instants.count, lattice.timeStep, delays),
  );
  const response = new EdgeResponse(lattice);
  const wanted = new Float64Array(SIX);
  forEachSite(points, (point, site) => {
    const spread = spreads[site < 3 ? 0 : 1]!;
    spread.clear();
    forEachEdge(currents, points, point, site, response, (edge) => {
      const { element, lattice: added, filament } = response;
      for (let k = 0; k < SIX; k++) wanted[k] = added[k]! + (quantity === 'field' ? element[k]! : -filament[k]!);
      const travel = response.distance / lattice.medium.speed;
      for (let p = currents.pairStart[edge]!; p < currents.pairStart[edge + 1]!; p++)
        spread.add(currents.waveform[p]!, travel + currents.delay[p]!, currents.weight[p]!, wanted);
    });
    spread.addHistory(values, (point * COMPONENTS.length + site) * instants.count);
  });
  return values;
}

export function forEachSite(points: SamplePoints, visit: (point: number, site: Site) => void): void {
  for (let point = 0; point < points.count; point++)
    for (let site = 0; site < COMPONENTS.length; site++) visit(point, site as Site);
}

/** Visits the edges that a site sees, `response` holding each one's response there. */
export function forEachEdge(
  currents: EdgeCurrents,
  points: SamplePoints,
  point: number,
  site: Site,
  response: EdgeResponse,
  visit: (edge: number) => void,
): void {
  const stagger = STAGGER[site]!;
  for (let edge = 0; edge < currents.count; edge++) {
    const axis = currents.axis[edge]! as Axis;
    const offset = (a: Axis) =>
      points.cell[3 * point + a]! + stagger[a]! - currents.node[3 * edge + a]! - (axis === a ? 0.5 : 0);
    const x = offset(0);
    const y = offset(1);
    const z = offset(2);
    if (x === 0 && y === 0 && z === 0) {
      const cell = [...points.cell.subarray(3 * point, 3 * point + 3)].join(', ');
      throw new RangeError(
        `Sample ${COMPONENTS[site]} of cell (${cell}) lies on a driven edge, where the exact field is infinite. ` +
          'Move the observer by a cell or more.',
      );
    }
    if (response.at(axis, site, x, y, z)) visit(edge);
  }
}

/**
 * Time steps between instants.
 * @throws RangeError when they are not evenly spaced by whole time steps
 */
export function stride(instants: Instants, timeStep: number): number {
  const { count, E, H } = instants;
  if (count < 2) return 1;
  const every = Math.round((E[1]! - E[0]!) / timeStep);
  const last = (count - 1) * every * timeStep;
  const off = Math.max(Math.abs(E[count - 1]! - E[0]! - last), Math.abs(H[count - 1]! - H[0]! - last));
  if (every < 1 || off > 1e-6 * timeStep)
    throw new RangeError(
      `Instants ${E[0]} s, ${E[1]} s, … are not evenly spaced by whole time steps of ${timeStep} s. ` +
        'Use the instants of a run.',
    );
  return every;
}

/** Least and greatest delay (s) from any pair to any site. */
export function delayRange(currents: EdgeCurrents, lattice: Lattice, points: SamplePoints): [number, number] {
  let square = 0;
  for (let a = 0; a < 3; a++) {
    let least = Number.POSITIVE_INFINITY;
    let most = Number.NEGATIVE_INFINITY;
    for (let p = 0; p < points.count; p++) {
      least = Math.min(least, points.cell[3 * p + a]!);
      most = Math.max(most, points.cell[3 * p + a]!);
    }
    let reach = 0;
    for (let e = 0; e < currents.count; e++) {
      const node = currents.node[3 * e + a]!;
      reach = Math.max(reach, Math.abs(most - node), Math.abs(node - least));
    }
    const side = (reach + 0.5) * lattice.cellSize[a]!;
    square += side * side;
  }
  let least = Number.POSITIVE_INFINITY;
  let most = Number.NEGATIVE_INFINITY;
  for (const delay of currents.delay) {
    least = Math.min(least, delay);
    most = Math.max(most, delay);
  }
  return [least, most + Math.sqrt(square) / lattice.medium.speed];
}
