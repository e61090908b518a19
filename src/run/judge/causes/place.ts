import { formatQuantity } from '../../../elementary/quantity.ts';
import type { Vec3 } from '../../../scenario/model.ts';
import { STAGGER } from '../../../trace/trace.ts';
import { moved, type Refit } from '../refit.ts';
import { elsewhere, type Trial } from '../trial.ts';

export function* placeTrials(refit: Refit): Generator<Trial> {
  const { scenario, own } = refit;
  const h = scenario.grid.cellSize;
  const places = refit.places();
  for (const axis of [0, 1, 2] as const)
    for (const sign of [1, -1]) {
      const by: Vec3 = [0, 1, 2].map((a) => (a === axis ? (sign * h[a]!) / 2 : 0)) as unknown as Vec3;
      yield* elsewhere(
        refit,
        moved(places, () => by),
        {
          cause: 'halfCell',
          words: `the field is that of places half a cell (${formatQuantity(h[axis] / 2, 'm')}) further along ${sign < 0 ? '−' : ''}${'xyz'[axis]}`,
          remedy: 'check where nodes and cell centres lie in your grid, and the place of the source in it',
          parameters: 0,
        },
      );
    }
  for (const sign of [1, -1]) {
    const by = (k: number): Vec3 => [0, 1, 2].map((a) => sign * STAGGER[own(k)]![a]! * h[a]!) as unknown as Vec3;
    yield* elsewhere(refit, moved(places, by), {
      cause: 'stagger',
      words:
        sign > 0
          ? 'each component was sampled at its own place in the Yee cell, not at the node that the file tells'
          : 'components were sampled at the node itself, not at their places in the Yee cell that the file tells',
      remedy: sign > 0 ? 'judge with --staggered, or give each component its own place' : 'give the node as the place',
      parameters: 0,
    });
  }
  for (const [factor, words] of [
    [1e-3, 'places are 1000 times too large, as if mm were read as m'],
    [1e3, 'places are 1000 times too small, as if m were read as mm'],
    [1e-2, 'places are 100 times too large, as if cm were read as m'],
    [1e2, 'places are 100 times too small, as if m were read as cm'],
  ] as const) {
    const scaled = places.map((at) => at.map((x) => x * factor) as unknown as Vec3);
    const { from, to } = scenario.grid.box;
    const reach = 3 * Math.max(...from.map((x, a) => Math.max(Math.abs(x), Math.abs(to[a]!))));
    if (scaled.some((at) => Math.max(...at.map(Math.abs)) > reach)) continue;
    yield* elsewhere(refit, scaled, {
      cause: 'lengthUnit',
      words,
      remedy: 'give the unit of the places (--unit length=mm)',
      parameters: 0,
    });
  }
}
