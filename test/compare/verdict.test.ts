import { describe, expect, it } from 'vitest';
import type { Band, BandLimit } from '../../src/compare/band.ts';
import type { Budget, BudgetEntry } from '../../src/compare/budget.ts';
import type { Closest, Threshold } from '../../src/compare/closest.ts';
import type { Farthest } from '../../src/compare/farthest.ts';
import { type Findings, verdictOf } from '../../src/compare/verdict.ts';

const entry = (relativeL2: number, floor = 1e-6): BudgetEntry => ({ relativeL2, share: relativeL2, floor });
const budget: Budget = {
  boundary: entry(2.8e-4),
  lattice: entry(0.031),
  boundaryAndLattice: null,
  gridding: entry(0.006),
  quadrature: entry(1e-9),
  total: entry(0.028),
};
const best = { error: 0.01, distance: 0.2 };
const crossing = (distance: number): Closest => ({ status: 'crossing', distance, best, bins: [] });
const both = <T>(value: T) => ({ E: value, H: value });
const bandWith = (limit: BandLimit): Band => ({ lowEnd: 0.67e9, bands: [], limit });
const observer = (name: string, limit: BandLimit, distance = 0.1) => ({
  observer: name,
  distance,
  ...both(bandWith(limit)),
});

const findings: Findings = {
  tolerance: 0.05,
  closest: both(crossing(0.031)),
  farthest: both<Farthest>({ status: 'extrapolated', distance: 0.54, direction: 'along x', agreement: 1.1 }),
  wall: both(crossing(0.012)),
  bands: [observer('A', { status: 'limit', frequency: 2.4e9 })],
  budget,
  boundary: 'CPML, 8 layers',
  boundaryLevel: { peak: 2.8e-4, floor: 1e-6 },
  integralError: 1.3e-7,
};
const sentence = (changes: Partial<Findings>) => verdictOf({ ...findings, ...changes }).sentence;

