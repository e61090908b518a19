/**
 * What the exact side costs on one thread: histories of gridded currents, closed forms, quadrature; and, where there is a
 * C compiler, the direct sum of as many delayed terms in C beside the delay spreading that takes its place, in turns.
 * Targets: 1 ms for 228 edges, 1000 instants and six components; 600 × 300 closed-form values well below 0.1 s.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath, pathToFileURL } from 'node:url';
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
  return import(pathToFileURL(file).href);
}

/** The path of the compiled program, or undefined where there is no compiler. */
function compiled(folder) {
  const program = join(folder, 'retarded');
  const flags = ['-O3', '-march=native', '-ffast-math', '-o', program, NATIVE, '-lm'];
  return ['gcc', 'clang', 'cc'].some((cc) => spawnSync(cc, flags, { stdio: 'ignore' }).status === 0)
    ? program
    : undefined;
}

function nativeJob(program, terms, instants) {
  return {
    case: `sum of ${terms} delayed terms (q, w, w′) at ${instants} instants, direct, in C`,
    unit: 'terms × instants',
    round() {
      const { stdout, status } = spawnSync(program, [String(terms), String(instants)], { encoding: 'utf8' });
      if (status !== 0) throw new Error(`native/retarded.c ended with status ${status}`);
      return JSON.parse(stdout);
    },
  };
}

const sorted = (list) => list.toSorted((a, b) => a - b);

/**
 * @param {number} rounds of every job, in turns, so that a busy machine slows all alike
 * @returns {Promise<{ title: string, targetMs: number, results: object[] }>} milliseconds a round and work a second
 */
export async function benchRetarded(rounds = 41) {
  const folder = mkdtempSync(join(tmpdir(), 'retarded-'));
  try {
    const { jobs, TERMS, INSTANTS } = await workload(folder);
    const list = jobs();
    const program = compiled(folder);
    if (program) list.push(nativeJob(program, TERMS, INSTANTS));
    for (const job of list.slice(0, jobs().length)) for (let n = 0; n < WARM_UP; n++) job.round();
    const taken = list.map(() => []);
    for (let n = 0; n < rounds; n++) for (const [m, job] of list.entries()) taken[m].push(job.round());
    return {
      title: 'The exact side, one thread, milliseconds',
      targetMs: TARGET_MS,
      results: list.map((job, m) => {
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
      }),
    };
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const { title, results } = await benchRetarded();
  console.log(title);
  for (const { case: name, median, least, most, perSecond, unit } of results)
    console.log(
      `${median.toFixed(3).padStart(9)} (${least.toFixed(3)} to ${most.toFixed(3)})  ${name}: ${perSecond.toPrecision(3)} ${unit} a second`,
    );
}
