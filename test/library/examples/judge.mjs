// Traces of another solver against the exact field: from a file with headers of its own, and as numbers.   node judge.mjs
import { compare, EXAMPLES, judge, judgeQuestion, judgeText, Refusal, readForeignTraces, tracesOf } from 'fieldassay';

// What stands for the other solver: our own grid, whose source was set up 1.3 times too strong.
const scenario = EXAMPLES['small-loop'];
const foreign = tracesOf(await compare(scenario)).flatMap(({ observer, component, at, time, signals: { grid } }) =>
  grid ? [{ observer, component, at, time, values: grid.map((value) => 1.3 * value) }] : [],
);

const question = judgeQuestion(scenario);
const { result } = await judge(question, foreign, {
  onProgress: ({ stage, fraction }) => process.stderr.write(`${Math.round(100 * fraction)} % ${stage}\r`),
});
console.log(judgeText(result));
console.log(`Likeliest: ${result.causes.tried[0].cause}`);

// The same from a file; its headers tell component, observer and unit, a map what they do not.
const [one] = foreign.filter(({ component }) => component === 'Ez');
if (!one) throw new Error('there is no Ez');
const csv = ['T,probe 1 [kV/m]', ...Array.from(one.time, (t, n) => `${1e9 * t},${1e-3 * one.values[n]}`)].join('\n');
/** @type {import('fieldassay').TraceMap} */
const map = {
  columns: { time: 'T', Ez: 'probe 1' },
  units: { time: 'ns' },
  observer: one.observer,
  positions: 'staggered',
};
const { traces, notes } = readForeignTraces('probe.csv', new TextEncoder().encode(csv), map, question.places);
const again = await judge(question, traces, { file: 'probe.csv', notes });
console.log(`${traces.length} trace of ${again.result.traces.file}: ${again.result.sentence}`);

// Traces that cannot be judged are refused, with the place and the remedy of every problem.
try {
  await judge(question, [{ ...one, time: one.time.slice().reverse() }]);
} catch (error) {
  if (!(error instanceof Refusal)) throw error;
  for (const { path, message } of error.problems) console.log(`${path}: ${message}`);
}
