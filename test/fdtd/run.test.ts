import { describe, expect, test } from 'vitest';
import { memoryNeeded } from '../../src/fdtd/layout.ts';
import { packProblem, unpackProblem } from '../../src/fdtd/pack.ts';
import { lead, marchAlone, prepareGridRun } from '../../src/fdtd/run.ts';
import { makeWaveform } from '../../src/scenario/waveforms.ts';
import { instantsOf } from '../../src/trace/trace.ts';
import { cpml, edgesOf, everyFace, PULSE, plainProblem } from './problems.ts';

const early = makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0.1e-9, sigma: 0.02e-9 });

const problem = plainProblem([12, 10, 9], {
  steps: 53,
  boundary: everyFace(cpml(4)),
  pad: everyFace(4),
  currents: edgesOf([{ axis: 1, node: [5, 5, 5] }], early),
  samples: [
    { cell: Int32Array.from([3, 3, 3, 8, 7, 6]), every: 1 },
    { cell: Int32Array.from([8, 7, 6, 0, 0, 0, 11, 9, 8]), every: 7 },
  ],
});

test('a memory that an earlier run has used gives the same bits as a fresh one', () => {
  const larger = prepareGridRun({ ...problem, boxCells: [16, 14, 12] });
  lead(larger);
  const run = prepareGridRun(problem, { memory: larger.setup.memory });
  expect(run.setup.memory).toBe(larger.setup.memory);
  expect(lead(run).samples).toEqual(marchAlone(problem).samples);
  // One that is too small is left alone.
  const small = prepareGridRun(problem).setup.memory;
  expect(prepareGridRun({ ...problem, boxCells: [60, 60, 60] }, { memory: small }).setup.memory).not.toBe(small);
});

describe('samples', () => {
  const { samples } = marchAlone(problem);

  test('come at the instants of the trace, the last step included', () => {
    expect(samples[0]!.length).toBe(2 * 6 * instantsOf(53, 1).count);
    expect(samples[1]!.length).toBe(3 * 6 * instantsOf(53, 1, 7).count);
    const every = 53;
    const seventh = instantsOf(53, 1, 7).count;
    // Point 0 of the second group is point 1 of the first.
    for (let c = 0; c < 6; c++)
      for (let m = 0; m < seventh; m++)
        expect(samples[1]![c * seventh + m]).toBe(samples[0]![(6 + c) * every + 52 - 7 * (seventh - 1 - m)]);
  });

  test('are zero to the last bit until the front can have come, and not after', () => {
    const before = samples[0]!.subarray(6 * 53, 6 * 53 + 2);
    expect([...before]).toEqual([0, 0]);
    expect(samples[0]!.some((value) => value !== 0)).toBe(true);
  });

  test('do not depend on how the run is cut up', () => {
    for (const schedule of [{ batchSteps: 1 }, { blockSteps: 3, batchSteps: 7 }, { order: 'sweep' as const }])
      expect(marchAlone(problem, { schedule }).samples).toEqual(samples);
  });

  test('are the same when the problem has travelled to another thread', () => {
    expect(marchAlone(unpackProblem(structuredClone(packProblem(problem)))).samples).toEqual(samples);
  });
});

