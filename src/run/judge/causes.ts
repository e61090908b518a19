import { decibels, log, pow } from '../../elementary/elementary.ts';
import { formatNumber, formatPercent, formatQuantity } from '../../elementary/quantity.ts';
import { ELECTRIC_CONSTANT, MAGNETIC_CONSTANT } from '../../scenario/constants.ts';
import { firstArrival, lastArrival } from '../../scenario/distance.ts';
import { loadScenario } from '../../scenario/load.ts';
import { type Axis, FACES, type Face, type Medium, type Scenario, type Vec3 } from '../../scenario/model.ts';
import { timeStepOf } from '../../scenario/sites.ts';
import { COMPONENTS, STAGGER } from '../../trace/trace.ts';
import { leastOf, moved, oneByOne, permuted, plus, type Refit, type Signals, times } from './refit.ts';

/**
 * Likely faults of a solver or of the way from it to the file, each tested by making the exact field suffer it and looking
 * at what is left of the difference. Where the error of a sound Yee grid is predicted, each is tested on top of that too,
 * which tells a slip of half a step from dispersion.
 */
export const CAUSES = [
  'halfTimeStep',
  'timeOffset',
  'timeUnit',
  'timeScale',
  'halfCell',
  'stagger',
  'lengthUnit',
  'sign',
  'axesSwapped',
  'powerOfTen',
  'decibels',
  'fluxForField',
  'impedance',
  'amplitude',
  'wall',
  'staticLost',
  'medium',
] as const;
export type CauseName = (typeof CAUSES)[number];

/** A fault as it was tried. */
export interface Trial {
  readonly cause: CauseName;
  /** "E comes half a time step (4.8 ps) late" */
  readonly words: string;
  /** what to do about it */
  readonly remedy: string;
  /** numbers that were fitted for it, not known beforehand */
  readonly parameters: number;
  readonly model: Signals;
}

type Scope = 'all' | 'E' | 'H';

/** All trials but those that look for a wall's place, in the order of `CAUSES`. */
export function* trials(refit: Refit, json: unknown): Generator<Trial> {
  yield* timeTrials(refit);
  yield* placeTrials(refit);
  yield* axisTrials(refit);
  yield* factorTrials(refit);
  yield* decibelTrials(refit);
  yield* staticTrials(refit);
  yield* wallTrials(refit, [0, 1]);
  yield* mediumTrials(refit, json);
}

/** Traces that a fault may be in: all, or those of one field where there are both. */
interface Scoped {
  readonly scope: Scope;
  /** "E and H", "E" */
  readonly who: string;
  readonly are: 'are' | 'is';
  readonly over: (trace: number) => boolean;
}

function scopesOf({ given, own }: Refit): readonly Scoped[] {
  const hasE = given.some((_, k) => own(k) < 3);
  const hasH = given.some((_, k) => own(k) >= 3);
  if (!hasE || !hasH) {
    const scope = hasE ? 'E' : 'H';
    return [{ scope, who: scope, are: 'is', over: () => true }];
  }
  return [
    { scope: 'all', who: 'E and H', are: 'are', over: () => true },
    { scope: 'E', who: 'E', are: 'is', over: (k) => own(k) < 3 },
    { scope: 'H', who: 'H', are: 'is', over: (k) => own(k) >= 3 },
  ];
}

/** Time steps that the traces may be counted in: the scenario's, and the traces' own where it is another. */
function stepsOf({ scenario, given }: Refit): number[] {
  const own = timeStepOf(scenario.grid, scenario.medium);
  const sampled = given[0]!.group.step;
  return Math.abs(sampled / own - 1) < 1e-6 ? [own] : [own, sampled];
}

