import Papa from 'papaparse';
import { Refusal } from '../run/compare.ts';
import { questionOf } from '../run/question.ts';
import { loadScenario } from '../scenario/load.ts';

/**
 * The currents that a scenario puts on grid edges, instant by instant, as CSV: what to drive another solver with, so that
 * both have the very same source. A row an edge: `axis,i,j,k` (from node (i, j, k) of the box along the axis), `x,y,z` its
 * middle and `length` (m), then its current (A, positive along the axis) at each instant (n+½)Δt, s, that the header names.
 * @throws Refusal for a scenario with problems
 */
export function currentsCommand(scenarioInput: unknown): string {
  const loaded = loadScenario(scenarioInput);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { grid } = loaded.scenario;
  const { gridded, timeStep, steps } = questionOf(loaded.scenario);
  const { edges } = gridded;
  const instants = Array.from({ length: steps }, (_, n) => (n + 0.5) * timeStep);
  const rows: (string | number)[][] = [['axis', 'i', 'j', 'k', 'x', 'y', 'z', 'length', ...instants]];
  for (let e = 0; e < edges.count; e++) {
    const axis = edges.axis[e]!;
    const node = [...edges.node.subarray(3 * e, 3 * e + 3)];
    const middle = node.map((n, a) => grid.box.from[a]! + (n + (a === axis ? 0.5 : 0)) * grid.cellSize[a]!);
    const currents = instants.map((t) => {
      let sum = 0;
      for (let p = edges.pairStart[e]!; p < edges.pairStart[e + 1]!; p++)
        sum += edges.weight[p]! * edges.waveforms[edges.waveform[p]!]!.value(t - edges.delay[p]!);
      return sum;
    });
    rows.push(['xyz'[axis]!, ...node, ...middle, grid.cellSize[axis]!, ...currents]);
  }
  return `${Papa.unparse(rows, { newline: '\n' })}\n`;
}