describe('stopping', () => {
  test('a cancelled run ends within the plane it is on and says how far it came', () => {
    let asked = 0;
    const result = marchAlone({ ...problem, steps: 2000 }, { cancelled: () => ++asked >= 300 });
    expect(result.outcome).toBe('cancelled');
    expect(result.stepsMarched).toBeLessThan(2000);
    expect(asked).toBeLessThan(303);
  });

  test('progress is told after every batch', () => {
    const seen: number[] = [];
    marchAlone(problem, { schedule: { batchSteps: 20 }, onProgress: (done) => seen.push(done) });
    expect(seen).toEqual([20, 40, 53]);
  });

  test('a run in free space whose field has settled is held at its last values', () => {
    const level = 1e-4;
    // Walls 70 cells away: what they reflect is back after 250 steps.
    const steps = 240;
    // A pulse of 10 steps a sigma that leaves charge behind, so that what is held is not zero.
    const free = plainProblem([10, 10, 10], {
      steps,
      pad: everyFace(70),
      currents: edgesOf(
        [{ axis: 1, node: [5, 5, 5] }],
        makeWaveform({ type: 'gaussian', amplitude: 1, delay: 0.6e-9, sigma: 0.1e-9 }),
      ),
      samples: [
        { cell: Int32Array.from([3, 3, 3, 8, 7, 6]), every: 1 },
        { cell: Int32Array.from([8, 7, 6]), every: 7 },
      ],
      activeRegion: { margin: 8 },
    });
    const whole = marchAlone(free);
    const stopped = marchAlone(free, { stopWhenStill: { level }, schedule: { batchSteps: 32 } });
    expect(stopped.outcome).toBe('still');
    console.table({ still: stopped.stepsMarched, steps, updates: stopped.cellUpdates, without: whole.cellUpdates });
    expect(stopped.stepsMarched).toBeLessThan(200);
    // The rest would have moved by less than the last batch did, which was below the level.
    for (const [g, values] of whole.samples.entries()) {
      const count = instantsOf(steps, 1, free.samples[g]!.every).count;
      for (let vector = 0; vector < values.length; vector += 3 * count) {
        const moved = (m: number, of: (at: number) => number) =>
          Math.hypot(...[0, 1, 2].map((c) => of(vector + c * count + m)));
        const instants = Array.from({ length: count }, (_, m) => m);
        const peak = Math.max(...instants.map((m) => moved(m, (at) => values[at]!)));
        const held = Math.max(...instants.map((m) => moved(m, (at) => values[at]! - stopped.samples[g]![at]!)));
        expect(held).toBeLessThan(level * peak);
        expect(peak).toBeGreaterThan(0);
      }
    }
    // Coulomb's field of the two charges is there to stay.
    expect(Math.abs(stopped.samples[0]![steps - 1]!)).toBeGreaterThan(0.1);
  });

  test('a box that rings is never still', () => {
    const ringing = plainProblem([8, 8, 8], {
      ...problem,
      boxCells: [8, 8, 8],
      boundary: everyFace({ type: 'pec' }),
      pad: everyFace(2),
      steps: 600,
      samples: [{ cell: Int32Array.from([3, 3, 3]), every: 1 }],
    });
    expect(marchAlone(ringing, { stopWhenStill: { level: 1e-5 } }).outcome).toBe('done');
  });
});

describe('refusals', () => {
  test('a lattice beyond the address space names grid.cellSize, before memory is taken', () => {
    const huge = plainProblem([700, 700, 700], { precision: 'single' });
    expect(() => prepareGridRun(huge)).toThrow(/grid\.cellSize 0\.005 m.*700 × 700 × 700 cells/);
    expect(() => memoryNeeded(huge)).toThrow(RangeError);
  });

  test('memory is told beforehand: six fields of the padded lattice and the layers’ variables', () => {
    const { bytes, cells } = memoryNeeded(plainProblem([100, 100, 100], { precision: 'single' }));
    expect(cells).toBe(1e6);
    expect(bytes).toBeGreaterThan(6 * 4 * 1e6);
    expect(bytes).toBeLessThan(1.15 * 6 * 4 * 1e6);
    const layered = memoryNeeded(
      plainProblem([80, 80, 80], { precision: 'single', boundary: everyFace(cpml(10)), pad: everyFace(10) }),
    );
    // Twelve variables in a fifth of the cells, whole vectors of them along x.
    expect(layered.bytes - bytes).toBeGreaterThan(12 * 4 * 0.2e6);
    expect(layered.bytes - bytes).toBeLessThan(1.3 * 12 * 4 * 0.2e6);
  });

  test('at 200³ with 10 layers all of it is less than 32 bytes a cell', () => {
    const { bytes, cells } = memoryNeeded(
      plainProblem([180, 180, 180], { precision: 'single', boundary: everyFace(cpml(10)), pad: everyFace(10) }),
    );
    expect(cells).toBe(8e6);
    console.log(`200³ with 10 layers: ${(bytes / cells).toFixed(2)} B a cell`);
    expect(bytes / cells).toBeLessThan(32);
  });

  test.each([
    [
      'a source on the wall',
      {
        pad: everyFace(0),
        boundary: everyFace({ type: 'pec' as const }),
        currents: edgesOf([{ axis: 2, node: [0, 5, 5] }], PULSE),
      },
      /source edge 0 along z/,
    ],
    ['a sample outside', { samples: [{ cell: Int32Array.from([16, 0, 0]), every: 1 }] }, /sample cell \(16, 0, 0\)/],
    ['layers without a pad', { pad: everyFace(3) }, /face x- has 4 layers/],
    ['no steps', { steps: 0 }, /duration/],
    [
      'one cell',
      {
        boxCells: [1, 10, 10] as [number, number, number],
        pad: everyFace(0),
        boundary: everyFace({ type: 'pec' as const }),
      },
      /1 cell along x/,
    ],
    ['no expected peak', { scale: 0 }, /peak voltage/],
  ])('%s', (_, changes, message) => {
    expect(() => prepareGridRun({ ...problem, ...changes })).toThrow(message);
  });

  test('a run led by nobody’s help does not hang when it is called off', () => {
    let asked = 0;
    const result = lead(prepareGridRun(problem, { threads: 2 }), { cancelled: () => ++asked > 5 });
    expect(result.outcome).toBe('cancelled');
  });
});
