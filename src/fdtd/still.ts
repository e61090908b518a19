import { AXES } from './layout.ts';
import type { GridProblem } from './problem.ts';

/**
 * The first step at which every sample can be still: what radiates (w′ above `level` of its peak) has left the sources,
 * and the last of it has crossed from any source edge to the farthest sample.
 */
export function earliestStill(problem: GridProblem, level: number): number {
  const { currents, medium, timeStep, cellSize } = problem;
  let lastLeft = 0;
  for (let e = 0; e < currents.count; e++)
    for (let p = currents.pairStart[e]!; p < currents.pairStart[e + 1]!; p++)
      lastLeft = Math.max(
        lastLeft,
        currents.delay[p]! + currents.waveforms[currents.waveform[p]!]!.lastActivity(level),
      );
  const farthest = AXES.map((a) => {
    const edge = spread(currents.node, a);
    const samples = problem.samples.map((group) => spread(group.cell, a));
    const reach = samples.map((s) => Math.max(s.high + 1 - edge.low, edge.high + 1 - s.low));
    return Math.max(0, ...reach) * cellSize[a];
  });
  const crossing = Math.sqrt(farthest.reduce((sum, d) => sum + d * d, 0)) / medium.speed;
  return Math.ceil((lastLeft + crossing) / timeStep);
}

function spread(indices: Int32Array, axis: number): { low: number; high: number } {
  let low = Infinity;
  let high = -Infinity;
  for (let n = axis; n < indices.length; n += 3) {
    low = Math.min(low, indices[n]!);
    high = Math.max(high, indices[n]!);
  }
  return { low, high };
}
