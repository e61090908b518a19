import { describe, expect, it } from 'vitest';
import {
  formatAboveFloor,
  formatDecibels,
  formatNumber,
  formatPercent,
  formatQuantity,
  formatScientific,
  formatUpperBound,
} from '../../src/elementary/quantity.ts';

describe('numbers for people', () => {
  it.each([
    [0.0312, 'm', '31.2 mm'],
    [0.54, 'm', '0.54 m'],
    [0.09996, 'm', '0.1 m'],
    [1500, 'm', '1.5 km'],
    [2.4e9, 'Hz', '2.4 GHz'],
    [999.6, 'Hz', '1 kHz'],
    [-1.234e-12, 's', '−1.23 ps'],
    [0, 'V/m', '0 V/m'],
    [1.84e-9, 's', '1.84 ns'],
    [2.31e8, 'B', '231 MB'],
    [1.2345, '', '1.23'],
    [4e7, '1/s', '4·10⁷ 1/s'],
    [3e-19, 's', '0.0003 fs'],
  ])('%d %s is %s', (value, unit, text) => {
    expect(formatQuantity(value, unit)).toBe(text);
  });

  it('uses a power of ten where digits would be zeros, and says what is no number', () => {
    expect(formatNumber(2.13e-7)).toBe('2.13·10⁻⁷');
    expect(formatScientific(-2.13e-7)).toBe('−2.1·10⁻⁷');
    expect(formatNumber(Number.NaN)).toBe('—');
    expect(formatNumber(Number.NEGATIVE_INFINITY)).toBe('−∞');
  });

  it('rounds bounds up', () => {
    expect(formatUpperBound(1.3e-7)).toBe('2·10⁻⁷');
    expect(formatUpperBound(9.1e-7)).toBe('1·10⁻⁶');
    expect(formatUpperBound(2e-7)).toBe('2·10⁻⁷');
    expect(formatUpperBound(0)).toBe('0');
  });

  it('shows fractions as percentages, ratios in decibels, and never a value below its floor', () => {
    expect(formatPercent(0.0312)).toBe('3.1 %');
    expect(formatPercent(0.05)).toBe('5 %');
    expect(formatDecibels(-71.3)).toBe('−71 dB');
    expect(formatDecibels(Number.NEGATIVE_INFINITY)).toBe('−∞ dB');
    expect(formatAboveFloor(0.0312, 1e-5)).toBe('3.1 %');
    expect(formatAboveFloor(1e-6, 6.3e-5)).toBe('< −84 dB (floor)');
  });
});
