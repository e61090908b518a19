import type { Axis } from '../../../scenario/model.ts';
import { permuted, type Refit } from '../refit.ts';
import { elsewhere, scopesOf, type Trial } from '../trial.ts';

const ORDERS: readonly { readonly order: readonly [Axis, Axis, Axis]; readonly words: string }[] = [
  { order: [1, 0, 2], words: 'x and y are swapped' },
  { order: [0, 2, 1], words: 'y and z are swapped' },
  { order: [2, 1, 0], words: 'x and z are swapped' },
  { order: [1, 2, 0], words: 'x, y, z stand for y, z, x' },
  { order: [2, 0, 1], words: 'x, y, z stand for z, x, y' },
];

export function* axisTrials(refit: Refit): Generator<Trial> {
  const { plain, own, bases } = refit;
  const remedy = 'check the order of axes and components in the file and in your solver';
  for (const { order, words } of ORDERS) {
    const renamed = (k: number) => (own(k) < 3 ? order[own(k) as Axis] : 3 + order[(own(k) - 3) as Axis]);
    for (const { who, over } of scopesOf(refit))
      for (const withSound of bases.map((_, n) => n === 1))
        yield {
          cause: 'axesSwapped',
          words: `the components of ${who}: ${words}`,
          remedy,
          parameters: 0,
          model: plain.signals(
            (t) => t,
            (k) => (over(k) ? renamed(k) : own(k)),
            withSound,
          ),
        };
    const places = refit.places().map((at) => permuted(at, order));
    yield* elsewhere(refit, places, {
      cause: 'axesSwapped',
      words: `the coordinates of places: ${words}`,
      remedy,
      parameters: 0,
    });
    yield* elsewhere(
      refit,
      places,
      { cause: 'axesSwapped', words: `coordinates and components alike: ${words}`, remedy, parameters: 0 },
      renamed,
    );
  }
}
