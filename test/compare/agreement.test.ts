import { describe, expect, it } from 'vitest';
import { agreementSentence, latticeAgreement, type PredictedLattice } from '../../src/compare/agreement.ts';
import { fieldOf, gaussian, levelsOf, scaled, sum } from './synthetic.ts';

const gridded = fieldOf(3, 150, (p, c, t) => (c + 1 + p) * gaussian(t, 70, 12));
const lattice = scaled(gridded, 0.02);
const free = sum(gridded, lattice);

/** A prediction of some points at every third instant, off by a fraction of the field. */
function predicted(points: readonly number[], off: number, remainder = 0): PredictedLattice {
  const every = 3;
  const thinned = 50;
  const values = new Float64Array(points.length * 6 * thinned);
  points.forEach((point, index) => {
    for (let c = 0; c < 6; c++)
      for (let m = 0; m < thinned; m++) {
        const n = (point * 6 + c) * 150 + 149 - (thinned - 1 - m) * every;
        values[(index * 6 + c) * thinned + m] = lattice.values[n]! + off * gridded.values[n]!;
      }
  });
  return { points: Int32Array.from(points), every, remainder, values };
}

describe('agreement of the lattice part with its prediction', () => {
  it('holds up to 0.1 % of the field and no further', () => {
    for (const [off, status] of [
      [0, 'agrees'],
      [0.0009, 'agrees'],
      [-0.0011, 'differs'],
    ] as const) {
      const found = latticeAgreement({ free, gridded }, predicted([0, 2], off), levelsOf(), 1);
      expect(found).toMatchObject({ status, points: 2, of: 3, reason: null });
      // With η = 1 H is the stronger field here, so its own mismatch is the whole of it.
      expect(found.worst!.field).toBe('H');
      expect(found.worst!.mismatch).toBeCloseTo(Math.abs(off), 12);
      expect(found.worst!.limit).toBe(1e-3);
    }
  });

  it('is measured by ηH where E vanishes by symmetry', () => {
    const magnetic = fieldOf(1, 150, (_, c, t) => (c < 3 ? 0 : gaussian(t, 70, 12)));
    const stray = sum(
      magnetic,
      fieldOf(1, 150, (_, c, t) => (c < 3 ? 0.1 * gaussian(t, 75, 12) : 0)),
    );
    const nothing = { points: Int32Array.of(0), every: 1, remainder: 0, values: new Float64Array(900) };
    // E of amplitude 0.1 against ηH of amplitude 377.
    const found = latticeAgreement({ free: stray, gridded: magnetic }, nothing, levelsOf(), 377);
    expect(found.status).toBe('agrees');
    expect(found.worst!.mismatch).toBeCloseTo(0.1 / 377, 8);
  });

  it('allows three floors where they are larger', () => {
    const amplitude = 0.1;
    const found = latticeAgreement({ free, gridded }, predicted([1], 0.02), levelsOf({ rounding: amplitude }), 1);
    expect(found.worst!.limit).toBeGreaterThan(1e-3);
    expect(found.status).toBe('agrees');
    expect(latticeAgreement({ free, gridded }, predicted([1], 0.2), levelsOf({ rounding: 0.01 }), 1).status).toBe(
      'differs',
    );
  });

  it('allows for the next order of the prediction, a fraction of what is predicted', () => {
    // The lattice part is 2 % of the field: a tenth of it is 0.2 %.
    const at = (off: number) => latticeAgreement({ free, gridded }, predicted([1], off, 0.1), levelsOf(), 1).status;
    expect([at(0.0018), at(0.0023)]).toEqual(['agrees', 'differs']);
  });

  it('is not judged without a prediction, without free space, or without a field; and says why', () => {
    const none = latticeAgreement({ free, gridded }, { reason: 'is not smooth' }, levelsOf(), 1);
    expect(none).toEqual({ status: 'not judged', points: 0, of: 3, worst: null, reason: 'is not smooth' });
    expect(agreementSentence(none, 'x')).toBe('Not checked against theory: the lattice part is not smooth.');
    expect(latticeAgreement({ gridded }, predicted([0], 0), levelsOf(), 1).reason).toContain('memory');
    const zero = scaled(gridded, 0);
    expect(latticeAgreement({ free: zero, gridded: zero }, predicted([0], 0), levelsOf(), 1).reason).toContain(
      'vanishes',
    );
  });

  it('fails loudly', () => {
    const found = latticeAgreement({ free, gridded }, predicted([0], 0.3), levelsOf(), 1);
    expect(agreementSentence(found, 'observer A')).toContain('DIFFERS FROM ITS CLOSED-FORM PREDICTION: 30 % of the');
  });
});
