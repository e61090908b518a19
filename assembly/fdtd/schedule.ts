/**
 * In which order planes are updated: `sweep`, one step after the other; and `march`, the wavefront, several steps in
 * one pass through memory. Both give the same bits.
 *
 * The wavefront. A block is T steps (t = 1 … T). Wavefront s does, for each t in turn, E^t on plane s − t + 1 and then
 * H^t on plane s − t:
 *
 *        plane →   s−3  s−2  s−1   s
 *        t = 1                H    E        E^t on plane k reads H^{t−1} on planes k − 1 and k,
 *        t = 2           H    E             H^t on plane k reads E^t on planes k and k + 1;
 *        t = 3      H    E                  every value a step reads is the newest there is.
 *
 * so some 2T planes stay in cache while T steps pass over them. To fit the cache, rows are cut into tiles, and the cut
 * moves down by one row a step, so that a tile never needs what its right neighbour has yet to compute:
 *
 *        row →        tile m − 1   |   tile m                E^t: rows [c − (t − 1), …)
 *        t = 1      . . . . . . . .|. . . . . .              H^t: rows [c − t, …)
 *        t = 2      . . . . . . .|. . . . . . .
 *        t = 3      . . . . . .|. . . . . . . .
 *
 * A cut may just as well move down by more than a row. Near a wall that reads several rows at once (./walls.ts) it stays
 * above them as long as it can, and then jumps below them.
 *
 * Threads take the tiles in turn. Wavefront s of tile m may start when
 *   - tile m − 1 of its block has done wavefront s, and
 *   - the previous block (T′ steps) has done wavefront s + T′ on every tile that touches the rows of this one, for then
 *     all its work on planes up to s is over. Tiles wait for their left neighbours, so asking the rightmost is enough.
 */
import { PROGRESS, PROGRESS_BLOCKS, PROGRESS_TILES, nz, ny } from './memory';
import { electric, magnetic } from './plane';
import { STEP_BYTES } from './step';
import { gathered, reached, stopped } from './threads';
import { planeCut, reachesHighWall } from './walls';

/**
 * `count` steps one by one, the planes divided among the threads; false when the run was called off. Each plane of h
 * follows close upon the plane of e above it, so that a step moves every field through memory once, not twice.
 */
export function sweep(thread: i32, threads: i32, steps: usize, count: i32, gatheredBefore: i32): bool {
  const from = planeCut((nz * thread) / threads);
  const to = planeCut((nz * (thread + 1)) / threads);
  let gatherings = gatheredBefore;
  for (let n = 0; n < count; n++) {
    const step = steps + <usize>n * STEP_BYTES;
    for (let k = from; k < to; k++) {
      electric(k, 0, ny, step);
      if (k > from) magnetic(k - 1, 0, ny, step);
    }
    // The last plane of h needs the first plane of e of the next thread, which in turn needs the old h.
    if (!gathered(thread, threads, ++gatherings)) return false;
    if (from < to) magnetic(to - 1, 0, ny, step);
    if (!gathered(thread, threads, ++gatherings) || stopped(thread)) return false;
  }
  return true;
}

/** A block as the driver lays it out, in 64 bytes. */
const BLOCK_BYTES: usize = 64;
@inline
function firstStep(block: usize): usize {
  return load<u32>(block);
}
/** T. */
@inline
function stepCount(block: usize): i32 {
  return load<i32>(block, 4);
}
/** Counts blocks from 1 over the whole run. */
@inline
function serial(block: usize): i32 {
  return load<i32>(block, 8);
}
/** Tiles of all blocks before this one. */
@inline
function tilesBefore(block: usize): i32 {
  return load<i32>(block, 12);
}
@inline
function tileCount(block: usize): i32 {
  return load<i32>(block, 16);
}
/** Rows of a tile. */
@inline
function tileRows(block: usize): i32 {
  return load<i32>(block, 20);
}
/** Row at which tile 0 would start at t = 1, were it not the first. */
@inline
function tileOrigin(block: usize): i32 {
  return load<i32>(block, 24);
}
/** Planes that any step of the block updates. */
@inline
function blockFrom(block: usize): i32 {
  return load<i32>(block, 28);
}
@inline
function blockTo(block: usize): i32 {
  return load<i32>(block, 32);
}

/** The progress counter of tile m: serial·PER + wavefronts done, so that it only ever grows. */
@inline
function progressOf(block: usize, m: i32): usize {
  return PROGRESS + (<usize>((serial(block) & (PROGRESS_BLOCKS - 1)) * PROGRESS_TILES + m) << 6);
}

/** `count` blocks on this thread; false when the run was called off. */
export function march(thread: i32, threads: i32, blocks: usize, count: i32): bool {
  for (let b = 0; b < count; b++) {
    const block = blocks + <usize>b * BLOCK_BYTES;
    const tiles = tileCount(block);
    for (let m = 0; m < tiles; m++) {
      if ((tilesBefore(block) + m) % threads != thread) continue;
      if (!tile(thread, threads, block, m, b > 0)) return false;
    }
  }
  return true;
}

function tile(thread: i32, threads: i32, block: usize, m: i32, follows: bool): bool {
  const T = stepCount(block);
  const steps = firstStep(block);
  const last = tileCount(block) - 1;
  const cut = tileOrigin(block) + m * tileRows(block);
  // The outermost tiles reach to the ends of the lattice.
  const low = m == 0 ? -ny : cut;
  const high = m == last ? 2 * ny + T : cut + tileRows(block);
  // One more than the largest count of wavefronts, so that a finished tile is ahead of all that is asked of it.
  const per = nz + 2 * PROGRESS_TILES;
  const mine = progressOf(block, m);
  const left = mine - 64;
  const now = serial(block) * per;

  let before: usize = 0;
  let lead = 0;
  if (follows) {
    const previous = block - BLOCK_BYTES;
    lead = stepCount(previous);
    const touching = m == last || reachesHighWall(high)
      ? tileCount(previous) - 1
      : max(0, min((high - 1 + lead - tileOrigin(previous)) / tileRows(previous), tileCount(previous) - 1));
    before = progressOf(previous, touching);
  }

  for (let s = blockFrom(block), end = blockTo(block) + T; s < end; s++) {
    if (threads > 1) {
      if (m > 0 && !reached(left, now + s + 1, thread)) return false;
      if (follows && !reached(before, now - per + min(s + lead + 1, per - 1), thread)) return false;
    }
    if (stopped(thread)) return false;
    for (let t = 0; t < T; t++) {
      const step = steps + <usize>t * STEP_BYTES;
      electric(s - t, low - t, high - t, step);
      magnetic(s - t - 1, low - t - 1, high - t - 1, step);
    }
    if (threads > 1) {
      atomic.store<i32>(mine, now + s + 1);
      atomic.notify(mine, -1);
    }
  }
  if (threads > 1) {
    atomic.store<i32>(mine, now + per - 1);
    atomic.notify(mine, -1);
  }
  return true;
}
