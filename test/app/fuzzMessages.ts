import fc from 'fast-check';
import { expect, vi } from 'vitest';
import { WALLS } from '../../src/run/planSearch.ts';
import { EXAMPLES } from '../../src/scenario/examples.ts';

/** The page's workers that are asked with what a user gave, each by the module that it runs. */
const WORKERS = {
  coordinator: () => import('../../src/app/coordinator.ts'),
  survey: () => import('../../src/app/ladders/coordinator.ts'),
  filmer: () => import('../../src/app/ladders/filmer.ts'),
  planner: () => import('../../src/app/plan/planner.ts'),
  predictor: () => import('../../src/app/predictor.ts'),
  judge: () => import('../../src/app/judge/coordinator.ts'),
} as const;
export type WorkerName = keyof typeof WORKERS;
export const WORKER_NAMES = Object.keys(WORKERS) as WorkerName[];

/** A worker's module, heard and asked as the page does it, on this thread. */
export interface Asked {
  /** what it tells after a message: the first report that is no progress */
  ask(data: unknown): Promise<Report>;
}

interface Report {
  readonly kind?: string;
  readonly message?: string;
  readonly failed?: string;
  readonly problems?: readonly { readonly message: string }[];
}

export async function startHere(name: WorkerName): Promise<Asked> {
  let listen: ((event: { data: unknown }) => void) | undefined;
  let hear: (report: Report) => void = () => {};
  vi.stubGlobal('addEventListener', (_: string, listener: typeof listen) => {
    listen = listener;
  });
  vi.stubGlobal('postMessage', (report: Report) => {
    // Whatever a worker tells must be able to travel.
    structuredClone(report);
    if (report.kind !== 'progress') hear(report);
  });
  await WORKERS[name]();
  return {
    ask: (data) =>
      new Promise((resolve, reject) => {
        const timer = setTimeout(() => reject(new Error(`${name} says nothing`)), 10_000);
        hear = (report) => {
          clearTimeout(timer);
          resolve(report);
        };
        listen!({ data });
      }),
  };
}

/** No scenario: refused before anything is run, whatever it is. */
const noScenario = fc.oneof(
  fc.constantFrom<unknown>(null, undefined, 3, '', '{', [], {}, { sources: [] }, '{"sources":'),
  fc.jsonValue({ maxDepth: 3 }),
  fc
    .constantFrom(...Object.values(EXAMPLES))
    .chain((example) =>
      fc
        .tuple(
          fc.constantFrom('duration', 'grid', 'sources', 'observers'),
          fc.constantFrom<unknown>(null, 3, '1 kg', [3], 'x'),
        )
        .map(([key, value]) => ({ ...example, [key]: value })),
    ),
  // large, and deep
  fc.constantFrom(1e3, 1e5).map((n) => ({ sources: new Array(n).fill(0) })),
  fc.constant(JSON.parse(`${'['.repeat(900)}${']'.repeat(900)}`)),
);
const anything = fc.oneof(
  fc.constantFrom<unknown>(undefined, null, Number.NaN, -1, 1e300, 0.5, '', 'x', [], {}, new Uint8Array(3), new Map()),
  fc.jsonValue({ maxDepth: 2 }),
  fc.string(),
);
const planes = fc.oneof(
  anything,
  fc.array(fc.record({ name: anything, normal: fc.oneof(fc.nat(3), anything), at: fc.oneof(fc.double(), anything) }), {
    maxLength: 4,
  }),
  fc.constant(new Array(1e4).fill({ name: 'x', normal: 1, at: 0 })),
);

/** Messages that look like requests of each worker, with a fault: at the least their scenario is none. */
const MESSAGES: Readonly<Record<WorkerName, fc.Arbitrary<unknown>>> = {
  coordinator: fc.oneof(
    fc.record({ kind: fc.constant('run'), scenario: noScenario, planes: fc.oneof(fc.constant([]), planes) }),
    fc.record({ kind: fc.constant('run'), planes: planes.filter((list) => !isSound(list)), scenario: noScenario }),
    fc.record({ kind: fc.constant('planes'), planes }),
    fc.record({ kind: fc.constant('potentials'), slice: anything, frame: anything }),
  ),
  survey: fc.record({
    kind: fc.constantFrom('run', 'collect', 'gather'),
    survey: fc.oneof(
      noScenario,
      fc.record({ scenario: noScenario, vary: anything }),
      fc.record({ scenario: fc.constant('small-loop'), vary: fc.dictionary(fc.string(), fc.array(anything)) }),
    ),
    kept: fc.oneof(fc.constant([]), anything, fc.array(fc.tuple(fc.string(), fc.string()))),
  }),
  filmer: fc.record({ scenarios: fc.oneof(anything, fc.array(noScenario, { maxLength: 3 })) }),
  planner: fc.record({
    id: fc.oneof(fc.nat(), anything),
    wanted: fc.oneof(
      anything,
      fc.record(
        {
          scenario: noScenario,
          tolerance: fc.oneof(fc.double(), anything),
          at: anything,
          distance: anything,
          band: anything,
          walls: fc.oneof(fc.constant(WALLS), anything),
        },
        { requiredKeys: ['scenario', 'walls'] },
      ),
    ),
  }),
  predictor: fc.record({ scenario: noScenario }),
  judge: fc.record({
    scenario: fc.oneof(noScenario, fc.constant(EXAMPLES['bench-cable-pulse'])),
    name: fc.oneof(fc.constantFrom('a.csv', 'a.npy', 'a.npz'), anything),
    bytes: fc.oneof(fc.uint8Array({ maxLength: 40 }), anything),
    map: fc.oneof(fc.constant({}), anything),
    cellSize: fc.option(fc.string(), { nil: undefined }),
  }),
};

const isSound = (list: unknown): boolean => Array.isArray(list) && list.length === 0;

/** Requests that are heard and answered with nothing: they ask about what is not there. */
const isIdle = (name: WorkerName, data: unknown): boolean => {
  const { kind, slice, frame } = (data ?? {}) as Record<string, unknown>;
  const index = (n: unknown) => Number.isSafeInteger(n) && (n as number) >= 0;
  return name === 'coordinator' && kind === 'potentials' && index(slice) && index(frame);
};

/**
 * Whatever a worker of the page is asked, it answers within ten seconds, in words of ours, and goes on.
 * @param asked the worker, started
 */
export const fuzzMessages = (name: WorkerName, asked: Asked, seen: { refused: number; answered: number }) =>
  fc.asyncProperty(
    fc.oneof({ weight: 3, arbitrary: MESSAGES[name] }, { weight: 1, arbitrary: anything }),
    async (data) => {
      fc.pre(!isIdle(name, data));
      const report = await asked.ask(data);
      const words = report.message ?? report.failed ?? report.problems?.map(({ message }) => message).join('\n');
      if (words === undefined) {
        seen.answered++;
        // Nothing to refuse: planes of no run, or what kept cases of a sound survey say.
        expect(report.kind).toMatch(/^(done|soFar)$/);
        return;
      }
      seen.refused++;
      expect(words.length).toBeGreaterThan(10);
      expect(words).not.toMatch(/\[object|is not a function|not iterable|Cannot read|call stack|Unexpected token/);
    },
  );
