import fc from 'fast-check';
import { afterEach, expect, test, vi } from 'vitest';
import { fuzzMessages, startHere, WORKER_NAMES } from './fuzzMessages.ts';

afterEach(() => vi.unstubAllGlobals());

test.each(WORKER_NAMES)('whatever the worker “%s” is asked, it answers in words', async (name) => {
  const asked = await startHere(name);
  const seen = { refused: 0, answered: 0 };
  await fc.assert(fuzzMessages(name, asked, seen), { seed: 61, numRuns: 170 });
  console.log(name, seen);
  expect(seen.refused).toBeGreaterThan(100);
});
