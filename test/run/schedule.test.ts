import { describe, expect, test } from 'vitest';
import { runBeside, scheduleOf } from '../../src/run/schedule.ts';
import { Shared } from '../../src/run/share.ts';

describe('schedule', () => {
  const job = (cost: number, bytes = 1) => ({ cost, bytes });

  test('many run beside each other, longest first; few, or a giant, get all threads', () => {
    expect(
      scheduleOf(
        [10, 11, 12, 13, 14, 15, 16, 17].map((cost) => job(cost)),
        4,
        100,
      ),
    ).toEqual({
      alone: [],
      beside: [7, 6, 5, 4, 3, 2, 1, 0],
    });
    expect(scheduleOf([job(1), job(3), job(2), job(2)], 4, 100)).toEqual({ alone: [1, 2, 3, 0], beside: [] });
    expect(scheduleOf([job(1), job(100), job(1), job(1), job(1)], 4, 100)).toEqual({
      alone: [1],
      beside: [0, 2, 3, 4],
    });
    expect(scheduleOf([job(5)], 4, 100)).toEqual({ alone: [0], beside: [] });
    expect(scheduleOf([job(1), job(5)], 1, 100)).toEqual({ alone: [], beside: [1, 0] });
  });

  test('what does not fit beside another into the memory runs alone with all threads', () => {
    expect(scheduleOf([job(4, 60), job(4, 60), job(4, 60)], 4, 100)).toEqual({ alone: [0, 1, 2], beside: [] });
  });

  test('memory held at once never exceeds the limit, and all run once', async () => {
    const jobs = [job(1, 50), job(1, 70), job(1, 20), job(1, 150), job(1, 30)];
    let held = 0;
    let most = 0;
    const ran: number[] = [];
    await runBeside([0, 1, 2, 3, 4], jobs, 3, 100, async (index) => {
      held += jobs[index]!.bytes;
      if (index !== 3) most = Math.max(most, held);
      else expect(held).toBe(150);
      await new Promise((done) => setTimeout(done, 3));
      held -= jobs[index]!.bytes;
      ran.push(index);
    });
    expect(most).toBeLessThanOrEqual(100);
    expect([...ran].sort()).toEqual([0, 1, 2, 3, 4]);
  });
});

describe('shared work', () => {
  test('is done once for all who ask, and again for those after whom it failed', async () => {
    const shared = new Shared();
    for (const _ of [1, 2, 3]) shared.expect('a');
    let made = 0;
    const make = async () => ++made;
    expect(await Promise.all([shared.take('a', make), shared.take('a', make)])).toEqual([1, 1]);
    expect(await shared.take('a', make)).toBe(1);
    // The last asker was the last that was expected: nothing is kept.
    expect(await shared.take('a', make)).toBe(2);
    for (const _ of [1, 2]) shared.expect('b');
    await expect(shared.take('b', () => Promise.reject(new Error('no')))).rejects.toThrow('no');
    expect(await shared.take('b', make)).toBe(3);
  });
});
