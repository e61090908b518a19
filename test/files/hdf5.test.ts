import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import * as hdf5 from 'h5wasm/node';
import { afterAll, beforeAll, expect, test } from 'vitest';
import { SnapshotFile } from '../../src/files/hdf5.ts';
import { COMPONENTS, STAGGER } from '../../src/trace/trace.ts';
import { readHdf5 } from './hdf5Reader.ts';
import { frameOf, REGION, slabs, value } from './lattice.ts';

let folder = '';
beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'fieldassay-hdf5-'));
  await hdf5.ready;
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

test.each(['single', 'double'] as const)(
  'every value at its place, units and axes beside it (%s precision)',
  (precision) => {
    const frame = frameOf(precision);
    const path = join(folder, `${precision}.h5`);
    const file = new hdf5.File(path, 'w');
    const content = new SnapshotFile(file, [{ ...REGION, name: 'other' }, REGION], frame, { title: 'A “title”' });
    for (const slab of slabs()) content.write(1, slab);
    file.close();

    const read = readHdf5(readFileSync(path));
    expect(read.attrs.title).toBe('A “title”');
    expect(read.keys.sort()).toEqual(['other', 'part']);
    const axis = (name: string) => read.get(`part/${name}`);
    expect([axis('x').attrs.units, axis('time_E').attrs.units]).toEqual(['m', 's']);
    ['x', 'y', 'z'].forEach((name, a) => {
      const nodes = Array.from({ length: REGION.counts[a]! }, (_, n) => REGION.origin[a]! + n * REGION.spacing[a]!);
      expect([...axis(name).value]).toEqual(nodes);
    });
    expect([...axis('time_E').value]).toEqual([...frame.instants.E]);
    expect([...axis('time_H').value]).toEqual([...frame.instants.H]);
    for (const side of ['grid', 'exact'] as const)
      COMPONENTS.forEach((component, c) => {
        const { shape, dtype, value: values, attrs } = read.get(`part/${side}/${component}`);
        expect([shape, dtype]).toEqual([[3, 5, 4, 3], precision === 'single' ? '<f4' : '<f8']);
        expect(attrs.units).toBe(c < 3 ? 'V/m' : 'A/m');
        expect(attrs.axes).toEqual([c < 3 ? 'time_E' : 'time_H', 'z', 'y', 'x']);
        expect(attrs.offset).toEqual(STAGGER[c]!.map((s, a) => s * REGION.cellSize[a]!));
        for (let n = 0; n < 180; n++)
          expect(values[n]).toBe(
            value(side, c, Math.floor(n / 60), n % 3, Math.floor(n / 3) % 4, Math.floor(n / 12) % 5),
          );
      });
  },
);

test('the axes are dimension scales, as other programs look for them', () => {
  const file = new hdf5.File(join(folder, 'single.h5'), 'r');
  const Hz = file.get('part/grid/Hz') as InstanceType<typeof hdf5.Dataset>;
  expect([0, 1, 2, 3].map((n) => Hz.get_attached_scales(n))).toEqual([
    ['/part/time_H'],
    ['/part/z'],
    ['/part/y'],
    ['/part/x'],
  ]);
  file.close();
});
