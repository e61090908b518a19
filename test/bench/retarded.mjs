/**
 * What the exact side costs on one thread: histories of gridded currents, closed forms, quadrature; and, where there is a
 * C compiler, the direct sum of as many delayed terms in C beside the delay spreading that takes its place, and sums of as many
 * elements at one instant beside those of the kernel, in turns.
 * Then planes on one thread and on two, as workers share them, and what a history costs against edges and instants, drawn
 * in out/integral-cost.svg. Targets: 1 ms for 228 edges, 1000 instants and six components; 600 × 300 closed-form values well
 * below 0.1 s; a plane of 256² at one instant in 0.1 s; an animation of three planes of 128² and 120 frames in 2 s; two
 * threads 1.8 times as fast as one; element sums at 0.33 of the C compiler's, whose vectors are twice as long.
 */
import { spawnSync } from 'node:child_process';
import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
import { Worker } from 'node:worker_threads';
import { build } from 'vite';

const WORKLOAD = fileURLToPath(new URL('integral.ts', import.meta.url));
const NATIVE = fileURLToPath(new URL('native/retarded.c', import.meta.url));
export const TARGET_MS = 1;

/** A job is given to the compiler this many times before it counts. */
const WARM_UP = 20;

async function workload(folder) {
  const [{ output }] = await build({
    configFile: false,
    logLevel: 'error',
    build: { write: false, minify: false, target: 'es2022', lib: { entry: WORKLOAD, formats: ['es'] } },
  });
  const file = join(folder, 'integral.mjs');
  writeFileSync(file, output[0].code);
  writeFileSync(
    join(folder, 'worker.mjs'),
    `import { parentPort } from 'node:worker_threads';
import * as work from './integral.mjs';
parentPort.on('message', ([name, first, last]) => parentPort.postMessage(work[name](first, last)));
`,
  );
  return import(pathToFileURL(file).href);
}

/** Rows of a plane in pieces, which threads take as they come. */
const PLANES = [
  { name: 'planeRows', rows: 256, piece: 16, targetSeconds: 0.1, case: 'a plane of 256² at one instant, E and H' },
  {
    name: 'filmRows',
    rows: 128,
    piece: 8,
    targetSeconds: 2,
    case: 'an animation: three planes of 128², 120 frames, nine components',
  },
];

async function overThreads(folder, { name, rows, piece }, threads, rounds) {
  const team = Array.from({ length: threads }, () => new Worker(join(folder, 'worker.mjs')));
  const taken = [];
  const run = async () => {
    let next = 0;
    let checksum = 0;
    await Promise.all(
      team.map(async (worker) => {
        while (next < rows) {
          const first = next;
          next += piece;
          const answer = new Promise((resolve, reject) => {
            worker.once('message', resolve);
            worker.once('error', reject);
          });
          worker.postMessage([name, first, Math.min(rows, first + piece)]);
          checksum += await answer;
          worker.removeAllListeners('error');
        }
      }),
    );
    return checksum;
  };
  let checksum = await run();
  for (let round = 0; round < rounds; round++) {
    const start = performance.now();
    checksum = await run();
    taken.push((performance.now() - start) / 1000);
  }
  await Promise.all(team.map((worker) => worker.terminate()));
  return { seconds: sorted(taken)[taken.length >> 1], checksum };
}

async function planes(folder) {
  const found = [];
  for (const plane of PLANES) {
    const one = await overThreads(folder, plane, 1, 3);
    const two = await overThreads(folder, plane, 2, 5);
    found.push({
      case: plane.case,
      targetSeconds: plane.targetSeconds,
      oneThread: one.seconds,
      twoThreads: two.seconds,
      speedUp: one.seconds / two.seconds,
      checksum: one.checksum,
    });
  }
  return found;
}

