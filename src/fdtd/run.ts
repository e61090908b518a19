/**
 * Running a grid problem on one or more threads that share the kernel's memory. One thread leads: it prepares each batch
 * of steps, marches its share, collects samples, reports progress and looks whether it should go on. The others follow.
 *
 *   prepareGridRun ──> lead(run, …) on one thread          marchAlone(problem) does both in the calling thread
 *                └──> follow(run.setup) on the others
 */
import { sampleTable, sourceTable, sourceVoltage } from './currents.ts';
import {
  BLOCK_BYTES,
  FIELDS,
  type GridKernel,
  gridKernel,
  MOST_THREADS,
  SAMPLE_GROUPS,
  STEP_BYTES,
  VECTOR,
} from './kernel.ts';
import { AXES, Bump, configure, type Layout, layoutOf, realsOf, writeTables } from './layout.ts';
import type { GridProblem } from './problem.ts';
import { type CellBox, type Region, regionOf } from './region.ts';
import { type Collection, collect, collectionOf, holdFrom, keptBetween, keptIndex, Watch } from './samples.ts';
import { type Block, blocksOf, type Schedule, scheduleOf, writeBlocks } from './schedule.ts';
import { earliestStill } from './still.ts';

export interface GridOptions {
  /** threads that will work on the run, the leader included; 1 by default */
  readonly threads?: number;
  /** where the schedule should differ from the one chosen by working set */
  readonly schedule?: Partial<Schedule>;
  /** memory of an earlier run that is over; taken where it is large enough, since first touching fresh memory costs time */
  readonly memory?: WebAssembly.Memory;
  /** cells to update, in place of those that `problem.activeRegion` asks for */
  readonly region?: Region;
}

/** The machine does not give the memory that a run needs. */
export class OutOfMemory extends Error {
  override readonly name = 'OutOfMemory';
}

/** What a following thread needs; structured-cloneable. */
export interface GridSetup {
  readonly memory: WebAssembly.Memory;
  readonly layout: Layout;
  readonly threads: number;
  readonly schedule: Schedule;
  readonly tables: Tables;
  readonly collections: readonly Collection[];
}

/** Addresses of what the driver prepares: once for the run, and anew for each batch. */
interface Tables {
  readonly sourceStarts: number;
  readonly sourceEdges: number;
  readonly sampleTables: number;
  readonly groups: number;
  readonly steps: number;
  readonly blocks: number;
  readonly sourceValues: number;
  readonly sampleBuffers: readonly number[];
}

/** A run ready to march. Everything but `problem` (its waveforms) and `region` is structured-cloneable. */
export interface GridRun {
  readonly problem: GridProblem;
  readonly setup: GridSetup;
  readonly sourceOrder: Uint32Array;
  readonly region?: Region;
}

export interface LeadHooks {
  /** called after each batch */
  readonly onProgress?: (stepsDone: number) => void;
  /** called after each batch with every group's samples so far, of which the first `taken` instants are filled */
  readonly onSamples?: (groups: readonly { readonly values: Float64Array; readonly taken: number }[]) => void;
  /** asked about once a plane; true ends the run */
  readonly cancelled?: () => boolean;
  /** end the run once no sample's field moves any more by more than this fraction of its own peak, and hold the values */
  readonly stopWhenStill?: { readonly level: number };
  /** called when the fields hold their start value and nothing has been marched */
  readonly onStart?: (setup: GridSetup) => void;
}

export interface GridResult {
  readonly outcome: 'done' | 'still' | 'cancelled';
  /**
   * for each group of samples: values[(point·6 + component)·count + m], V/m and A/m; in a SharedArrayBuffer when more
   * than one thread worked on the run
   */
  readonly samples: readonly Float64Array[];
  /** less than the problem's steps when the field was still or the run cancelled */
  readonly stepsMarched: number;
  /** cells updated, E and H together counted once */
  readonly cellUpdates: number;
  /** wall time of marching alone, s */
  readonly seconds: number;
}

/** Indices of the 32-bit words by which leader and followers talk; see also assembly/fdtd/memory.ts. */
const STOP = 256;
const ORDERS = 512;
const COMMAND = 513;
const ADDRESS = 514;
const COUNT = 515;
const DONE = 528;
const JOINED = 544;
const WORDS = 1024;

const FILL = 1;
const MARCH = 2;
const SWEEP = 3;
const COLLECT = 4;
const LEAVE = 5;

/**
 * Allocates the memory of a run and writes what does not change while it marches.
 * @throws RangeError naming quantity, value, limit and remedy, where the problem cannot be run; OutOfMemory
 */
