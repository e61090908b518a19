import { FIELDS, type Field } from '../../compare/fields.ts';
import { formatQuantity } from '../../elementary/quantity.ts';
import type { Grid, Vec3 } from '../../scenario/model.ts';
import { CELL_SLACK } from '../../scenario/sites.ts';
import { COMPONENTS, STAGGER, type Trace } from '../../trace/trace.ts';

/**
 * How evenly instants follow each other: to rounding; to what a file's few digits leave of it (2 % of a step), which spectra
 * and correlations can do with; or not.
 */
export type Evenness = 'even' | 'nearly' | 'uneven';

/** The traces of one field at one observer, all at the same instants. */
export interface FieldTraces {
  readonly observer: string;
  readonly field: Field;
  /** indices into COMPONENTS, ascending */
  readonly components: readonly number[];
  /** where each of them was sampled, m */
  readonly places: readonly Vec3[];
  /** s, ascending */
  readonly time: Float64Array;
  /** mean step, s */
  readonly step: number;
  readonly evenness: Evenness;
  /** V/m or A/m, one list a component */
  readonly values: readonly Float64Array[];
}

/** Shares of a step that instants may be off an even one. */
const NEARLY = 0.02;
const ROUNDING = 1e-9;

/** How evenly a list of instants is spaced, and its mean step. */
export function evennessOf(time: Float64Array): { readonly step: number; readonly evenness: Evenness } {
  const count = time.length;
  const step = (time[count - 1]! - time[0]!) / (count - 1);
  let off = 0;
  let rounding = 0;
  time.forEach((t, n) => {
    off = Math.max(off, Math.abs(t - time[0]! - n * step));
    rounding = Math.max(rounding, 4 * Number.EPSILON * Math.abs(t));
  });
  if (off <= ROUNDING * step + rounding) return { step, evenness: 'even' };
  return { step, evenness: off <= NEARLY * step ? 'nearly' : 'uneven' };
}

/**
 * Traces by observer and field, in the order in which observers come.
 * @throws RangeError where one component stands twice, or the components of a field have instants of their own
 */
export function groupTraces(traces: readonly Trace[]): FieldTraces[] {
  const observers = [...new Set(traces.map(({ observer }) => observer))];
  return observers.flatMap((observer) =>
    FIELDS.flatMap((field) => {
      const own = traces
        .filter((trace) => trace.observer === observer && trace.component.startsWith(field))
        .sort((a, b) => COMPONENTS.indexOf(a.component) - COMPONENTS.indexOf(b.component));
      return own.length === 0 ? [] : [fieldTraces(observer, field, own)];
    }),
  );
}

function fieldTraces(observer: string, field: Field, traces: readonly Trace[]): FieldTraces {
  const [first, ...others] = traces as [Trace, ...Trace[]];
  const shown = (at: Vec3) => at.map((x) => formatQuantity(x, 'm', 6)).join(', ');
  traces.forEach(({ component, at }, n) => {
    const twin = traces.slice(0, n).find((other) => other.component === component);
    if (twin)
      throw new RangeError(
        `observer “${observer}” has two traces of ${component}, at ${shown(twin.at)} and at ${shown(at)}; give the places names of their own`,
      );
  });
  for (const { component, time } of others)
    if (time.length !== first.time.length || time.some((t, n) => t !== first.time[n]))
      throw new RangeError(
        `${first.component} and ${component} at observer “${observer}” have different instants; the components of a field are ` +
          'judged together. Give them observers of their own',
      );
  return {
    observer,
    field,
    components: traces.map(({ component }) => COMPONENTS.indexOf(component)),
    places: traces.map(({ at }) => at),
    time: first.time,
    ...evennessOf(first.time),
    values: traces.map(({ values }) => values),
  };
}

/** A cell's site lies on a place within this part of a cell: what nine printed digits leave. */
const SITE_SLACK = 1e-4;

/** The Yee cell of the grid whose sites are the places of all these traces; null where there is none. */
export function yeeCellOf({ box, cellSize }: Grid, groups: readonly FieldTraces[]): [number, number, number] | null {
  let cell: [number, number, number] | null = null;
  for (const { components, places } of groups)
    for (const [n, c] of components.entries()) {
      const index = ([0, 1, 2] as const).map((a) => (places[n]![a] - box.from[a]) / cellSize[a] - STAGGER[c]![a]!);
      const whole = index.map(Math.round) as [number, number, number];
      if (index.some((x, a) => Math.abs(x - whole[a]!) > SITE_SLACK)) return null;
      if (cell?.some((i, a) => i !== whole[a])) return null;
      cell = whole;
    }
  return cell;
}

/** The cell of the lattice, boundless, whose node is nearest to a place; ties to the lower index. */
export function nearestCell({ box, cellSize }: Grid, at: Vec3): [number, number, number] {
  const index = (a: 0 | 1 | 2) => Math.ceil((at[a] - box.from[a]) / cellSize[a] - 0.5 - CELL_SLACK);
  return [index(0), index(1), index(2)];
}

/** The middle of the places of some traces. */
export function middleOf(groups: readonly FieldTraces[]): Vec3 {
  const places = groups.flatMap((group) => group.places);
  const mean = (a: 0 | 1 | 2) => places.reduce((sum, at) => sum + at[a], 0) / places.length;
  return [mean(0), mean(1), mean(2)];
}
