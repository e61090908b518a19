import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import type { CauseName } from '../../src/run/judge/trial.ts';
import type { Vec3 } from '../../src/scenario/model.ts';
import { COMPONENTS, STAGGER, type Trace } from '../../src/trace/trace.ts';

/** The grid's own traces of a scenario, sound as far as the grid is. */
export interface Original {
  readonly name: string;
  readonly traces: readonly Trace[];
  readonly timeStep: number;
  readonly cellSize: Vec3;
  readonly impedance: number;
  readonly permeability: number;
  /** traces of the same scenario with one wall spoilt, or in another medium: runs of the grid itself */
  readonly spoilt: readonly {
    readonly cause: 'wall' | 'medium';
    readonly what: string;
    readonly traces: readonly Trace[];
  }[];
  /** whether charge leaves a static field */
  readonly isCharged: boolean;
  /** how coordinates and components may be swapped alike without meeting a symmetry of the source */
  readonly isLopsided: boolean;
}

export interface Corrupted {
  readonly cause: CauseName;
  readonly what: string;
  readonly original: Original;
  readonly traces: readonly Trace[];
}

type Random = { uniform(low: number, high: number): number; pick<T>(list: readonly T[]): T };

function randomOf(seed: number): Random {
  const generator = xoroshiro128plus(seed);
  const uniform = (low: number, high: number) => low + (high - low) * uniformFloat64(generator);
  return { uniform, pick: (list) => list[Math.floor(uniform(0, list.length))]! };
}

type Change = (trace: Trace) => Trace;
const isE = ({ component }: Trace) => component.startsWith('E');
const SCOPES = { 'E and H': () => true, E: isE, H: (trace: Trace) => !isE(trace) } as const;

const retimed =
  (of: (t: number) => number, over: (trace: Trace) => boolean = () => true): Change =>
  (trace) =>
    over(trace) ? { ...trace, time: trace.time.map(of) } : trace;
const scaled =
  (factor: number, over: (trace: Trace) => boolean = () => true): Change =>
  (trace) =>
    over(trace) ? { ...trace, values: trace.values.map((v) => factor * v) } : trace;
const replaced =
  (of: (at: Vec3, trace: Trace) => Vec3): Change =>
  (trace) => ({ ...trace, at: of(trace.at, trace) });

/** x, y, z renamed in components. */
const renamed =
  (order: readonly number[], over: (trace: Trace) => boolean = () => true): Change =>
  (trace) => {
    if (!over(trace)) return trace;
    const c = COMPONENTS.indexOf(trace.component);
    return { ...trace, component: COMPONENTS[(c < 3 ? 0 : 3) + order.indexOf(c % 3)]! };
  };

const ORDERS = [
  [1, 0, 2],
  [0, 2, 1],
  [2, 1, 0],
  [1, 2, 0],
  [2, 0, 1],
] as const;

/** The component of the first observer with the largest sum of squares, of either field. */
function strongest({ traces }: Original, field: 'E' | 'H'): string {
  const first = traces.filter((t) => t.observer === traces[0]!.observer && t.component.startsWith(field));
  const size = (t: Trace) => t.values.reduce((sum, v) => sum + v * v, 0);
  return first.reduce((a, b) => (size(b) > size(a) ? b : a)).component;
}

/** What each cause does to traces, with a draw for what it leaves open. */
const MAKERS: Record<
  Exclude<CauseName, 'wall' | 'medium'>,
  (original: Original, random: Random) => readonly [string, Change]
