import { XMLParser } from 'fast-xml-parser';
import { expect, test } from 'vitest';
import { collection, framing, imageData, imageName, patches } from '../../src/files/vti.ts';
import { frameOf, REGION, slabs, value } from './lattice.ts';
import { readImage } from './vtiReader.ts';

test.each(['single', 'double'] as const)(
  'every value at its place, in whatever order slabs come (%s precision)',
  (precision) => {
    const frame = frameOf(precision);
    for (let m = 0; m < 3; m++) {
      const image = imageData(REGION, frame, m);
      const bytes = new Uint8Array(image.size);
      const written = new Uint8Array(image.size);
      for (const { at, bytes: run } of [
        ...framing(image, REGION, frame),
        ...slabs().flatMap((slab) => patches(image, REGION, frame, slab, m)),
      ]) {
        bytes.set(run, at);
        for (let n = 0; n < run.length; n++) written[at + n]!++;
      }
      // No byte is left out, none is written twice.
      expect(written.every((times) => times === 1)).toBe(true);

      const { extent, origin, spacing, fieldData, pointData } = readImage(bytes);
      expect(extent).toEqual([0, 2, 0, 3, 0, 4]);
      expect([origin, spacing]).toEqual([REGION.origin, REGION.spacing]);
      expect(fieldData.get('TimeValue')).toEqual([frame.instants.E[m]]);
      expect(fieldData.get('time of H (s)')).toEqual([frame.instants.H[m]]);
      expect(fieldData.get('offset of Ex (m)')).toEqual([0.005, 0, 0]);
      expect(fieldData.get('offset of Hx (m)')).toEqual([0, 0.01, 0.015]);
      expect([...pointData.keys()]).toEqual(['E grid (V/m)', 'H grid (A/m)', 'E exact (V/m)', 'H exact (A/m)']);
      for (const [name, { components, values }] of pointData) {
        const [field, side] = name.split(' ') as ['E' | 'H', 'grid' | 'exact'];
        expect(components).toEqual([`${field}x`, `${field}y`, `${field}z`]);
        for (let n = 0; n < values.length; n++) {
          const [p, c] = [Math.floor(n / 3), (n % 3) + (field === 'E' ? 0 : 3)];
          expect(values[n]).toBe(value(side, c, m, p % 3, Math.floor(p / 3) % 4, Math.floor(p / 12)));
        }
      }
    }
  },
);

test('a collection names the files and their instants', () => {
  const frame = frameOf('single');
  const parsed = new XMLParser({ ignoreAttributes: false, attributeNamePrefix: '' }).parse(
    collection(REGION, frame),
    true,
  );
  const sets = parsed.VTKFile.Collection.DataSet as { file: string; timestep: string }[];
  expect(sets.map(({ file }) => file)).toEqual([0, 1, 2].map((m) => imageName(REGION, m)));
  expect(sets.map(({ timestep }) => Number(timestep))).toEqual([...frame.instants.E]);
  expect(imageName(REGION, 0)).toBe('part-0001.vti');
});
