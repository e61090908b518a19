import { expect, test } from 'vitest';
import { compareSolvers } from '../../src/run/compare.ts';
import { planCases } from '../run/planCases.ts';

test('no sound run is accused: 24 scenarios at 8 to 12 cells per shortest wavelength agree with their prediction', async () => {
  const rows: { case: string; status: string; 'mismatch, %': number; 'limit, %': number }[] = [];
  const cells = [8.05, 9, 10, 12];
  for (const [n, { label, json }] of planCases(5150, 24).entries()) {
    const { cellSize, box } = json.grid;
    // The placeholder has 10 cells in the wavelength that the cases are made for.
    const grid = { cellSize: (cellSize * 10) / cells[n % 4]! / 1.02, box, boundary: { type: 'cpml', layers: 6 } };
    const { result } = await compareSolvers({ ...json, grid });
    const { status, mismatch, limit, reason } = result.checks[0]!;
    rows.push({ case: label, status, 'mismatch, %': 100 * mismatch!, 'limit, %': 100 * limit! });
    if (status === 'not judged') console.log(label, reason);
  }
  console.table(rows);
  expect(rows.filter(({ status }) => status === 'differs')).toEqual([]);
  expect(rows.filter(({ status }) => status === 'agrees').length).toBeGreaterThan(18);
});
