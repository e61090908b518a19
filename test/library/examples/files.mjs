// Result, report and traces into a folder, as `fieldassay compare --out` writes them.   node files.mjs DIR
import { mkdirSync, writeFileSync } from 'node:fs';
import { compare, EXAMPLES, RESULT_FILES, resultFile, tracesOf, writeTracesNpz } from 'fieldassay';

const folder = process.argv[2] ?? 'out';
const comparison = await compare(EXAMPLES['small-loop']);
mkdirSync(folder, { recursive: true });
for (const file of RESULT_FILES) writeFileSync(`${folder}/${file}`, resultFile(file, comparison, 'node files.mjs'));
writeFileSync(`${folder}/traces.npz`, writeTracesNpz(tracesOf(comparison)));
console.log(comparison.result.verdict.sentence);