export function prepareGridRun(problem: GridProblem, options: GridOptions = {}): GridRun {
  const threads = options.threads ?? 1;
  if (!Number.isInteger(threads) || threads < 1 || threads > MOST_THREADS)
    throw new RangeError(`threads is ${threads}; it must be a whole number from 1 to ${MOST_THREADS}.`);
  if (!Number.isInteger(problem.steps) || problem.steps < 1)
    throw new RangeError(`the run has ${problem.steps} steps; it needs at least 1. Raise duration.`);
  if (problem.samples.length > SAMPLE_GROUPS)
    throw new RangeError(`the run has ${problem.samples.length} groups of samples; at most ${SAMPLE_GROUPS} are read.`);
  const layout = layoutOf(problem);
  const sources = sourceTable(problem, layout);
  const samples = problem.samples.map((group) => sampleTable(group.cell, layout));

  const sampleBytes = (g: number) => samples[g]!.order.length * 6 * layout.real;
  const perStep = problem.samples.reduce((sum, { every }, g) => sum + sampleBytes(g) / every, 0);
  const schedule = scheduleOf(layout, threads, perStep, options.schedule);
  const { batchSteps, blockSteps } = schedule;

  const bump = new Bump(layout.end);
  const rows = layout.cells[1] * layout.cells[2];
  const tables: Tables = {
    sourceStarts: bump.take(4 * (rows + 1)),
    sourceEdges: bump.take(4 * sources.order.length),
    sampleTables: bump.take(8 * samples.length),
    groups: samples.length,
    steps: bump.take(batchSteps * STEP_BYTES),
    blocks: bump.take((Math.ceil(batchSteps / blockSteps) + 1) * BLOCK_BYTES),
    sourceValues: bump.take(batchSteps * sources.order.length * layout.real),
    sampleBuffers: problem.samples.map(({ every }, g) => bump.take(Math.ceil(batchSteps / every) * sampleBytes(g))),
  };
  const groupTables = samples.map((s) => [bump.take(s.rowStart.byteLength), bump.take(s.offsets.byteLength)] as const);
  const memory =
    options.memory && fits(options.memory, bump.next) ? cleared(options.memory) : allocate(bump.next, problem);

  writeTables(problem, layout, memory);
  const words = (address: number, values: Uint32Array) =>
    new Uint32Array(memory.buffer, address, values.length).set(values);
  words(tables.sourceStarts, sources.rowStart);
  words(tables.sourceEdges, sources.addresses);
  words(tables.sampleTables, new Uint32Array(groupTables.flat()));
  samples.forEach((s, g) => {
    words(groupTables[g]![0], s.rowStart);
    words(groupTables[g]![1], s.offsets);
  });
  const collections = problem.samples.map((group, g) =>
    collectionOf(problem, group, samples[g]!.order, layout.bias, tables.sampleBuffers[g]!, threads > 1),
  );
  return {
    problem,
    setup: { memory, layout, threads, schedule, tables, collections },
    sourceOrder: sources.order,
    ...(options.region ? { region: options.region } : {}),
  };
}

const fits = (memory: WebAssembly.Memory, bytes: number): boolean => memory.buffer.byteLength >= bytes;

/** The memory of a run that is over, its words and progress counters at rest. Fields and ψ are filled by the next run. */
function cleared(memory: WebAssembly.Memory): WebAssembly.Memory {
  new Uint8Array(memory.buffer, 0, FIELDS).fill(0);
  return memory;
}

function allocate(bytes: number, problem: GridProblem): WebAssembly.Memory {
  const pages = Math.ceil(bytes / 65536);
  const words = (why: string) =>
    `the run needs ${(bytes / 2 ** 30).toFixed(2)} GiB of address space; ${why}. ` +
    `Raise grid.cellSize (now ${problem.cellSize.join(' × ')} m), shrink grid.box or read fewer samples.`;
  if (pages > 65536) throw new RangeError(words('4 GiB is the limit of 32-bit WebAssembly'));
  try {
    return new WebAssembly.Memory({ initial: pages, maximum: pages, shared: true });
  } catch {
    throw new OutOfMemory(words('this machine does not give as much'));
  }
}

/** A kernel on this thread, told all that the setup holds. */
function readyKernel(setup: GridSetup, interrupted: () => boolean): GridKernel {
  const { layout, memory, tables } = setup;
  const kernel = gridKernel(layout.fused ? 'fused' : layout.precision, layout.build, memory, interrupted);
  configure(kernel, layout);
  kernel.sources(tables.sourceStarts, tables.sourceEdges);
  kernel.samples(tables.groups, tables.sampleTables);
  return kernel;
}

/**
 * Gives this thread's share of the fields, of ψ and of what walls remember its start value. It is also the first to touch that memory, which
 * costs more than writing it: better by all threads at once, and before the clock of the march runs.
 */
