import { formatPercent, formatQuantity } from '../../../elementary/quantity.ts';
import { type Axis, FACES, type Face, type Vec3 } from '../../../scenario/model.ts';
import { leastOf, plus, type Refit, type Signals, times } from '../refit.ts';
import type { Trial } from '../trial.ts';

const axisOf = (face: Face): Axis => 'xyz'.indexOf(face[0]!) as Axis;

/**
 * What a wall at a place sends to the traces as a perfect conductor: by images, E ↦ −M E(Mr), H ↦ +M H(Mr) with M the
 * mirror: tangential E and normal H of field and image cancel on the wall.
 */
function imageOf(refit: Refit, axis: Axis, wall: number): Signals | null {
  const { own } = refit;
  const places = refit.places().map((at) => at.map((x, a) => (a === axis ? 2 * wall - x : x)) as unknown as Vec3);
  let signals: Signals;
  try {
    signals = refit.arrangement(places).signals((t) => t, own, false);
  } catch (error) {
    if (error instanceof RangeError) return null;
    throw error;
  }
  return times(signals, (k) => {
    const normal = own(k) % 3 === axis;
    return own(k) < 3 === normal ? 1 : -1;
  });
}

/**
 * What simple walls send back is not one share of the image: what radiates, what is induction and what is near field, which
 * stand to each other as derivative, value and integral of the current, come back in shares of their own, and by the angle
 * of incidence differently to each observer.
 */
function shapesOf({ given }: Refit, image: Signals, scale: number): Signals[] {
  const integral = image.map((values, k) => {
    const { time } = given[k]!.group;
    let sum = 0;
    return values.map((v, n) => {
      if (n > 0) sum += ((v + values[n - 1]!) * (time[n]! - time[n - 1]!)) / (2 * scale);
      return sum;
    });
  });
  const derivative = image.map((values, k) => {
    const { time } = given[k]!.group;
    const last = values.length - 1;
    return values.map((_, n) => {
      const [a, b] = [Math.max(0, n - 1), Math.min(last, n + 1)];
      return (scale * (values[b]! - values[a]!)) / (time[b]! - time[a]!);
    });
  });
  const observers = [...new Set(given.map(({ group }) => group.observer))];
  return observers.flatMap((observer) =>
    [image, integral, derivative].map((shape) => times(shape, (k) => (given[k]!.group.observer === observer ? 1 : 0))),
  );
}

/** Walls at the faces of the scenario's box, or behind its absorbing layers: each alone, all alike, each with its own share. */
export function* wallTrials(refit: Refit, behind: readonly (0 | 1)[]): Generator<Trial> {
  const { scenario, bases } = refit;
  const { box, boundary, cellSize } = scenario.grid;
  const scale = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale));
  const g = refit.signals();
  for (const depth of behind) {
    const images = FACES.flatMap((face) => {
      const axis = axisOf(face);
      const wall = boundary[face];
      const layers = wall.type === 'cpml' ? wall.layers * cellSize[axis] : 0;
      if (depth === 1 && layers === 0) return [];
      const at = face.endsWith('-') ? box.from[axis] - depth * layers : box.to[axis] + depth * layers;
      const image = imageOf(refit, axis, at);
      return image ? [{ face, at, image }] : [];
    });
    if (images.length === 0) continue;
    const where = depth === 0 ? '' : ' (behind its layers)';
    for (const base of bases) {
      const rest = plus(g, base, -1);
      for (const { face, at, image } of images) {
        const who = `the wall ${face}${where} at ${formatQuantity(at, 'm')}`;
        yield* sharesOf(refit, base, rest, [image], who, conductorText);
        if (depth === 1) continue;
        const about = () => `${conductorText(leastSquares(refit, rest, [image]))}, more or less by frequency and angle`;
        yield* sharesOf(refit, base, rest, shapesOf(refit, image, scale), who, about);
      }
      if (images.length < 2) continue;
      const list = images.map(({ image }) => image);
      yield* sharesOf(refit, base, rest, [list.reduce((a, b) => plus(a, b))], `every wall${where}`, conductorText);
      yield* sharesOf(refit, base, rest, list, `the walls${where}`, (shares) => {
        const strongest = shares.reduce((best, s, n) => (Math.abs(s) > Math.abs(shares[best]!) ? n : best), 0);
        const { face, at } = images[strongest]!;
        return `reflect, most of all ${face} at ${formatQuantity(at, 'm')}, which ${conductorText([shares[strongest]!])}`;
      });
    }
  }
}

/** The base with those shares of signals that leave least of the rest. */
function* sharesOf(
  refit: Refit,
  base: Signals,
  rest: Signals,
  signals: readonly Signals[],
  who: string,
  does: (shares: readonly number[]) => string,
): Generator<Trial> {
  const shares = leastSquares(refit, rest, signals);
  if (!shares.every(Number.isFinite)) return;
  yield {
    cause: 'wall',
    words: `${who} ${does(shares)}`,
    remedy: 'use a better absorber there (more layers), or move the wall further out',
    parameters: signals.length,
    model: signals.reduce((sum, signal, n) => plus(sum, signal, shares[n]!), base),
  };
}

const conductorText = ([share]: readonly number[]): string =>
  `sends back ${formatPercent(Math.abs(share!))} of what a ${share! > 0 ? 'perfect conductor' : 'perfect magnetic wall'} would`;

/** A wall anywhere around sources and traces: its place is told by when its reflection arrives. */
export function* distantWallTrials(refit: Refit): Generator<Trial> {
  const { scenario, bases } = refit;
  const { box, cellSize } = scenario.grid;
  const g = refit.signals();
  for (const face of FACES) {
    const axis = axisOf(face);
    const sign = face.endsWith('-') ? -1 : 1;
    const start = face.endsWith('-') ? box.from[axis] : box.to[axis];
    const span = box.to[axis] - box.from[axis];
    const scale = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale)) * scenario.medium.speed;
    const step = Math.max(span / 24, Math.min(0.3 * scale, span / 8));
    const scan = Array.from(
      { length: Math.ceil(span / step) },
      (_, n) => start + sign * (n * step - 2 * cellSize[axis]),
    );
    for (const base of bases) {
      const rest = plus(g, base, -1);
      const tried = (at: number): Trial | undefined => {
        const image = imageOf(refit, axis, at);
        const who = `a wall across ${'xyz'[axis]} at ${formatQuantity(at, 'm')}`;
        const [trial] = image ? sharesOf(refit, base, rest, [image], who, conductorText) : [];
        return trial && { ...trial, parameters: 2 };
      };
      const { x } = leastOf(
        (at) => {
          const trial = tried(at);
          return trial ? refit.residual(trial.model) : Number.POSITIVE_INFINITY;
        },
        scan,
        8,
      );
      const trial = tried(x);
      if (trial) yield trial;
    }
  }
}

/** min ‖rest − Σ x_n signal_n‖ by Gauss–Seidel sweeps over the normal equations, which are positive definite. */
function leastSquares(refit: Refit, rest: Signals, signals: readonly Signals[]): number[] {
  const A = signals.map((a) => signals.map((b) => refit.inner(a, b)));
  const b = signals.map((a) => refit.inner(rest, a));
  const x = signals.map(() => 0);
  for (let sweep = 0; sweep < 200; sweep++)
    for (let n = 0; n < x.length; n++) {
      const others = x.reduce((sum, v, m) => (m === n ? sum : sum + A[n]![m]! * v), 0);
      x[n] = A[n]![n]! > 0 ? (b[n]! - others) / A[n]![n]! : 0;
    }
  return x;
}
