import { decibels } from '../elementary/elementary.ts';
import {
  formatAboveFloor,
  formatDecibels,
  formatPercent,
  formatQuantity,
  formatUpperBound,
} from '../elementary/quantity.ts';
import type { Band, BandLimit } from './band.ts';
import type { BoundaryLevel, Budget, BudgetName } from './budget.ts';
import type { Closest, ClosestOutcome, Threshold } from './closest.ts';
import type { Farthest } from './farthest.ts';
import type { Field } from './fields.ts';
import type { WallClearance } from './wall.ts';

/** A band at an observer, with how far the observer is from the nearest source. */
export interface ObserverBand {
  readonly observer: string;
  /** m */
  readonly distance: number;
  readonly E: Band;
  readonly H: Band;
}

/** What a verdict is made of. */
export interface Findings {
  /** a fraction */
  readonly tolerance: number;
  readonly closest: Readonly<Record<Field, Closest>>;
  readonly farthest: Readonly<Record<Field, Farthest>>;
  readonly wall: Readonly<Record<Field, WallClearance>>;
  /** observers inside the box */
  readonly bands: readonly ObserverBand[];
  /** of E, pooled */
  readonly budget: Budget;
  /** the walls in a few words: "CPML, 8 layers" */
  readonly boundary: string;
  readonly boundaryLevel: BoundaryLevel | null;
  /** relative bound of the integral's own error */
  readonly integralError: number;
}

/** The worse of the two fields is the headline; both are kept. */
export type Headline<Outcome, Each> = Outcome & {
  readonly field: Field;
  readonly E: Each;
  readonly H: Each;
};

export type BandVerdict = BandLimit & {
  /** the worst observer inside the trusted distances; null where none was judged */
  readonly observer: string | null;
  readonly field: Field | null;
  /** 2/T, Hz; null where none was judged */
  readonly lowEnd: number | null;
};

export interface Verdict {
  readonly closest: Headline<ClosestOutcome, Closest>;
  readonly farthest: Headline<Farthest, Farthest>;
  readonly wallClearance: Headline<Threshold, WallClearance>;
  readonly band: BandVerdict;
  readonly largestPart: Exclude<BudgetName, 'total'> | null;
  readonly boundary: { readonly description: string; readonly level: BoundaryLevel | null };
  /** one sentence a person can act on, beginning "Within X %:" */
  readonly sentence: string;
  /** what stands below it, a sentence or two each */
  readonly details: readonly string[];
}

/** All findings combined: the worse of E and H, the worst observer, and the sentence. */
export function verdictOf(findings: Findings): Verdict {
  const closest = headline(findings.closest, worseThreshold, withoutBins);
  const farthest = headline(findings.farthest, worseFarthest, (f) => f);
  const wallClearance = headline(findings.wall, worseThreshold, withoutBins);
  const band = worstBand(findings.bands, closest, farthest);
  const largestPart = largestOf(findings.budget);
  const parts = { closest, farthest, wallClearance, band };
  return {
    ...parts,
    largestPart,
    boundary: { description: findings.boundary, level: findings.boundaryLevel },
    sentence: sentenceOf(findings.tolerance, parts),
    details: detailsOf(findings, parts, largestPart),
  };
}

type Parts = Pick<Verdict, 'closest' | 'farthest' | 'wallClearance' | 'band'>;

function headline<Each, Outcome>(
  both: Readonly<Record<Field, Each>>,
  isWorse: (a: Each, b: Each) => boolean,
  strip: (each: Each) => Outcome,
): Headline<Outcome, Each> {
  const field = isWorse(both.H, both.E) ? 'H' : 'E';
  return { ...strip(both[field]), field, E: both.E, H: both.H };
}

/** An outcome alone: bins stay with the two fields. */
function withoutBins({ bins: _, ...outcome }: Closest | WallClearance): ClosestOutcome {
  return outcome;
}

const SEVERITY = { unmeasured: 0, closestSampled: 1, crossing: 2, none: 3 } as const;

function worseThreshold(a: Threshold, b: Threshold): boolean {
  if (a.status !== b.status) return SEVERITY[a.status] > SEVERITY[b.status];
  if (a.status === 'none' && b.status === 'none') return a.best.error > b.best.error;
  return 'distance' in a && 'distance' in b && a.distance > b.distance;
}

function worseFarthest(a: Farthest, b: Farthest): boolean {
  // Nothing measured says nothing: it never outweighs the other field.
  const reach = (f: Farthest) =>
    f.status === 'unmeasured' ? Number.POSITIVE_INFINITY : 'distance' in f ? f.distance : 0;
  return reach(a) < reach(b);
}

/** The lowest limit over observers inside the trusted distances and both fields; unmeasured ones do not decide. */
function worstBand(bands: readonly ObserverBand[], closest: Threshold, farthest: Farthest): BandVerdict {
  const unmeasured = (reason: string): BandVerdict => ({
    status: 'unmeasured',
    reason,
    observer: null,
    field: null,
    lowEnd: null,
  });
  if (bands.length === 0) return unmeasured('there are no observers in the box');
  // Where the near limit lies below every sample, observers nearer still are trusted as far as anyone knows.
  const from = closest.status === 'crossing' ? closest.distance : 0;
  const to = 'distance' in farthest ? farthest.distance : Number.POSITIVE_INFINITY;
  const inside = bands.filter(({ distance }) => distance >= from && distance <= to);
  if (inside.length === 0) return unmeasured('no observer lies inside the trusted distances');
  const judged = inside
    .flatMap(({ observer, E, H }) => [
      { observer, field: 'E' as const, band: E },
      { observer, field: 'H' as const, band: H },
    ])
    .filter(({ band }) => band.limit.status !== 'unmeasured');
  if (judged.length === 0) return unmeasured('no observer has frequencies far enough above the floor');
  const worst = judged.reduce((a, b) => (worseBand(b.band.limit, a.band.limit) ? b : a));
  return { ...worst.band.limit, observer: worst.observer, field: worst.field, lowEnd: worst.band.lowEnd };
}

