// Both solvers on a scenario of one's own, and what their differences say.   node verdict.mjs
import { compare, Refusal, resultText } from 'fieldassay';

const scenario = {
  title: 'Short element in a box',
  sources: [
    {
      type: 'dipole',
      at: ['0 mm', '0 mm', '0 mm'],
      direction: [0, 0, 1],
      length: '5 mm',
      current: { waveform: { type: 'gaussianDerivative', amplitude: '1 A', delay: '1.8 ns', sigma: '0.2 ns' } },
    },
  ],
  grid: { cellSize: '8 mm', box: { from: ['-80 mm', '-80 mm', '-80 mm'], to: ['80 mm', '80 mm', '80 mm'] } },
  duration: '3.4 ns',
  observers: [{ name: 'A', at: ['64 mm', '16 mm', '8 mm'] }],
};

const { result } = await compare(scenario, {
  onProgress: ({ stage, fraction }) => process.stderr.write(`${Math.round(100 * fraction)} % ${stage}\r`),
});
console.log(resultText(result));
const lattice = result.budget.lattice?.relativeL2; // null where free space cannot be told from the walls
if (lattice) console.log(`The lattice makes ${(100 * lattice).toPrecision(2)} % of E.`);

// What cannot be run is refused, with the place and the remedy of every problem.
try {
  await compare({ ...scenario, duration: '3 mm' });
} catch (error) {
  if (!(error instanceof Refusal)) throw error;
  for (const { path, message } of error.problems) console.log(`${path}: ${message}`);
}
