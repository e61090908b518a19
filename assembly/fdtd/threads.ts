/** How threads wait for each other: spin a little, then sleep, so that a busy machine is not made busier. */
import { BARRIER, STOP } from './memory';

/** Asked on the leading thread now and then; anything but 0 stops the run on all threads. */
@external("env", "interrupted")
declare function interrupted(): i32;

const SPINS = 4000;
const SLEEP_NANOSECONDS = 100_000;

/** True once somebody has called the run off. The leader (thread 0) asks the host. */
export function stopped(thread: i32): bool {
  if (thread == 0 && interrupted() != 0) {
    atomic.store<i32>(STOP, 1);
    return true;
  }
  return atomic.load<i32>(STOP) != 0;
}

/** Waits until the word at `address` is at least `least`; false when the run was called off meanwhile. */
export function reached(address: usize, least: i32, thread: i32): bool {
  let spins = 0;
  let value = atomic.load<i32>(address);
  while (value < least) {
    if (++spins == SPINS) {
      spins = 0;
      if (stopped(thread)) return false;
      atomic.wait<i32>(address, value, SLEEP_NANOSECONDS);
    }
    value = atomic.load<i32>(address);
  }
  return true;
}

/** Waits until all threads have come here `times` times in all; false when the run was called off meanwhile. */
export function gathered(thread: i32, threads: i32, times: i32): bool {
  if (threads == 1) return true;
  atomic.add<i32>(BARRIER, 1);
  atomic.notify(BARRIER, -1);
  return reached(BARRIER, times * threads, thread);
}
