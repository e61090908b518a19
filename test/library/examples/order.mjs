// The same pulse on three grids: by how much does the lattice's error fall?   node order.mjs
import { compare, EXAMPLES } from 'fieldassay';

const { grid, ...question } = EXAMPLES['small-loop'];
const errors = [];
for (const cellSize of ['10 mm', '8 mm', '6 mm']) {
  const { result } = await compare({ ...question, grid: { ...grid, cellSize } });
  errors.push([Number.parseFloat(cellSize), result.budget.lattice.relativeL2]);
}
for (const [n, [size, error]] of errors.entries()) {
  const [coarser, larger] = errors[n - 1] ?? [];
  const order = coarser ? Math.log(larger / error) / Math.log(coarser / size) : undefined;
  console.log(`${size} mm: ${(100 * error).toPrecision(3)} % of E${order ? `, order ${order.toFixed(2)}` : ''}`);
}
