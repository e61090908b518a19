import type { Peaks } from '../retarded/spectral.ts';
import type { Vec3 } from '../scenario/model.ts';

/** What both routes to the exact field give at one point and instant. */
interface RouteValue {
  readonly E: Vec3;
  readonly H: Vec3;
  readonly phi: number;
  readonly A: Vec3;
}

/** How far two routes are apart in one quantity. */
export interface Disagreement {
  readonly quantity: 'E' | 'H' | 'phi' | 'A';
  /** largest difference, relative to the peak at the same point */
  readonly largest: number;
  /** where that is: its number in the lists */
  readonly row: number;
  /** that peak, V/m, A/m, V, V·s/m */
  readonly peak: number;
}

/**
 * The largest difference of two routes in each quantity, relative to the peak of its vector at the same point. H is measured
 * against E/η where that is larger, φ and vA against each other: one of them may vanish by symmetry.
 * @param peaks those of each row's point
 */
export function disagreement(
  first: readonly RouteValue[],
  second: readonly RouteValue[],
  peaks: readonly Peaks[],
  { speed, impedance }: { readonly speed: number; readonly impedance: number },
): Disagreement[] {
  const quantities = [
    { quantity: 'E', of: ({ E }: RouteValue) => E, peak: ({ E }: Peaks) => E },
    {
      quantity: 'H',
      of: ({ H }: RouteValue) => H,
      peak: ({ E, H }: Peaks) => Math.max(H, E / impedance),
    },
    {
      quantity: 'phi',
      of: ({ phi }: RouteValue) => [phi],
      peak: ({ phi, A }: Peaks) => Math.max(phi, speed * A),
    },
    {
      quantity: 'A',
      of: ({ A }: RouteValue) => A,
      peak: ({ phi, A }: Peaks) => Math.max(A, phi / speed),
    },
  ] as const;
  return quantities.map(({ quantity, of, peak }) => {
    let worst: Disagreement = { quantity, largest: 0, row: 0, peak: peaks.length > 0 ? peak(peaks[0]!) : 0 };
    first.forEach((value, row) => {
      const other = of(second[row]!);
      const off = norm(of(value).map((x, c) => x - other[c]!));
      const scale = peak(peaks[row]!);
      const largest = off === 0 ? 0 : off / scale;
      if (largest > worst.largest) worst = { quantity, largest, row, peak: scale };
    });
    return worst;
  });
}

const norm = (v: readonly number[]): number => Math.sqrt(v.reduce((sum, x) => sum + x * x, 0));