/** The path of the compiled program, or undefined where there is no compiler. */
function compiled(folder) {
  const program = join(folder, 'retarded');
  const flags = ['-O3', '-march=native', '-ffast-math', '-o', program, NATIVE, '-lm'];
  return ['gcc', 'clang', 'cc'].some((cc) => spawnSync(cc, flags, { stdio: 'ignore' }).status === 0)
    ? program
    : undefined;
}

/** C against kernel: the kernel's share of the elements a second of C. */
const TARGET_SHARE = 0.33;

function nativeJob(program, name, what, unit, size, instants) {
  return {
    case: what,
    unit,
    round() {
      const { stdout, status } = spawnSync(program, [name, String(size), String(instants)], { encoding: 'utf8' });
      if (status !== 0) throw new Error(`native/retarded.c ended with status ${status}`);
      return JSON.parse(stdout);
    },
  };
}

function nativeJobs(program, { TERMS, INSTANTS, ELEMENTS, SUM_INSTANTS, ELEMENT_UNIT }) {
  const history = `sum of ${TERMS} delayed terms (q, w, w′) at ${INSTANTS} instants, direct, in C`;
  const sums = `E and B of ${ELEMENTS} elements in C, no estimate`;
  const elements = (name, pulse) =>
    nativeJob(program, name, `${sums}, ${pulse}`, ELEMENT_UNIT, ELEMENTS, 10 * SUM_INSTANTS);
  return [
    nativeJob(program, 'terms', history, 'terms × instants', TERMS, INSTANTS),
    elements('elements', 'the cheapest pulse'),
    elements('sampled', 'any pulse, from a table'),
  ];
}

/** Of results that count elements: the kernel's speed over that of C. */
function shares(results, unit) {
  const counting = results.filter((result) => result.unit === unit);
  const native = counting.filter((result) => result.case.includes(' in C,'));
  return counting
    .filter((result) => !native.includes(result))
    .flatMap((ours) =>
      native.map((theirs) => ({
        case: `${ours.case}, over: ${theirs.case}`,
        ratio: ours.perSecond / theirs.perSecond,
        target: TARGET_SHARE,
      })),
    );
}

const sorted = (list) => list.toSorted((a, b) => a - b);

/**
 * @param {number} rounds of every job, in turns, so that a busy machine slows all alike
 * @returns {Promise<{ title: string, targetMs: number, results: object[] }>} milliseconds a round and work a second
 */
export async function benchRetarded(rounds = 41) {
  const folder = mkdtempSync(join(tmpdir(), 'retarded-'));
  try {
    const work = await workload(folder);
    const { jobs, costs, costSvg } = work;
    const list = jobs();
    const program = compiled(folder);
    const own = list.length;
    if (program) list.push(...nativeJobs(program, work));
    for (const job of list.slice(0, own)) for (let n = 0; n < WARM_UP; n++) job.round();
    const taken = list.map(() => []);
    for (let n = 0; n < rounds; n++) for (const [m, job] of list.entries()) taken[m].push(job.round());
    const cost = costs();
    mkdirSync('out', { recursive: true });
    writeFileSync('out/integral-cost.svg', costSvg(cost));
    const timed = list.map((job, m) => {
      const ms = sorted(taken[m].map(({ seconds }) => 1000 * seconds));
      const median = ms[ms.length >> 1];
      return {
        case: job.case,
        median,
        least: ms[0],
        most: ms.at(-1),
        rounds,
        perSecond: (1000 * taken[m][0].work) / median,
        unit: job.unit,
        checksum: taken[m][0].checksum,
      };
    });
    return {
      title: 'The exact side, one thread, milliseconds',
      targetMs: TARGET_MS,
      results: [
        ...(await planes(folder)),
        ...Object.entries(cost).map(([against, points]) => ({
          case: `cost of six components at one point against ${against}, seconds`,
          points: Object.fromEntries(points),
        })),
        ...timed,
        ...shares(timed, work.ELEMENT_UNIT),
      ],
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const { title, results } = await benchRetarded();
  console.log(title);
  for (const result of results) console.log(JSON.stringify(result));
}
