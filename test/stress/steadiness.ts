/**
 * What is held shows in the least of several values in a row: above it lies what was not given back yet, a grid's memory of
 * 17 MB as likely as not.
 */
function floorsOf(values: readonly number[], row: number): number[] {
  const count = Math.floor(values.length / row);
  return Array.from({ length: count }, (_, n) => Math.min(...values.slice(n * row, (n + 1) * row)));
}

/** A straight line through values taken one after another, by least squares: its rise a value, and that rise's standard error. */
function trendOf(values: readonly number[]): { readonly rise: number; readonly error: number } {
  const n = values.length;
  const middle = (n - 1) / 2;
  const spread = (n * (n * n - 1)) / 12;
  const mean = values.reduce((sum, v) => sum + v, 0) / n;
  const rise = values.reduce((sum, v, k) => sum + (k - middle) * (v - mean), 0) / spread;
  const rest = values.reduce((sum, v, k) => sum + (v - mean - rise * (k - middle)) ** 2, 0);
  return { rise, error: Math.sqrt(rest / (n - 2) / spread) };
}

/** How a quantity grows from one round to the next, with the standard error of that. */
export interface Growth<Key> {
  readonly key: Key;
  /** the least of each row of rounds */
  readonly floors: readonly number[];
  readonly rise: number;
  readonly error: number;
}

/** Growth a round of each of some quantities, by the floors of `row` rounds each. */
export function growthOf<Key extends string>(
  rounds: readonly Readonly<Record<Key, number>>[],
  keys: readonly Key[],
  row: number,
): Growth<Key>[] {
  return keys.map((key) => {
    const floors = floorsOf(
      rounds.map((each) => each[key]),
      row,
    );
    const { rise, error } = trendOf(floors);
    return { key, floors, rise: rise / row, error: error / row };
  });
}
