import { describe, expect, test } from 'vitest';
import { marchAlone } from '../../src/fdtd/run.ts';
import { CHANNELS, filmOf, framesOf, sliceOf, staggeredAlong, withBelow } from '../../src/run/planes.ts';
import { boxProblem, questionOf } from '../../src/run/question.ts';
import { distanceToSources } from '../../src/scenario/distance.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';
import { loadScenario } from '../../src/scenario/load.ts';
import type { Axis, Scenario } from '../../src/scenario/model.ts';
import { COMPONENTS, samplePoints } from '../../src/trace/trace.ts';

function scenarioOf(json: unknown): Scenario {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Error(loaded.problems[0]!.message);
  return loaded.scenario;
}

const small = scenarioOf({
  ...EXAMPLES['dipole-near-corner'],
  grid: { cellSize: '10 mm', box: EXAMPLES['dipole-near-corner'].grid.box, boundary: { type: 'cpml', layers: 4 } },
  duration: '2 ns',
});

describe('slices', () => {
  test('lie on the layer of nodes nearest to the plane, within the box', () => {
    for (const [at, layer] of [
      [-0.1, 1],
      [0.012, 11],
      [0.1, 19],
    ] as const)
      expect(sliceOf(small, { name: 'p', normal: 1, at }).layer).toBe(layer);
  });

  test('a large plane is thinned evenly, and reaches from one side to the other', () => {
    const wide: Scenario = { ...small, grid: { ...small.grid, cells: [250, 30, 90] } };
    const { stride, nu, nv, cells } = sliceOf(wide, { name: 'p', normal: 1, at: 0 });
    expect([stride, nu, nv]).toEqual([3, 84, 30]);
    expect([...cells.subarray(cells.length - 3)]).toEqual([249, 10, 87]);
  });

  test('cells with a site on a source are holes, others are not', () => {
    const { grid, sources } = small;
    const slice = sliceOf(small, { name: 'p', normal: 1, at: 0.06 });
    const { position } = samplePoints(withBelow(slice.cells, 1), grid.box.from, grid.cellSize);
    const count = slice.nu * slice.nv;
    slice.hole.forEach((hole, p) => {
      const distances = [p, p + count].flatMap((point) =>
        COMPONENTS.map((_, c) => {
          const n = (point * 6 + c) * 3;
          return distanceToSources(sources, [position[n]!, position[n + 1]!, position[n + 2]!]);
        }),
      );
      expect(hole).toBe(Math.min(...distances) < 0.3 * grid.cellSize[0] ? 1 : 0);
    });
    expect(slice.hole.some((hole) => hole === 1)).toBe(true);
  });
});

describe('films', () => {
  test('hand over every picture once, as the run reads it, in pieces that join', () => {
    const question = questionOf(small);
    const { every, instants } = filmOf(question);
    for (const normal of [0, 1, 2] as Axis[]) {
      const slice = sliceOf(small, { name: 'p', normal, at: 0 });
      const cells = slice.nu * slice.nv;
      const shapes = [{ cells, normal }];
      const film = new Float32Array(instants.count * CHANNELS * cells);
      let shown = 0;
      const pieces: number[] = [];
      const problem = boxProblem(question, [{ cell: withBelow(slice.cells, normal), every }]);
      const { samples } = marchAlone(problem, {
        onSamples: ([group]) => {
          const { first, count, slices } = framesOf(group!.values, instants.count, shown, group!.taken, shapes);
          expect(first).toBe(shown);
          film.set(slices[0]!, first * CHANNELS * cells);
          shown += count;
          pieces.push(count);
        },
      });
      expect(shown).toBe(instants.count);
      expect(pieces.length).toBeGreaterThan(1);
      const lower = staggeredAlong(normal);
      for (let channel = 0; channel < CHANNELS; channel++)
        for (let p = 0; p < cells; p += 7)
          for (let frame = 0; frame < instants.count; frame += 5) {
            const component = channel < 6 ? channel : lower[channel - 6]!;
            const point = channel < 6 ? p : cells + p;
            const value = samples[0]![(point * 6 + component) * instants.count + frame]!;
            expect(film[(frame * CHANNELS + channel) * cells + p]).toBe(Math.fround(value));
          }
    }
  });

  test('have at most a hundred pictures, the last instant among them', () => {
    const question = questionOf(small);
    const { instants } = filmOf({ ...question, steps: 2345 });
    expect(instants.count).toBeLessThanOrEqual(100);
    expect(instants.E.at(-1)).toBeCloseTo(2345 * question.timeStep, 18);
  });
});
