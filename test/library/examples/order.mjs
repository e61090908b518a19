// The same pulse on three grids: by how much does the lattice's error fall?   node order.mjs
import { compare, EXAMPLES } from 'fieldassay';

const { grid, ...question } = EXAMPLES['small-loop'];
let coarser = { size: NaN, error: NaN };
for (const size of [10, 8, 6]) {
  const { result } = await compare({ ...question, grid: { ...grid, cellSize: `${size} mm` } });
  const error = result.budget.lattice?.relativeL2 ?? NaN; // null where free space cannot be told from the walls
  const order = Math.log(coarser.error / error) / Math.log(coarser.size / size);
  console.log(`${size} mm: ${(100 * error).toPrecision(3)} % of E${order > 0 ? `, order ${order.toFixed(2)}` : ''}`);
  coarser = { size, error };
}
