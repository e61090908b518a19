import { BLOCK_BYTES, MOST_TILES, STEP_BYTES } from './kernel.ts';
import type { Layout } from './layout.ts';
import type { CellBox } from './region.ts';

/** How a run is cut up: steps a block (T), rows a tile (W), steps between two looks at the outside world. */
export interface Schedule {
  readonly order: 'wavefront' | 'sweep';
  readonly blockSteps: number;
  readonly tileRows: number;
  readonly batchSteps: number;
}

/**
 * Cache that the wavefronts of all threads may fill together, bytes. Between 5 and 20 MB a thread the rate varies by
 * 5 % on a machine with 32 MB of last-level cache; half of that leaves room on smaller machines.
 */
const SHARED_CACHE = 16e6;
const BLOCK_STEPS = 8;
/** Samples of one batch may take so much memory, bytes. */
const SAMPLE_BUFFER = 16e6;
/** Steps between two reports of progress, at most. */
const BATCH_STEPS = 64;

/**
 * A schedule from the working set: 2T + 4 planes of a tile, six fields each, for every thread.
 * @param sampleBytes bytes that one step's samples take, on average
 */
export function scheduleOf(
  layout: Layout,
  threads: number,
  sampleBytes: number,
  wish: Partial<Schedule> = {},
): Schedule {
  const blockSteps = Math.min(MOST_TILES, wish.blockSteps ?? BLOCK_STEPS);
  const rows = Math.floor(SHARED_CACHE / threads / (6 * layout.rowBytes * (2 * blockSteps + 4)));
  const tileRows = wish.tileRows ?? Math.max(blockSteps, rows);
  const fitting = Math.floor(SAMPLE_BUFFER / Math.max(1, sampleBytes) / blockSteps);
  const batchSteps =
    wish.batchSteps ?? blockSteps * Math.max(1, Math.min(fitting, Math.floor(BATCH_STEPS / blockSteps)));
  return { order: wish.order ?? 'wavefront', blockSteps, tileRows, batchSteps };
}

/** What the kernel is told about one block; see assembly/fdtd/schedule.ts. */
export interface Block {
  readonly firstStep: number;
  readonly steps: number;
  readonly serial: number;
  readonly tilesBefore: number;
  readonly tiles: number;
  readonly tileRows: number;
  readonly tileOrigin: number;
  readonly planeFrom: number;
  readonly planeTo: number;
}

/**
 * Cuts steps [first, first + boxes.length) into blocks, and the rows that each block updates into tiles: as many for
 * each thread, of about the wished number of rows.
 * @param after the last block before these, where there is one
 */
export function blocksOf(
  boxes: readonly CellBox[],
  first: number,
  schedule: Schedule,
  threads: number,
  after: Block | undefined,
): Block[] {
  const blocks: Block[] = [];
  let previous = after;
  for (let at = 0; at < boxes.length; at += schedule.blockSteps) {
    const some = boxes.slice(at, at + schedule.blockSteps);
    const busy = some.filter((box) => box.from[2] < box.to[2]);
    const lowest = (a: 1 | 2) => Math.min(...busy.map((box) => box.from[a]), busy.length ? Infinity : 0);
    const highest = (a: 1 | 2) => Math.max(...busy.map((box) => box.to[a]), 0);
    const rows = Math.max(1, highest(1) - lowest(1));
    const wanted = Math.max(1, Math.round(rows / schedule.tileRows / threads)) * threads;
    const tiles = Math.min(wanted, MOST_TILES, rows);
    const block: Block = {
      firstStep: first + at,
      steps: some.length,
      serial: (previous?.serial ?? 0) + 1,
      tilesBefore: (previous?.tilesBefore ?? 0) + (previous?.tiles ?? 0),
      tiles,
      tileRows: Math.ceil(rows / tiles),
      // Cuts move down by one row a step; half of that, so that first and last tile have equal work on average.
      tileOrigin: lowest(1) + (some.length >> 1),
      planeFrom: lowest(2),
      planeTo: highest(2),
    };
    blocks.push(block);
    previous = block;
  }
  return blocks;
}

/** Writes blocks for the kernel at `address`; their steps' records start at `steps`, that of step `first` first. */
export function writeBlocks(
  memory: WebAssembly.Memory,
  address: number,
  blocks: readonly Block[],
  steps: number,
  first: number,
): void {
  blocks.forEach((block, b) => {
    new Uint32Array(memory.buffer, address + b * BLOCK_BYTES, 9).set([
      steps + (block.firstStep - first) * STEP_BYTES,
      block.steps,
      block.serial,
      block.tilesBefore,
      block.tiles,
      block.tileRows,
      block.tileOrigin,
      block.planeFrom,
      block.planeTo,
    ]);
  });
}