describe('verdict', () => {
  it('is one sentence and what stands below it', () => {
    const verdict = verdictOf(findings);
    expect(verdict.sentence).toBe(
      'Within 5 %: from 31 mm to 0.54 m from the source (along x, extrapolated), 12 mm off the walls, up to 2.4 GHz.',
    );
    expect(verdict.details).toEqual([
      'Largest part: lattice (3.1 %).',
      'Boundary CPML, 8 layers: −71 dB of the exact peak. Integral: ≤ 2·10⁻⁷.',
      'Band from 670 MHz (2/T), decided by E at observer A.',
    ]);
  });

  it('takes the worse of E and H, limit by limit, and keeps both', () => {
    const verdict = verdictOf({
      ...findings,
      closest: { E: crossing(0.02), H: crossing(0.04) },
      farthest: { E: { status: 'measured', distance: 0.3 }, H: { status: 'boxEdge', distance: 0.4, reason: '' } },
      wall: { E: { status: 'closestSampled', distance: 0.001, best, bins: [] }, H: crossing(0.012) },
    });
    expect(verdict.sentence).toBe(
      'Within 5 %: from 40 mm to 0.3 m from the source, 12 mm off the walls, up to 2.4 GHz.',
    );
    expect([verdict.closest.field, verdict.farthest.field, verdict.wallClearance.field]).toEqual(['H', 'E', 'H']);
    expect(verdict.closest.E).toEqual(crossing(0.02));
  });

  it('a field that could not be measured decides nothing', () => {
    const unmeasured = { status: 'unmeasured' as const, reason: 'H is below the floor', bins: [] };
    expect(
      sentence({
        closest: { E: crossing(0.031), H: unmeasured },
        farthest: { E: findings.farthest.E, H: { status: 'unmeasured' } },
      }),
    ).toContain('from 31 mm to 0.54 m');
    expect(sentence({ closest: both(unmeasured), farthest: both<Farthest>({ status: 'unmeasured' }) })).toBe(
      'Within 5 %: not measured: H is below the floor.',
    );
  });

  it.each<[string, Partial<Findings>, string]>([
    [
      'no distance',
      { closest: both({ status: 'none', best: { error: 0.0723, distance: 0.0413 }, bins: [] }) },
      'Within 5 %: no distance in this box; best 7.2 % at 41 mm.',
    ],
    [
      'no distance common to E and H',
      { closest: { E: crossing(0.1), H: crossing(0.02) }, farthest: both({ status: 'measured', distance: 0.08 }) },
      'Within 5 %: no distance in this box for E and H together; best 1 % at 0.2 m.',
    ],
    [
      'walls that spoil everything',
      { wall: both<Threshold & { bins: [] }>({ status: 'none', best: { error: 0.12, distance: 0.08 }, bins: [] }) },
      'Within 5 %: no distance in this box with these walls; best 12 % at 80 mm off them.',
    ],
    [
      'closest sampled, box edge, walls no matter, no source energy above',
      {
        closest: both({ status: 'closestSampled', distance: 0.0071, best, bins: [] }),
        farthest: both({ status: 'boxEdge', distance: 0.21, reason: '' }),
        wall: both({ status: 'closestSampled', distance: 0.0025, best, bins: [] }),
        bands: [observer('A', { status: 'noEnergyAbove', frequency: 3.1e9 })],
      },
      'Within 5 %: from ≤ 7.1 mm (closest sampled) to ≥ 0.21 m (box edge) from the source, right up to the walls, ' +
        'up to ≥ 3.1 GHz (no source energy above).',
    ],
    [
      'no frequency',
      { tolerance: 0.005, bands: [observer('A', { status: 'none', best: { error: 0.061, frequency: 1.2e9 } })] },
      'Within 0.5 %: from 31 mm to 0.54 m from the source (along x, extrapolated), 12 mm off the walls, ' +
        'at no frequency (best 6.1 % at 1.2 GHz).',
    ],
    [
      'no observers',
      { bands: [] },
      'Within 5 %: from 31 mm to 0.54 m from the source (along x, extrapolated), 12 mm off the walls.',
    ],
  ])('says so: %s', (_, changes, expected) => {
    expect(sentence(changes)).toBe(expected);
  });

  it('takes the band of the worst observer inside the trusted distances', () => {
    const bands = [
      observer('near', { status: 'limit', frequency: 0.1e9 }, 0.01),
      observer('A', { status: 'noEnergyAbove', frequency: 3e9 }, 0.1),
      observer('B', { status: 'limit', frequency: 2e9 }, 0.2),
      observer('far', { status: 'limit', frequency: 0.2e9 }, 0.9),
    ];
    expect(verdictOf({ ...findings, bands }).band).toEqual({
      status: 'limit',
      frequency: 2e9,
      observer: 'B',
      field: 'E',
      lowEnd: 0.67e9,
    });
    const outside = verdictOf({ ...findings, bands: [bands[0]!, bands[3]!] });
    expect(outside.band).toMatchObject({ status: 'unmeasured' });
    expect(outside.details[2]).toBe('Band not measured: no observer lies inside the trusted distances.');
  });

  it('never calls a part the largest that lies below its floor', () => {
    const below = { ...budget, lattice: entry(1e-7), gridding: entry(1e-7), boundary: entry(1e-7) };
    expect(verdictOf({ ...findings, budget: below }).details[0]).toBe('Largest part: none stands above its floor.');
    const together = { ...budget, boundary: null, lattice: null, boundaryAndLattice: entry(0.04) };
    const verdict = verdictOf({ ...findings, budget: together, boundaryLevel: null });
    expect(verdict.details[0]).toBe('Largest part: boundary and lattice together (4 %).');
    expect(verdict.details[1]).toMatch(/^Boundary CPML, 8 layers: not separated from the lattice\./);
    expect(verdictOf({ ...findings, boundaryLevel: { peak: 1e-5, floor: 6.3e-5 } }).details[1]).toMatch(
      /^Boundary CPML, 8 layers: < −84 dB \(floor\) of the exact peak\./,
    );
  });
});
