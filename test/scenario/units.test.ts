import { describe, expect, test } from 'vitest';
import { ELECTRIC_CONSTANT, MAGNETIC_CONSTANT, mediumOf, SPEED_OF_LIGHT } from '../../src/scenario/constants.ts';
import { type Kind, parseFraction, parseQuantity } from '../../src/scenario/units.ts';

describe('quantities', () => {
  // Exact: a decimal prefix shifts the point, so the double is the one nearest to the decimal number.
  const sound: [number | string, Kind, number][] = [
    ['5 mm', 'length', 0.005],
    ['-50mm', 'length', -0.05],
    ['  +1.5e2 um ', 'length', 150e-6],
    ['0.1 µm', 'length', 0.1e-6],
    ['3 m', 'length', 3],
    ['.5 km', 'length', 500],
    ['5. cm', 'length', 0.05],
    ['1 in', 'length', 0.0254],
    ['0.9 ns', 'time', 0.9e-9],
    ['7 ps', 'time', 7e-12],
    ['2 min', 'time', 120],
    ['2.4 GHz', 'frequency', 2.4e9],
    ['50 Hz', 'frequency', 50],
    ['4e7 1/s', 'rate', 4e7],
    ['0.6 1/ns', 'rate', 0.6e9],
    ['3 s^-1', 'rate', 3],
    ['30 kA', 'current', 30e3],
    ['250 mA', 'current', 0.25],
    ['0', 'length', 0],
    ['-0.0', 'time', 0],
    [0.005, 'length', 0.005],
    [-0, 'length', -0],
  ];
  for (const [given, kind, value] of sound)
    test(`${JSON.stringify(given)} is ${value}`, () => expect(parseQuantity(given, kind)).toEqual({ value }));

  const unsound: [number | string, Kind, string][] = [
    ['mm', 'length', 'does not begin with a number'],
    ['', 'length', 'does not begin with a number'],
    ['5', 'length', 'without a unit'],
    ['5 kg', 'length', 'a mass; it must be a length'],
    ['5 GHz', 'time', 'a frequency; it must be a time'],
    ['5 A', 'length', 'a current; it must be a length'],
    ['5 %', 'length', 'without a unit of measure'],
    ['5 rad/s', 'frequency', 'an angular velocity; it must be a frequency'],
    ['5 furlongz', 'length', 'unit “furlongz” is not known'],
    ['5 mm 3', 'length', 'is not known'],
    ['1e400 m', 'length', 'beyond the largest number'],
    ['1e99999999999999999999999 m', 'length', 'beyond the largest number'],
    ['NaN m', 'length', 'does not begin with a number'],
    ['Infinity m', 'length', 'does not begin with a number'],
    ['0x10 m', 'length', 'is not known'],
    ['5 m; 6 m', 'length', 'is not known'],
    ['1,5 mm', 'length', 'is not known'],
    [`1${' '.repeat(99)}m`, 'length', 'a text of 101 characters'],
    [Number.NaN, 'length', 'must be finite'],
    [Infinity, 'current', 'must be finite'],
  ];
  for (const [given, kind, reason] of unsound)
    test(`${JSON.stringify(given)} is refused as ${kind}`, () =>
      expect(parseQuantity(given, kind)).toEqual({ reason: expect.stringContaining(reason) }));

  test('fractions', () => {
    expect(parseFraction('5 %')).toEqual({ value: 0.05 });
    expect(parseFraction('0.1%')).toEqual({ value: 0.001 });
    expect(parseFraction(0.05)).toEqual({ value: 0.05 });
    for (const given of ['5', '0.05', '5 mm', '%', '5 %%', '1e400 %', Number.NaN])
      expect(parseFraction(given)).toHaveProperty('reason');
  });
});

test('constants agree with CODATA 2022', () => {
  expect(SPEED_OF_LIGHT).toBe(299_792_458);
  // CODATA 2022: ε0 = 8.854 187 8188(14)·10⁻¹² F/m, Z0 = 376.730 313 412(59) Ω, both from μ0 and c: to their last digit.
  expect(Math.abs(ELECTRIC_CONSTANT - 8.8541878188e-12)).toBeLessThan(1e-21);
  expect(Math.abs(mediumOf(1, 1).impedance - 376.730313412)).toBeLessThan(1e-9);
  expect(MAGNETIC_CONSTANT).toBe(1.25663706127e-6);
  const { speed, permittivity, permeability } = mediumOf(4, 2.25);
  expect(Math.abs(speed * Math.sqrt(permittivity * permeability) - 1)).toBeLessThan(4 * Number.EPSILON);
  expect(speed).toBe(SPEED_OF_LIGHT / 3);
});
