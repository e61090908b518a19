import { setFlagsFromString } from 'node:v8';
import { runInNewContext } from 'node:vm';
import fc from 'fast-check';
import { expect } from 'vitest';

/** Nothing that a file of the drawn sizes holds may take longer, ms; a busy machine counts against it. */
const LONGEST = 5000;

/** Memory is looked at every so many cases, since looking takes its time. */
const LOOK = 20;

/** Bytes that the process may grow by: while cases pass, rubbish included, and for good. */
const MOST_PASSING = 1e9;
const MOST_KEPT = 60e6;

/**
 * Draws cases and has each checked: by the property itself, and that none takes long or leaves memory behind. What a case
 * throws fails with its seed and the smallest case that does.
 */
export function drawn<T>(property: fc.IPropertyWithHooks<T>, seed: number, numRuns: number): void {
  const watch = watched();
  fc.assert(property.beforeEach(watch.before).afterEach(watch.after), { seed, numRuns });
  watch.end();
}

/** The same for cases that take turns of the event loop; what rejects unheard fails the run of the tests. */
export async function drawnInTurns<T>(
  property: fc.IAsyncPropertyWithHooks<T>,
  seed: number,
  numRuns: number,
): Promise<void> {
  const watch = watched();
  await fc.assert(property.beforeEach(watch.before).afterEach(watch.after), { seed, numRuns });
  watch.end();
}

function watched() {
  setFlagsFromString('--expose-gc');
  const collect = runInNewContext('gc') as () => void;
  const memory = () => {
    const { heapUsed, arrayBuffers } = process.memoryUsage();
    return heapUsed + arrayBuffers;
  };
  collect();
  const beginning = memory();
  let started = 0;
  let slowest = 0;
  let most = 0;
  let count = 0;
  return {
    before: () => {
      started = performance.now();
    },
    after: () => {
      slowest = Math.max(slowest, performance.now() - started);
      if (count++ % LOOK === 0) most = Math.max(most, memory() - beginning);
    },
    end: () => {
      collect();
      const kept = memory() - beginning;
      const mega = (bytes: number) => `${Math.round(bytes / 1e6)} MB`;
      console.log(`slowest case ${Math.round(slowest)} ms; memory: at most ${mega(most)}, kept ${mega(kept)}`);
      expect(slowest).toBeLessThan(LONGEST);
      expect(most).toBeLessThan(MOST_PASSING);
      expect(kept).toBeLessThan(MOST_KEPT);
    },
  };
}
