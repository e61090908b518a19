import { closest, distance } from 'fastest-levenshtein';

/** " (did you mean “sigma”?)" when a known word is a slip of the pen away, else nothing. */
export function nearest(given: string, known: readonly string[]): string {
  // Longer words than any key are no slips, and their distance is not worth its cost.
  if (given.length > 64 || known.length === 0) return '';
  const candidate = closest(
    given.toLowerCase(),
    known.map((word) => word.toLowerCase()),
  );
  const word = known.find((each) => each.toLowerCase() === candidate)!;
  const slips = distance(given.toLowerCase(), candidate);
  return slips < word.length && slips <= Math.max(2, word.length / 3) ? ` (did you mean “${word}”?)` : '';
}
