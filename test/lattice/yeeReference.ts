import type { EdgeCurrents } from '../../src/gridding/edges.ts';
import type { Lattice } from '../../src/lattice/lattice.ts';
import type { Instants, SamplePoints } from '../../src/trace/trace.ts';

/** Cells beyond the light cones that are marched too, for the lattice's faint forerunners. */
const MARGIN = 9;

/**
 * Yee's scheme in double precision and its plainest form, without walls: at each step it marches the cells that the
 * currents can have reached and that can still reach a sample, so that nothing comes back. E at (n+1)Δt and H at
 * (n+3/2)Δt after step n, as `instantsOf(steps, timeStep)` says; values in the layout of FieldHistory.
 */
export function yeeField(
  currents: EdgeCurrents,
  lattice: Lattice,
  points: SamplePoints,
  instants: Instants,
): Float64Array {
  const { cellSize: d, timeStep, medium } = lattice;
  const steps = instants.count;
  const source = ballAround(currents.node, d);
  const samples = Array.from({ length: points.count }, (_, p) => ballAround(points.cell.subarray(3 * p, 3 * p + 3), d));
  const travel = medium.speed * timeStep * steps;
  const margin = MARGIN * Math.max(...d);

  // All that matters lies in the ellipsoids |x − source| + |x − sample| ≤ travel, inside these boxes about their middles.
  const corner = (sign: -1 | 1) =>
    [0, 1, 2].map((a) => {
      const ends = samples.map(({ centre, radius }) => {
        const reach = Math.max(travel + source.radius + radius, Math.abs(centre[a]! - source.centre[a]!));
        return (sign * (source.centre[a]! + centre[a]!)) / 2 + reach / 2 + margin;
      });
      return sign * (Math.ceil(Math.max(...ends) / d[a]!) + 2);
    });
  const lower = corner(-1);
  const size = corner(1).map((upper, a) => upper - lower[a]! + 1);
  const sy = size[0]!;
  const sz = size[0]! * size[1]!;
  const [Ex, Ey, Ez, Hx, Hy, Hz] = Array.from({ length: 6 }, () => new Float64Array(sz * size[2]!));
  const fields = [Ex!, Ey!, Ez!, Hx!, Hy!, Hz!];
  const indexOf = (list: Int32Array, n: number) =>
    list[3 * n]! - lower[0]! + sy * (list[3 * n + 1]! - lower[1]!) + sz * (list[3 * n + 2]! - lower[2]!);

  /** Rows of cells within the source's cone and a sample's: calls visit(first index, last index + 1). */
  const rows = (step: number, visit: (from: number, to: number) => void) => {
    const reached = source.radius + medium.speed * timeStep * (step + 1) + margin;
    const reaching = medium.speed * timeStep * (steps - step) + margin;
    for (let k = 1; k < size[2]! - 1; k++) {
      const z = (lower[2]! + k) * d[2];
      for (let j = 1; j < size[1]! - 1; j++) {
        const y = (lower[1]! + j) * d[1];
        const half = halfChord(source.centre, reached, y, z);
        if (half < 0) continue;
        let low = Number.POSITIVE_INFINITY;
        let high = Number.NEGATIVE_INFINITY;
        for (const { centre, radius } of samples) {
          const other = halfChord(centre, reaching + radius, y, z);
          if (other < 0) continue;
          low = Math.min(low, centre[0]! - other);
          high = Math.max(high, centre[0]! + other);
        }
        low = Math.max(low, source.centre[0]! - half) / d[0];
        high = Math.min(high, source.centre[0]! + half) / d[0];
        const from = Math.max(1, Math.ceil(low) - lower[0]!);
        const to = Math.min(size[0]! - 1, Math.floor(high) - lower[0]! + 1);
        if (to > from) visit(sy * j + sz * k + from, sy * j + sz * k + to);
      }
    }
  };

  const [ex, ey, ez] = d.map((h) => timeStep / (medium.permittivity * h)) as [number, number, number];
  const [hx, hy, hz] = d.map((h) => timeStep / (medium.permeability * h)) as [number, number, number];
  const advanceE = (from: number, to: number) => {
    for (let p = from; p < to; p++) {
      Ex![p]! += ey * (Hz![p]! - Hz![p - sy]!) - ez * (Hy![p]! - Hy![p - sz]!);
      Ey![p]! += ez * (Hx![p]! - Hx![p - sz]!) - ex * (Hz![p]! - Hz![p - 1]!);
      Ez![p]! += ex * (Hy![p]! - Hy![p - 1]!) - ey * (Hx![p]! - Hx![p - sy]!);
    }
  };
  const advanceH = (from: number, to: number) => {
    for (let p = from; p < to; p++) {
      Hx![p]! += hz * (Ey![p + sz]! - Ey![p]!) - hy * (Ez![p + sy]! - Ez![p]!);
      Hy![p]! += hx * (Ez![p + 1]! - Ez![p]!) - hz * (Ex![p + sz]! - Ex![p]!);
      Hz![p]! += hy * (Ex![p + sy]! - Ex![p]!) - hx * (Ey![p + 1]! - Ey![p]!);
    }
  };
  const values = new Float64Array(points.count * 6 * steps);
  const record = (first: number, n: number) => {
    for (let p = 0; p < points.count; p++)
      for (let c = first; c < first + 3; c++) values[(p * 6 + c) * steps + n] = fields[c]![indexOf(points.cell, p)]!;
  };
  const area = [d[1] * d[2], d[2] * d[0], d[0] * d[1]];
  // H starts at Δt/2 from fields at rest: the first step's E must see no current before (0 + ½)Δt.
  for (let n = 0; n < steps; n++) {
    rows(n, advanceE);
    for (let e = 0; e < currents.count; e++) {
      const axis = currents.axis[e]!;
      let current = 0;
      for (let p = currents.pairStart[e]!; p < currents.pairStart[e + 1]!; p++)
        current +=
          currents.weight[p]! *
          currents.waveforms[currents.waveform[p]!]!.value((n + 0.5) * timeStep - currents.delay[p]!);
      fields[axis]![indexOf(currents.node, e)]! -= (timeStep * current) / (medium.permittivity * area[axis]!);
    }
    record(0, n);
    rows(n, advanceH);
    record(3, n);
  }
  return values;
}

/** Half the length of a ball's chord along x at (y, z); negative outside the ball. */
function halfChord(centre: readonly number[], radius: number, y: number, z: number): number {
  const square = radius * radius - (y - centre[1]!) ** 2 - (z - centre[2]!) ** 2;
  return square < 0 ? -1 : Math.sqrt(square);
}

/** A ball around cells given by their indices. */
function ballAround(cells: Int32Array, d: readonly [number, number, number]) {
  const centre = [0, 1, 2].map((a) => {
    const along = Array.from(cells).filter((_, n) => n % 3 === a);
    return ((Math.min(...along) + Math.max(...along) + 1) / 2) * d[a]!;
  });
  let radius = 0;
  for (let n = 0; n < cells.length; n += 3)
    radius = Math.max(radius, Math.hypot(...centre.map((x, a) => (cells[n + a]! + 0.5) * d[a]! - x)));
  return { centre, radius: radius + Math.hypot(...d) };
}