function fillShare(
  kernel: GridKernel,
  { layout, threads }: GridSetup,
  thread: number,
  interrupted: () => boolean,
): boolean {
  const share = (from: number, bytes: number, value: number) => {
    const vectors = bytes / VECTOR;
    const bound = (t: number) => from + Math.floor((vectors * t) / threads) * VECTOR;
    kernel.fill(bound(thread), bound(thread + 1), value);
  };
  for (let field = 0; field < 6; field++) {
    if (interrupted()) return false;
    share(FIELDS + field * layout.stride, layout.fieldBytes, layout.bias);
  }
  share(layout.memory[0], layout.memory[1] - layout.memory[0], 0);
  for (const { from, to, value } of layout.walls.fills) share(from, to - from, value);
  return true;
}

/**
 * What every thread does at a command; false when the run was called off meanwhile.
 * @param address of blocks (MARCH) or steps (SWEEP), or the first step of the batch (COLLECT)
 */
function perform(
  kernel: GridKernel,
  setup: GridSetup,
  thread: number,
  command: number,
  address: number,
  count: number,
  gatherings: number,
  interrupted: () => boolean,
): boolean {
  if (command === MARCH) return kernel.march(thread, setup.threads, address, count) !== 0;
  if (command === SWEEP) return kernel.sweep(thread, setup.threads, address, count, gatherings) !== 0;
  if (command === COLLECT) {
    const reals = realsOf(setup.layout, setup.memory);
    for (const collection of setup.collections) collect(collection, reals, address, count, thread, setup.threads);
    return true;
  }
  return fillShare(kernel, setup, thread, interrupted);
}

/** Ends a run on all its threads, from any other: where one of them is lost, the rest would wait for it. */
export function callOff({ memory }: GridSetup): void {
  const words = new Int32Array(memory.buffer, 0, WORDS);
  Atomics.store(words, STOP, 1);
  for (const word of [ORDERS, DONE]) Atomics.notify(words, word);
}

/**
 * Helps a leading thread until it is done or the run is called off; blocks the calling thread, which must not be a page's
 * main thread.
 */
export function follow(setup: GridSetup): void {
  const words = new Int32Array(setup.memory.buffer, 0, WORDS);
  const thread = Atomics.add(words, JOINED, 1) + 1;
  if (thread >= setup.threads) return;
  const calledOff = () => Atomics.load(words, STOP) !== 0;
  const kernel = readyKernel(setup, calledOff);
  let gatherings = 0;
  for (let order = 1; ; order++) {
    while (Atomics.load(words, ORDERS) < order) {
      if (calledOff()) return;
      Atomics.wait(words, ORDERS, order - 1, 1000);
    }
    const command = words[COMMAND]!;
    const count = words[COUNT]!;
    if (command === LEAVE) return;
    perform(kernel, setup, thread, command, words[ADDRESS]! >>> 0, count, gatherings, calledOff);
    if (command === SWEEP) gatherings += 2 * count;
    Atomics.add(words, DONE, 1);
    Atomics.notify(words, DONE);
  }
}

/**
 * Marches a run, with the help of `threads − 1` followers where it was prepared for them (it waits for them to come).
 * Blocks the calling thread, which must not be a page's main thread when there are followers.
 */