function* timeTrials(refit: Refit): Generator<Trial> {
  const { plain, own, bases, scenario, end } = refit;
  const variants = bases.map((_, withSound) => withSound === 1);
  const late = (by: number) => `${formatQuantity(Math.abs(by), 's')} too ${by > 0 ? 'late' : 'early'}`;
  for (const { who, are, over } of scopesOf(refit)) {
    const shifted = (by: number, withSound: boolean) => plain.signals((t, k) => (over(k) ? t - by : t), own, withSound);
    for (const step of stepsOf(refit))
      for (const [halves, name] of [
        [1, 'half a time step'],
        [2, 'a whole time step'],
      ] as const)
        for (const sign of [1, -1])
          for (const withSound of variants) {
            const by = (sign * halves * step) / 2;
            yield {
              cause: halves === 1 ? 'halfTimeStep' : 'timeOffset',
              words: `${who} ${are} ${name} (${late(by)})`,
              remedy:
                halves === 1
                  ? 'E lives at whole time steps, H and the current between them: check which instant each sample is labelled with, and at which the source is read'
                  : 'check whether samples are counted from 0 or from 1',
              parameters: 0,
              model: shifted(by, withSound),
            };
          }
    const scale = Math.min(...scenario.sources.map(({ waveform }) => waveform.timeScale));
    const reach = Math.min(0.5 * end, 20 * scale);
    const count = Math.ceil(reach / (0.5 * scale));
    const scan = Array.from({ length: 2 * count + 1 }, (_, n) => ((n - count) * reach) / count);
    for (const withSound of variants) {
      const { x } = leastOf((by) => refit.residual(shifted(by, withSound)), scan);
      yield {
        cause: 'timeOffset',
        words: `${who} ${are === 'are' ? 'come' : 'comes'} ${late(x)}`,
        remedy: 'check where the time of the file begins, and the delay of the source',
        parameters: 1,
        model: shifted(x, withSound),
      };
    }
  }
  const stretched = (by: number, withSound: boolean) => plain.signals((t) => by * t, own, withSound);
  for (const withSound of variants) {
    const scan = Array.from({ length: 61 }, (_, n) => pow(2, (n - 30) / 60));
    const { x } = leastOf((by) => refit.residual(stretched(by, withSound)), scan);
    yield {
      cause: 'timeScale',
      words: `time runs ${formatNumber(1 / x, 4)} times as fast as it should`,
      remedy: 'check the time step that the instants were counted with (Courant number, cell size, every n-th sample)',
      parameters: 1,
      model: stretched(x, withSound),
    };
  }
  const active = Math.max(...refit.places().map((at) => lastArrival(scenario.sources, scenario.medium, at, 0.5)));
  for (const power of [-15, -12, -9, -6, -3, 3, 6, 9, 12, 15]) {
    const factor = Number(`1e${power}`);
    if (end * factor < 0.3 * active || end * factor > 100 * active) continue;
    const arrangement = refit.arrangement(refit.places(), scenario, 1.5 * Math.max(1, factor));
    for (const withSound of variants)
      yield {
        cause: 'timeUnit',
        words: `the times are ${formatNumber(1 / factor)} times too large, as if ${power < 0 ? 'a smaller unit were read as seconds' : 'seconds were converted twice'}`,
        remedy: 'give the unit of the time column (--unit time=ns)',
        parameters: 0,
        model: arrangement.signals((t) => factor * t, own, withSound),
      };
  }
}

/** A trial at other places; none where one of them lies on a source. */
function* elsewhere(
  refit: Refit,
  places: readonly Vec3[],
  trial: Omit<Trial, 'model'>,
  component: (k: number) => number = refit.own,
  factor?: (k: number) => number,
): Generator<Trial> {
  let arrangement: ReturnType<Refit['arrangement']>;
  try {
    arrangement = refit.arrangement(places);
  } catch (error) {
    if (error instanceof RangeError) return;
    throw error;
  }
  for (const withSound of refit.bases.map((_, n) => n === 1)) {
    const model = arrangement.signals((t) => t, component, withSound);
    yield { ...trial, model: factor ? times(model, factor) : model };
  }
}

