/**
 * What a queue costs: one survey by four workers of one thread each, through a PostgreSQL server on the same machine, and by
 * the four threads of one process, in turns. No two of its cases share work, so that both do the same. Workers are there
 * before the clock starts. In every round they are new and have to warm up, each by itself (`cold`), as the one process has
 * to; then they get a second survey of like cases (`warm`), as workers do that stay. That is held against like cases in a
 * process that is warm as well: what the pool takes for both surveys' cases in one, less the first's, and what the command
 * takes to start and to write where all cases are known. What the queue alone takes is the time of a worker between two of its
 * cases, from its own tables.
 *
 *   node test/bench/queue.mjs [--rounds 3]
 */
import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { parseArgs } from 'node:util';
import { bundle } from '../fdtd/bundle.mjs';
import { median } from './median.mjs';

const MAIN = fileURLToPath(new URL('../../dist/main.js', import.meta.url));
const WORKERS = 4;

/** Twelve cases of some seconds each. */
const survey = (...firsts) => ({
  scenario: {
    sources: [
      {
        type: 'dipole',
        at: ['1 mm', '-2 mm', '3 mm'],
        direction: [0.2, 0, 1],
        length: '10 mm',
        current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
      },
    ],
    grid: { cellSize: '4 mm', box: { from: ['-100 mm', '-100 mm', '-100 mm'], to: ['100 mm', '100 mm', '100 mm'] } },
    duration: '3.5 ns',
    observers: [{ name: 'A', at: ['60 mm', '20 mm', '10 mm'] }],
  },
  vary: { 'grid.courant': firsts.flatMap((first) => Array.from({ length: 12 }, (_, n) => first + (3 * n) / 100)) },
});

const range = (list) => [Math.min(...list), Math.max(...list)];

function start(args, cwd) {
  const child = spawn(process.execPath, [MAIN, ...args], { cwd, stdio: ['ignore', 'ignore', 'pipe'] });
  const running = { child, said: '', ended: new Promise((done) => child.once('close', done)) };
  child.stderr.setEncoding('utf8').on('data', (text) => {
    running.said += text;
  });
  return running;
}

/** Processor time that a running process has spent, s, by Linux's account in hundredths; NaN elsewhere. */
function spent(pid) {
  const stat = `/proc/${pid}/stat`;
  if (!existsSync(stat)) return Number.NaN;
  const fields = readFileSync(stat, 'utf8')
    .replace(/^.*\) /, '')
    .split(' ');
  return (Number(fields[11]) + Number(fields[12])) / 100;
}

/** Wall time and processor time of a command, s: its own, and what others have spent meanwhile. */
async function timed(args, cwd, others = []) {
  const spentThere = () => others.reduce((sum, { child }) => sum + spent(child.pid), 0);
  const before = spentThere();
  const started = performance.now();
  const running = start(args, cwd);
  let own = 0;
  // Its account ends with it.
  const look = setInterval(() => {
    own = spent(running.child.pid) || own;
  }, 20);
  const status = await running.ended;
  clearInterval(look);
  if (status !== 0) throw new Error(`${args.join(' ')} ended with status ${status}: ${running.said}`);
  return { wall: (performance.now() - started) / 1000, cpu: own + spentThere() - before };
}

async function readyWorkers(url, cwd) {
  const workers = Array.from({ length: WORKERS }, () => start(['work', '--queue', url, '--threads', '1'], cwd));
  while (!workers.every(({ said }) => said.includes('takes cases'))) await new Promise((next) => setTimeout(next, 20));
  return workers;
}

const timeless = (file) =>
  JSON.stringify(
    JSON.parse(readFileSync(file, 'utf8'), (key, value) =>
      key === 'timings' || key === 'environment' ? undefined : value,
    ),
  );

/** Between two cases of a worker, over their time. */
const BETWEEN = `
  select sum(extract(epoch from started - before)) filter (where before is not null) / sum(extract(epoch from ended - started))
    as share
  from (select attempt.*, lag(ended) over (partition by process, survey order by attempt.id) as before
        from fieldassay.attempt join fieldassay.survey_case using (hash)) as attempt`;

/** @returns {Promise<{ title: string, results: object[] }>} */
export async function benchQueue(rounds = 3) {
  const { PostgresServer } = await import((await bundle({ postgres: 'test/queue/postgres.ts' }))('postgres'));
  const folder = mkdtempSync(join(tmpdir(), 'queue-'));
  const server = await PostgresServer.start();
  try {
    writeFileSync(join(folder, 'first.json'), JSON.stringify(survey(0.6)));
    writeFileSync(join(folder, 'second.json'), JSON.stringify(survey(0.601)));
    writeFileSync(join(folder, 'both.json'), JSON.stringify(survey(0.6, 0.601)));
    const runs = [];
    for (let round = 0; round < rounds; round++) {
      const database = `round_${round}`;
      await server.newDatabase(database);
      const url = server.url(database);
      const workers = await readyWorkers(url, folder);
      const cold = await timed(['survey', 'first.json', '--out', `queue-${round}`, '--queue', url], folder, workers);
      const warm = await timed(['survey', 'second.json', '--out', `second-${round}`, '--queue', url], folder, workers);
      for (const { child, ended } of workers) {
        child.kill('SIGINT');
        await ended;
      }
      const [{ share }] = await server.sql(BETWEEN, database);
      const here = async (name) =>
        await timed(['survey', `${name}.json`, '--out', `pool-${name}-${round}`, '--threads', `${WORKERS}`], folder);
      const pool = await here('first');
      const [both, known] = [await here('both'), await here('first')];
      const poolWarm = { wall: both.wall - pool.wall + known.wall, cpu: both.cpu - pool.cpu + known.cpu };
      const [a, b] = ['queue', 'pool-first'].map((who) => timeless(join(folder, `${who}-${round}/survey-result.json`)));
      if (a !== b) throw new Error('the results differ');
      const over = (a, b) => ({ wall: a.wall / b.wall - 1, cpu: a.cpu / b.cpu - 1 });
      const overs = { overCold: over(cold, pool), overWarm: over(warm, poolWarm) };
      runs.push({ cold, warm, pool, poolWarm, ...overs, between: Number(share) });
    }
    const of = (key, time = 'wall') => runs.map((run) => run[key][time]);
    return {
      title: 'A survey of twelve cases by four workers through a queue, against four threads of one process',
      results: [
        {
          case: 'wall time of the command',
          coldSeconds: median(of('cold')),
          warmSeconds: median(of('warm')),
          poolSeconds: median(of('pool')),
          poolWarmSeconds: median(of('poolWarm')),
          overCold: median(of('overCold')),
          overWarm: median(of('overWarm')),
          overWarmRange: range(of('overWarm')),
          // beside other work processor time tells more than the clock
          overColdProcessor: median(of('overCold', 'cpu')),
          overWarmProcessor: median(of('overWarm', 'cpu')),
          betweenCases: median(runs.map(({ between }) => between)),
          runs,
        },
      ],
    };
  } finally {
    await server.remove();
    rmSync(folder, { recursive: true, force: true });
  }
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const { values } = parseArgs({ options: { rounds: { type: 'string' } } });
  console.log(JSON.stringify(await benchQueue(values.rounds ? Number(values.rounds) : 3), null, 2));
}
