import { bestBin, type ErrorBin, logCrossing } from './bins.ts';

/** The model must match the measured outer bins within this factor to be believed beyond them. */
const AGREEMENT = 1.4;

/** How many of the outermost bins the model is held against. */
const OUTER_BINS = 3;

/** Directions in which the source radiates this much less than in its main lobe do not count: 20 dB. */
const MAIN_LOBE_SHARE = 0.1;

/** How far the exact lattice relation trusts one direction, and how strongly the source radiates there. */
export interface DirectionModel {
  /** as it is to be printed: "along x", "along the diagonal", "along the main lobe" */
  readonly name: string;
  /** radiated amplitude relative to the main lobe's */
  readonly level: number;
  /** distance at which the predicted error reaches the tolerance, m; ∞ where it never does */
  readonly distance: number;
}

export interface FarthestModel {
  readonly directions: readonly DirectionModel[];
  /** predicted 95th percentile of the point error over all directions at a distance in m, to hold against the bins */
  readonly percentile95: (distance: number) => number;
}

export type Farthest =
  /** the model's crossing beyond the box */
  | {
      readonly status: 'extrapolated';
      readonly distance: number;
      readonly direction: string;
      /** worst of predicted/measured and its inverse over the outer bins */
      readonly agreement: number;
    }
  /** a bin inside the box, outward of the best one, exceeds the tolerance */
  | { readonly status: 'measured'; readonly distance: number }
  /** every bin out to the edge of the box is within the tolerance; nothing is claimed beyond, and why not */
  | { readonly status: 'boxEdge'; readonly distance: number; readonly reason: string }
  /** not even the best bin is within the tolerance */
  | { readonly status: 'none' }
  /** no bin had samples enough that count */
  | { readonly status: 'unmeasured' };

/**
 * The farthest trusted distance. Inside the box it is measured; beyond, the least distance over the directions at which
 * the predicted error meets the tolerance, and only where the prediction matches the outer bins within 1.4×.
 * @param bins of the point error against distance to the source, ascending, as `closestDistance` gives them
 */
export function farthestDistance(bins: readonly ErrorBin[], tolerance: number, model?: FarthestModel): Farthest {
  if (bins.length === 0) return { status: 'unmeasured' };
  let k = bestBin(bins);
  if (!(bins[k]!.percentile95 <= tolerance)) return { status: 'none' };
  while (k < bins.length - 1 && bins[k + 1]!.percentile95 <= tolerance) k++;
  if (k < bins.length - 1) return { status: 'measured', distance: logCrossing(bins[k]!, bins[k + 1]!, tolerance) };
  const edge = bins[k]!.to;
  const atEdge = (reason: string): Farthest => ({ status: 'boxEdge', distance: edge, reason });
  if (!model) return atEdge('no prediction beyond the box');
  const agreement = modelAgreement(bins, model);
  if (!(agreement <= AGREEMENT))
    return atEdge(
      `the prediction and the outermost distances differ by a factor of ${agreement.toPrecision(2)}, more than ${AGREEMENT}`,
    );
  const radiating = model.directions.filter(({ level }) => level >= MAIN_LOBE_SHARE);
  if (radiating.length === 0) return atEdge('no direction to extrapolate along');
  const { name, distance } = radiating.reduce((a, b) => (b.distance < a.distance ? b : a));
  if (distance <= edge) return atEdge('the prediction reaches the tolerance at the edge of the box');
  if (distance === Number.POSITIVE_INFINITY) return atEdge('the prediction never reaches the tolerance');
  return { status: 'extrapolated', distance, direction: name, agreement };
}

/** The worst of predicted/measured and measured/predicted over the outermost bins. */
function modelAgreement(bins: readonly ErrorBin[], model: FarthestModel): number {
  return Math.max(
    ...bins.slice(-OUTER_BINS).map((bin) => {
      const ratio = model.percentile95(bin.centre) / bin.percentile95;
      return Math.max(ratio, 1 / ratio);
    }),
  );
}
