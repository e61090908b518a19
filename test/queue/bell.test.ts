import { expect, test } from 'vitest';
import { Bell } from '../../src/queue/connection.ts';

/** Longer than a test may take: what ends in time was woken. */
const LONG = 600_000;

test('a bell wakes who waits, also one who comes after it was rung, and then no more', async () => {
  const bell = new Bell();
  setTimeout(() => bell.ring(), 5);
  await bell.wait(LONG);
  bell.ring();
  bell.ring();
  await bell.wait(LONG);
  let woken = false;
  const third = bell.wait(40).then(() => {
    woken = true;
  });
  await new Promise((next) => setTimeout(next, 5));
  expect(woken).toBe(false);
  await third;
});

test('an abort ends the wait with its reason, before it or during it, and leaves no listener behind', async () => {
  const bell = new Bell();
  const stop = new AbortController();
  setTimeout(() => stop.abort('enough'), 5);
  await expect(bell.wait(LONG, stop.signal)).rejects.toBe('enough');
  await expect(bell.wait(LONG, stop.signal)).rejects.toBe('enough');
  const { signal } = new AbortController();
  let listeners = 0;
  const { addEventListener, removeEventListener } = signal;
  Object.assign(signal, {
    addEventListener: (...given: Parameters<typeof addEventListener>) => {
      listeners++;
      addEventListener.apply(signal, given);
    },
    removeEventListener: (...given: Parameters<typeof removeEventListener>) => {
      listeners--;
      removeEventListener.apply(signal, given);
    },
  });
  bell.ring();
  await bell.wait(LONG, signal);
  expect(listeners).toBe(0);
});