export function lead(run: GridRun, hooks: LeadHooks = {}): GridResult {
  const { problem, setup } = run;
  const { schedule, threads, memory, tables } = setup;
  const words = new Int32Array(memory.buffer, 0, WORDS);
  const cancelled = () => Atomics.load(words, STOP) !== 0 || hooks.cancelled?.() === true;
  const kernel = readyKernel(setup, cancelled);
  let gatherings = 0;

  /** Has all threads do something; false when the run was called off. */
  const order = (command: number, address: number, count: number): boolean => {
    words[COMMAND] = command;
    words[ADDRESS] = address;
    words[COUNT] = count;
    const orders = Atomics.add(words, ORDERS, 1) + 1;
    Atomics.notify(words, ORDERS);
    if (command === LEAVE) return true;
    const finished = perform(kernel, setup, 0, command, address, count, gatherings, cancelled);
    if (command === SWEEP) gatherings += 2 * count;
    for (let done = 0; done < orders * (threads - 1); ) {
      done = Atomics.load(words, DONE);
      if (done < orders * (threads - 1)) {
        if (cancelled()) return false;
        Atomics.wait(words, DONE, done, 20);
      }
    }
    return finished;
  };

  const watches = hooks.stopWhenStill ? setup.collections.map((collection) => new Watch(collection)) : [];
  const region = run.region ?? regionOf(problem);
  const stillFrom = hooks.stopWhenStill ? earliestStill(problem, hooks.stopWhenStill.level) : Infinity;
  let cellUpdates = 0;
  let seconds = 0;
  let outcome: GridResult['outcome'] = 'done';
  let done = 0;
  let last: Block | undefined;
  try {
    if (!order(FILL, 0, 0)) outcome = 'cancelled';
    hooks.onStart?.(setup);
    while (outcome === 'done' && done < problem.steps) {
      const count = Math.min(schedule.batchSteps, problem.steps - done);
      const boxes = Array.from({ length: count }, (_, n) => region(done + n));
      const marched = boxes.map((box) => wholeWalls(setup.layout, box));
      writeSteps(run, marched, done);
      const blocks = blocksOf(marched, done, schedule, threads, last);
      writeBlocks(memory, tables.blocks, blocks, tables.steps, done);
      last = blocks.at(-1);

      const started = performance.now();
      const finished =
        schedule.order === 'wavefront' ? order(MARCH, tables.blocks, blocks.length) : order(SWEEP, tables.steps, count);
      seconds += (performance.now() - started) / 1000;
      if (!finished) {
        outcome = 'cancelled';
        break;
      }
      for (const { from, to } of boxes) cellUpdates += (to[0] - from[0]) * (to[1] - from[1]) * (to[2] - from[2]);
      if (!order(COLLECT, done, count)) {
        outcome = 'cancelled';
        break;
      }
      const restless = Math.max(0, ...watches.map((watch) => watch.restlessness(done, count)));
      done += count;
      hooks.onSamples?.(setup.collections.map((c) => ({ values: c.values, taken: keptBetween(c, 0, done)[1] })));
      hooks.onProgress?.(done);
      if (hooks.stopWhenStill && done >= stillFrom && done < problem.steps && restless <= hooks.stopWhenStill.level)
        outcome = 'still';
    }
  } finally {
    order(LEAVE, 0, 0);
  }
  for (const collection of setup.collections) holdFrom(collection, keptBetween(collection, 0, done)[1]);
  return { outcome, samples: setup.collections.map((c) => c.values), stepsMarched: done, cellUpdates, seconds };
}

/** Writes the records of a batch's steps (assembly/fdtd/step.ts) and the values of its sources. */
function writeSteps(run: GridRun, boxes: readonly CellBox[], first: number): void {
  const { problem, setup, sourceOrder } = run;
  const { layout, tables, memory } = setup;
  const reals = realsOf(layout, memory);
  const lanes = VECTOR / layout.real;
  const edges = sourceOrder.length;
  const used = problem.samples.map(() => 0);
  boxes.forEach(({ from, to }, n) => {
    const values = tables.sourceValues + n * edges * layout.real;
    const record = [
      from[2],
      to[2],
      from[1],
      to[1],
      Math.floor(from[0] / lanes),
      Math.ceil(to[0] / lanes),
      values,
      first + n,
    ];
    problem.samples.forEach((group, g) => {
      const keeps = keptIndex(group, problem.steps, first + n) >= 0;
      const numbers = setup.collections[g]!.order.length * 6;
      const buffer = tables.sampleBuffers[g]! + used[g]! * numbers * layout.real;
      record.push(keeps ? buffer : 0);
      if (!keeps) return;
      used[g]!++;
      // Samples in cells that the front has not reached are not read; they have their start value.
      const part = AXES.some((a) => from[a]! > 0 || to[a]! < layout.cells[a]!);
      if (part) reals.fill(layout.bias, buffer / layout.real, buffer / layout.real + numbers);
    });
    new Uint32Array(memory.buffer, tables.steps + n * STEP_BYTES, record.length).set(record);
    for (let e = 0; e < edges; e++)
      reals[values / layout.real + e] = sourceVoltage(problem, layout, sourceOrder[e]!, first + n);
  });
}

/**
 * A box widened to all or none of the rows and planes that a wall reads and that go together (assembly/fdtd/walls.ts); at
 * least one goes with the wall itself.
 */
function wholeWalls({ cells, walls }: Layout, { from, to }: CellBox): CellBox {
  if (AXES.some((a) => from[a] >= to[a])) return { from: [0, 0, 0], to: [0, 0, 0] };
  const span = (a: 1 | 2): [number, number] => {
    const low = Math.max(1, walls.reach[2 * a]!);
    // The last cell outside what a high wall reads.
    const high = cells[a] - 1 - Math.max(1, walls.reach[2 * a + 1]!);
    return [
      from[a] <= low ? 0 : Math.max(0, Math.min(from[a], high)),
      to[a] > high ? cells[a] : Math.max(low + 1, to[a]),
    ];
  };
  const [y, z] = [span(1), span(2)];
  return { from: [from[0], y[0], z[0]], to: [to[0], y[1], z[1]] };
}

/** Runs a problem in the calling thread alone. */
export function marchAlone(problem: GridProblem, options: GridOptions & LeadHooks = {}): GridResult {
  return lead(prepareGridRun(problem, { ...options, threads: 1 }), options);
}