function* placeTrials(refit: Refit): Generator<Trial> {
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

const ORDERS: readonly { readonly order: readonly [Axis, Axis, Axis]; readonly words: string }[] = [
  { order: [1, 0, 2], words: 'x and y are swapped' },
  { order: [0, 2, 1], words: 'y and z are swapped' },
  { order: [2, 1, 0], words: 'x and z are swapped' },
  { order: [1, 2, 0], words: 'x, y, z stand for y, z, x' },
  { order: [2, 0, 1], words: 'x, y, z stand for z, x, y' },
];

function* axisTrials(refit: Refit): Generator<Trial> {
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

/** A factor that has a name. */
interface NamedFactor {
  readonly cause: CauseName;
  readonly factor: number;
  readonly scope: Scope;
  readonly words: string;
  readonly remedy: string;
}

function namedFactors({ impedance, permeability }: Medium): NamedFactor[] {
  const eta = 'E or H is scaled by the wave impedance, as solvers do inside: scale it back on the way out';
  const flux = 'give B as B (--column Bz=HEADER with its unit), or H in A/m';
  const vacuum = Math.sqrt(MAGNETIC_CONSTANT / ELECTRIC_CONSTANT);
  const impedances = Math.abs(impedance / vacuum - 1) < 1e-9 ? [impedance] : [impedance, vacuum];
  const permeabilities =
    Math.abs(permeability / MAGNETIC_CONSTANT - 1) < 1e-9 ? [permeability] : [permeability, MAGNETIC_CONSTANT];
  return [
    ...impedances.flatMap((z): NamedFactor[] => [
      {
        cause: 'impedance',
        scope: 'E',
        factor: 1 / z,
        words: `E is divided by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'E',
        factor: z,
        words: `E is multiplied by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'H',
        factor: z,
        words: `H is multiplied by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
      {
        cause: 'impedance',
        scope: 'H',
        factor: 1 / z,
        words: `H is divided by the impedance ${formatNumber(z, 4)} Ω`,
        remedy: eta,
      },
    ]),
    ...permeabilities.flatMap((mu): NamedFactor[] => [
      { cause: 'fluxForField', scope: 'H', factor: mu, words: 'what is given as H is B = μH', remedy: flux },
      {
        cause: 'fluxForField',
        scope: 'H',
        factor: 1 / mu,
        words: 'what is given as H is H/μ: H was taken for B',
        remedy: flux,
      },
    ]),
  ];
}

function* factorTrials(refit: Refit): Generator<Trial> {
  const { bases, own, scenario, given } = refit;
  const scopes = scopesOf(refit);
  const g = refit.signals();
  for (const base of bases) {
    for (const { scope, factor, ...named } of namedFactors(scenario.medium)) {
      const over = scopes.find((s) => s.scope === scope)?.over;
      if (over) yield { ...named, parameters: 0, model: times(base, (k) => (over(k) ? factor : 1)) };
    }
    for (const { who, over } of scopes) yield { ...turned(who), model: times(base, (k) => (over(k) ? -1 : 1)) };
    for (const c of new Set(given.map((_, k) => own(k))))
      yield { ...turned(COMPONENTS[c]!), model: times(base, (k) => (own(k) === c ? -1 : 1)) };
    for (const { scope, who, are, over } of scopes) {
      const a = refit.inner(g, base, over) / refit.inner(base, base, over);
      if (!Number.isFinite(a) || a === 0) continue;
      const power = Math.round(log(Math.abs(a)) / Math.LN10);
      const round = Math.sign(a) * Number(`1e${power}`);
      if (power !== 0)
        yield {
          cause: 'powerOfTen',
          words: `${who} ${are} ${formatNumber(round)} times what ${are === 'are' ? 'they' : 'it'} should be`,
          remedy: `give the unit of the column (--unit ${scope === 'H' ? 'H=mA/m' : 'E=kV/m'}), or check the unit of the source’s current`,
          parameters: 0,
          model: times(base, (k) => (over(k) ? round : 1)),
        };
      yield {
        cause: 'amplitude',
        words: `${who} ${are} ${formatNumber(a, 4)} times what ${are === 'are' ? 'they' : 'it'} should be`,
        remedy:
          scope === scopes[0]!.scope
            ? 'check the amplitude of the source, its moment (current × length), and the area that its current is spread over'
            : 'check how this field is scaled on its way to the file',
        parameters: 1,
        model: times(base, (k) => (over(k) ? a : 1)),
      };
    }
  }
  for (const emitters of oneByOne(scenario.sources, scenario.medium)) {
    const alone = refit.arrangement(refit.places(), emitters).signals((t) => t, own, false);
    const size = refit.inner(alone, alone);
    for (const base of bases) {
      const more = refit.inner(plus(g, base, -1), alone) / size;
      if (Number.isFinite(more))
        yield {
          cause: 'amplitude',
          words: `source “${emitters.sources[0]!.name}” is ${formatNumber(1 + more, 4)} times as strong as it should be`,
          remedy: 'check the amplitude and sign of this source',
          parameters: 1,
          model: plus(base, alone, more),
        };
    }
  }
}

const turned = (who: string): Omit<Trial, 'model'> => ({
  cause: 'sign',
  words: `the sign of ${who} is turned`,
  remedy: 'check the direction of positive current and of the axes',
  parameters: 0,
});

/** Decibels: v ↦ 20 log₁₀|v| + c, c fitted; what lies further below the peak than this is left out. */
const DECIBEL_DEPTH = 40;

function* decibelTrials(refit: Refit): Generator<Trial> {
  const { bases, given } = refit;
  for (const base of bases) {
    const peaks = base.map((values) => values.reduce((most, v) => Math.max(most, Math.abs(v)), 0));
    let offset = 0;
    let count = 0;
    const level = base.map((values, k) =>
      values.map((v, n) => {
        const dB = decibels(Math.abs(v));
        if (!(Math.abs(v) > 0) || dB < decibels(peaks[k]!) - DECIBEL_DEPTH) return Number.NaN;
        offset += given[k]!.values[n]! - dB;
        count++;
        return dB;
      }),
    );
    if (count === 0) continue;
    const c = offset / count;
    // What is left out is taken as given: there a logarithm tells of noise alone.
    const model = level.map((values, k) => values.map((dB, n) => (Number.isNaN(dB) ? given[k]!.values[n]! : dB + c)));
    yield {
      cause: 'decibels',
      words: `the values are decibels${Math.abs(c) < 1 ? '' : ` (offset ${formatNumber(c, 3)} dB)`}, not field strengths`,
      remedy: 'write field strengths with their sign: decibels have lost it',
      parameters: 1,
      model,
    };
  }
}

/** A static field counts from this share of the peak on: −60 dB, as for the observers' figures. */
const STATIC_SHARE = 1e-3;

function* staticTrials(refit: Refit): Generator<Trial> {
  const { bases, given, scenario, own } = refit;
  const { sources, medium } = scenario;
  const hasStatic = bases[0]!.some((values, k) => {
    const peak = values.reduce((most, v) => Math.max(most, Math.abs(v)), 0);
    return own(k) < 3 && Math.abs(values.at(-1)!) > STATIC_SHARE * peak;
  });
  if (!hasStatic) return;
  const trial = {
    cause: 'staticLost' as const,
    remedy:
      'walls that do not carry a static field (Mur near the source), a hard source, or a high-pass on the way to the file: use a CPML with α > 0, or further walls',
  };
  const scale = Math.min(...sources.map(({ waveform }) => waveform.timeScale));
  const scan = Array.from({ length: 25 }, (_, n) => scale * pow(10, n / 8 - 0.5));
  for (const base of bases) {
    yield {
      ...trial,
      words: 'E has no mean: its static part is taken off the whole window',
      parameters: 0,
      model: base.map((values, k) => {
        const mean = own(k) < 3 ? values.reduce((sum, v) => sum + v, 0) / values.length : 0;
        return values.map((v) => v - mean);
      }),
    };
    yield {
      ...trial,
      words: 'E returns to zero where charge leaves a static field',
      parameters: 0,
      model: base.map((values, k) => {
        if (own(k) >= 3) return values;
        const { time } = given[k]!.group;
        const [from, to] = [
          firstArrival(sources, medium, given[k]!.place),
          lastArrival(sources, medium, given[k]!.place, 0.01),
        ];
        const rest = values.at(-1)!;
        return values.map((v, n) => v - rest * Math.min(1, Math.max(0, (time[n]! - from) / (to - from))));
      }),
    };
    const model = (T: number) =>
      base.map((values, k) => (own(k) < 3 ? highPass(values, given[k]!.group.time, T) : values));
    const { x } = leastOf((T) => refit.residual(model(T)), scan, 12);
    yield {
      ...trial,
      words: `E loses its static field with a time constant of ${formatQuantity(x, 's', 2)}`,
      parameters: 1,
      model: model(x),
    };
  }
}

/** y′ = x′ − y/T, the trapezoidal rule, from y = 0. */
function highPass(values: Float64Array, time: Float64Array, T: number): Float64Array {
  const out = new Float64Array(values.length);
  let y = values[0]!;
  out[0] = y;
  for (let n = 1; n < values.length; n++) {
    const half = (time[n]! - time[n - 1]!) / (2 * T);
    y = (y * (1 - half) + values[n]! - values[n - 1]!) / (1 + half);
    out[n] = y;
  }
  return out;
}

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
function* wallTrials(refit: Refit, behind: readonly (0 | 1)[]): Generator<Trial> {
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

/** Factors on the wave speed that are tried first. */
const SPEEDS = [0.5, 0.577, 0.667, 0.75, 0.85, 0.95, 1.05, 1.15, 1.3, 1.5, 1.75, 2];

/** The same currents in another medium. */
function* mediumTrials(refit: Refit, json: unknown): Generator<Trial> {
  const { scenario, own } = refit;
  const inMedium = (relativePermittivity: number, relativePermeability: number): Signals | null => {
    const other = withMedium(json, relativePermittivity, relativePermeability);
    return other ? refit.arrangement(refit.places(), other).signals((t) => t, own, false) : null;
  };
  const { relativePermittivity: permittivity, relativePermeability: permeability } = scenario.medium;
  const remedy = 'check permittivity and permeability of the medium';
  if (permittivity !== 1 || permeability !== 1) {
    const model = inMedium(1, 1);
    if (model)
      yield {
        cause: 'medium',
        words: 'the field is that of the same currents in vacuum',
        remedy,
        parameters: 0,
        model,
      };
  }
  const at = (speed: number) => inMedium(permittivity / (speed * speed), permeability);
  const { x } = leastOf(
    (speed) => {
      const model = at(speed);
      return model ? refit.residual(model) : Number.POSITIVE_INFINITY;
    },
    SPEEDS,
    10,
  );
  const model = at(x);
  if (model)
    yield {
      cause: 'medium',
      words: `waves travel ${formatNumber(x, 3)} times as fast as in the medium (relative permittivity ${formatNumber(permittivity / (x * x), 3)})`,
      remedy,
      parameters: 1,
      model,
    };
}

/** The scenario in another medium; null where it is none then. */
function withMedium(json: unknown, relativePermittivity: number, relativePermeability: number): Scenario | null {
  if (relativePermittivity < 1) return null;
  const loaded = loadScenario({ ...(json as object), medium: { relativePermittivity, relativePermeability } });
  return 'problems' in loaded ? null : loaded.scenario;
}
