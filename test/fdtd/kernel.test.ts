import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { BUILDS, FIELDS, VECTOR } from '../../src/fdtd/kernel.ts';

test('the driver knows the strides that the kernels were compiled with', () => {
  const { kernels } = JSON.parse(readFileSync('asconfig.json', 'utf8')) as {
    kernels: Record<string, { args: string[] }>;
  };
  for (const { size, stride } of BUILDS)
    for (const arithmetic of ['single', 'double', 'fused'])
      expect(kernels[`fdtd-${arithmetic}-${size}`]?.args).toContain(`FIELD_STRIDE=${stride}`);
});

test('every offset in an instruction stays below 2³¹, and fields are staggered within a page', () => {
  for (const { stride } of BUILDS) {
    expect(FIELDS + 5 * stride + 2 * VECTOR).toBeLessThan(2 ** 31);
    expect(stride % 4096).toBe(704);
  }
});
