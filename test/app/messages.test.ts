import { afterEach, expect, test, vi } from 'vitest';
import { drawnInTurns } from '../hostile/drawn.ts';
import { fuzzMessages, startHere, WORKER_NAMES } from './fuzzMessages.ts';

afterEach(() => vi.unstubAllGlobals());

test.each(WORKER_NAMES)('whatever the worker “%s” is asked, it answers in words', async (name) => {
  const asked = await startHere(name);
  const seen = { refused: 0, answered: 0 };
  await drawnInTurns(fuzzMessages(name, asked, seen), 61, 170);
  console.log(name, seen);
  expect(seen.refused).toBeGreaterThan(100);
});