> = {
  halfTimeStep({ timeStep }, { pick }) {
    const [scope, sign] = [pick(['E and H', 'E', 'H'] as const), pick([1, -1])];
    return [`${scope} ${sign < 0 ? '−' : '+'}Δt/2`, retimed((t) => t + (sign * timeStep) / 2, SCOPES[scope])];
  },
  timeOffset({ timeStep }, { uniform, pick }) {
    const by = pick([1, -1]) * uniform(2.2, 14.8) * timeStep;
    return [`${(by / timeStep).toFixed(2)} Δt`, retimed((t) => t + by)];
  },
  timeUnit(_, { pick }) {
    const factor = pick([1e3, 1e6, 1e9, 1e12]);
    return [`times × ${factor}`, retimed((t) => t * factor)];
  },
  timeScale(_, { uniform, pick }) {
    const factor = pick([uniform(0.75, 0.96), uniform(1.04, 1.3)]);
    return [`times × ${factor.toFixed(3)}`, retimed((t) => t * factor)];
  },
  halfCell({ cellSize }, { pick }) {
    const [axis, sign] = [pick([0, 1, 2]), pick([1, -1])];
    return [
      `${sign < 0 ? '−' : '+'}h/2 along ${'xyz'[axis]}`,
      replaced((at) => at.map((x, a) => (a === axis ? x + (sign * cellSize[a]!) / 2 : x)) as unknown as Vec3),
    ];
  },
  stagger({ cellSize }) {
    return [
      'nodes given as places',
      replaced((at, { component }) => {
        const offset = STAGGER[COMPONENTS.indexOf(component)]!;
        return at.map((x, a) => x - offset[a]! * cellSize[a]!) as unknown as Vec3;
      }),
    ];
  },
  lengthUnit(_, { pick }) {
    const factor = pick([1e3, 1e-3, 1e2]);
    return [`places × ${factor}`, replaced((at) => at.map((x) => x * factor) as unknown as Vec3)];
  },
  axesSwapped({ isLopsided }, { pick }) {
    const order = pick(ORDERS);
    const shown = order.map((a) => 'xyz'[a]).join('');
    const kind = pick(isLopsided ? ['components', 'components of H', 'both'] : ['components', 'components of H']);
    if (kind !== 'both') return [`${kind} ${shown}`, renamed(order, kind === 'components' ? undefined : SCOPES.H)];
    const places = replaced((at) => [at[order[0]]!, at[order[1]]!, at[order[2]]!]);
    return [`coordinates and components ${shown}`, (trace) => renamed(order)(places(trace))];
  },
  sign(original, { pick }) {
    const what = pick(['E and H', 'E', 'H', 'strongest E', 'strongest H'] as const);
    if (what in SCOPES) return [what, scaled(-1, SCOPES[what as keyof typeof SCOPES])];
    const component = strongest(original, what.at(-1) as 'E' | 'H');
    return [component, scaled(-1, (trace) => trace.component === component)];
  },
  powerOfTen(_, { pick }) {
    const [scope, power] = [pick(['E and H', 'E', 'H'] as const), pick([-9, -6, -3, -2, -1, 1, 2, 3, 6])];
    return [`${scope} × 10^${power}`, scaled(Number(`1e${power}`), SCOPES[scope])];
  },
  decibels(_, { pick }) {
    const offset = pick([0, 120]);
    return [
      `20 log|v| + ${offset}`,
      (trace) => ({ ...trace, values: trace.values.map((v) => 20 * Math.log10(Math.abs(v) + 1e-30) + offset) }),
    ];
  },
  fluxForField({ permeability }, { pick }) {
    const factor = pick([permeability, 1 / permeability]);
    return [`H × ${factor.toExponential(2)}`, scaled(factor, SCOPES.H)];
  },
  impedance({ impedance }, { pick }) {
    const [scope, factor] = [pick(['E', 'H'] as const), pick([impedance, 1 / impedance])];
    return [`${scope} × ${factor.toPrecision(3)}`, scaled(factor, SCOPES[scope])];
  },
  amplitude(_, { uniform, pick }) {
    const factor = pick([uniform(0.25, 0.9), uniform(1.15, 3.5), -uniform(1.3, 2.5)]);
    return [`× ${factor.toFixed(3)}`, scaled(factor)];
  },
  staticLost({ timeStep }, { uniform, pick }) {
    const kind = pick(['high-pass', 'offset removed', 'fading']);
    const constant = uniform(30, 200);
    const change: Change = (trace) => {
      if (!isE(trace)) return trace;
      const { values } = trace;
      if (kind === 'offset removed') {
        const mean = values.reduce((sum, v) => sum + v, 0) / values.length;
        return { ...trace, values: values.map((v) => v - mean) };
      }
      if (kind === 'high-pass') {
        // the response of a series capacitor, exactly for a signal that is straight between samples
        const decay = Math.exp(-1 / constant);
        let y = values[0]!;
        return {
          ...trace,
          values: values.map((v, n) => {
            if (n > 0) y = y * decay + (v - values[n - 1]!) * constant * (1 - decay);
            return y;
          }),
        };
      }
      // a wall that lets the charge's field go: what is left at the end fades in with the passing charge
      const rest = values.at(-1)!;
      const total = values.reduce((sum, v) => sum + Math.abs(v), 0);
      let passed = 0;
      return {
        ...trace,
        values: values.map((v) => {
          passed += Math.abs(v);
          return v - rest * Math.min(1, (1.5 * passed) / total);
        }),
      };
    };
    return [
      kind === 'high-pass'
        ? `high-pass of ${constant.toFixed(0)} Δt (${(constant * timeStep).toExponential(1)} s)`
        : kind,
      change,
    ];
  },
};

/**
 * Corrupted copies, every cause in turn, of originals in turn: `each` of each cause. Walls and media are runs of the grid
 * with another wall or medium; everything else is done to its traces.
 */
export function corruptedCopies(originals: readonly Original[], each: number, seed: number): Corrupted[] {
  const random = randomOf(seed);
  const made: Corrupted[] = [];
  for (const [cause, make] of Object.entries(MAKERS) as [keyof typeof MAKERS, (typeof MAKERS)[keyof typeof MAKERS]][]) {
    const able = cause === 'staticLost' ? originals.filter(({ isCharged }) => isCharged) : originals;
    for (let n = 0; n < each; n++) {
      const original = able[n % able.length]!;
      const [what, change] = make(original, random);
      made.push({ cause, what, original, traces: original.traces.map(change) });
    }
  }
  for (const original of originals)
    for (const { cause, what, traces } of original.spoilt) made.push({ cause, what, original, traces });
  return made;
}
