/** The largest value of f ≥ 0 on an interval: the best of equidistant samples, refined between its neighbours. */
export function largest(f: (x: number) => number, from: number, to: number, step: number): number {
  let best = from;
  for (let x = from; x <= to; x += step) if (f(x) > f(best)) best = x;
  let low = Math.max(from, best - step);
  let high = best + step;
  // The value at a maximum is flat: 40 thirds of the interval give it to rounding.
  for (let n = 0; n < 40; n++) {
    const third = (high - low) / 3;
    if (f(low + third) < f(high - third)) low += third;
    else high -= third;
  }
  return Math.max(f(best), f(low));
}

/** Where `holds` turns from true (at `yes`) to false (at `no`), to the last bit. */
export function bisect(holds: (x: number) => boolean, yes: number, no: number): number {
  for (;;) {
    const middle = (yes + no) / 2;
    if (middle === yes || middle === no) return yes;
    if (holds(middle)) yes = middle;
    else no = middle;
  }
}

/** `start` doubled until `holds`. */
export function doubleUntil(holds: (x: number) => boolean, start: number): number {
  let x = start;
  while (!holds(x)) x *= 2;
  return x;
}
