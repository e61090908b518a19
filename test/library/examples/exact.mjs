// The exact field of prescribed currents, anywhere, with a bound of its own error.   node exact.mjs
import { EXAMPLES, fieldAt, loadScenario } from 'fieldassay';

const loaded = loadScenario(EXAMPLES['bench-cable-pulse']);
if ('problems' in loaded) throw new Error(loaded.problems[0].message);
const { sources, medium } = loaded.scenario;

for (const x of [0.05, 0.5, 5]) {
  const { E, errorE } = fieldAt(sources, medium, [x, 0, 0], 0.9e-9 + x / medium.speed);
  console.log(`x = ${x} m: Ez = ${E[2].toPrecision(6)} V/m, right to ${errorE.toExponential(0)} V/m`);
}