function worseBand(a: BandLimit, b: BandLimit): boolean {
  if (a.status === 'none' && b.status === 'none') return a.best.error > b.best.error;
  const reach = (limit: BandLimit) => ('frequency' in limit ? limit.frequency : 0);
  return reach(a) < reach(b);
}

/** The part with the largest relative L2 among those above their floors. */
export function largestOf(budget: Budget): Exclude<BudgetName, 'total'> | null {
  const { total: _, ...parts } = budget;
  const above = (Object.keys(parts) as (keyof typeof parts)[]).filter((name) => {
    const entry = parts[name];
    return entry !== null && entry.relativeL2 >= entry.floor;
  });
  return above.reduce<keyof typeof parts | null>(
    (a, b) => (a === null || parts[b]!.relativeL2 > parts[a]!.relativeL2 ? b : a),
    null,
  );
}

const metres = (distance: number): string => formatQuantity(distance, 'm', 2);
const hertz = (frequency: number): string => formatQuantity(frequency, 'Hz', 2);

/** "Within 5 %: from 31 mm to 0.54 m from the source (along x, extrapolated), 12 mm off the walls, up to 2.4 GHz." */
function sentenceOf(tolerance: number, { closest, farthest, wallClearance, band }: Parts): string {
  const within = `Within ${formatPercent(tolerance, 3)}:`;
  if (closest.status === 'unmeasured') return `${within} not measured: ${closest.reason}.`;
  if (closest.status === 'none') return `${within} no distance in this box; best ${bestOf(closest.best)}.`;
  if (!('distance' in farthest) || farthest.distance <= closest.distance)
    return `${within} no distance in this box for E and H together; best ${bestOf(closest.best)}.`;
  if (wallClearance.status === 'none')
    return `${within} no distance in this box with these walls; best ${bestOf(wallClearance.best)} off them.`;
  const pieces = [`${nearLimit(closest)} ${farLimit(farthest)}`, wallLimit(wallClearance), bandLimitText(band)];
  return `${within} ${pieces.filter((piece) => piece !== '').join(', ')}.`;
}

const bestOf = ({ error, distance }: { error: number; distance: number }): string =>
  `${formatPercent(error)} at ${metres(distance)}`;

function nearLimit(closest: Extract<Threshold, { distance: number }>): string {
  return closest.status === 'crossing'
    ? `from ${metres(closest.distance)}`
    : `from ≤ ${metres(closest.distance)} (closest sampled)`;
}

function farLimit(farthest: Extract<Farthest, { distance: number }>): string {
  if (farthest.status === 'extrapolated')
    return `to ${metres(farthest.distance)} from the source (${farthest.direction}, extrapolated)`;
  if (farthest.status === 'measured') return `to ${metres(farthest.distance)} from the source`;
  return `to ≥ ${metres(farthest.distance)} (box edge) from the source`;
}

function wallLimit(wall: Threshold): string {
  if (wall.status === 'crossing') return `${metres(wall.distance)} off the walls`;
  return wall.status === 'closestSampled' ? 'right up to the walls' : '';
}

function bandLimitText(band: BandLimit): string {
  if (band.status === 'limit') return `up to ${hertz(band.frequency)}`;
  if (band.status === 'noEnergyAbove') return `up to ≥ ${hertz(band.frequency)} (no source energy above)`;
  if (band.status === 'none')
    return `at no frequency (best ${formatPercent(band.best.error)} at ${hertz(band.best.frequency)})`;
  return '';
}

const PART_WORDS: Readonly<Record<Exclude<BudgetName, 'total'>, string>> = {
  boundary: 'boundary',
  lattice: 'lattice',
  boundaryAndLattice: 'boundary and lattice together',
  gridding: 'gridding',
  quadrature: 'quadrature',
};

function detailsOf(findings: Findings, { wallClearance, band }: Parts, largest: Verdict['largestPart']): string[] {
  const { budget, boundary, boundaryLevel, integralError } = findings;
  const largestText =
    largest === null
      ? 'Largest part: none stands above its floor.'
      : `Largest part: ${PART_WORDS[largest]} (${formatPercent(budget[largest]!.relativeL2)}).`;
  const boundaryText =
    boundaryLevel === null
      ? `Boundary ${boundary}: not separated from the lattice.`
      : `Boundary ${boundary}: ${levelText(boundaryLevel)} of the exact peak.`;
  return [
    largestText,
    `${boundaryText} Integral: ≤ ${formatUpperBound(integralError)}.`,
    ...(wallClearance.status === 'unmeasured' ? [`Walls not measured: ${wallClearance.reason}.`] : []),
    band.status === 'unmeasured'
      ? `Band not measured: ${band.reason}.`
      : `Band from ${hertz(band.lowEnd!)} (2/T), decided by ${band.field} at observer ${band.observer}.`,
  ];
}

function levelText({ peak, floor }: BoundaryLevel): string {
  return peak < floor ? formatAboveFloor(peak, floor) : formatDecibels(decibels(peak));
}
