/**
 * The Pareto front: indices of the choices that no other beats, being as cheap and as good and better in one of the two;
 * by ascending cost. Choices whose cost or error is no number are never on it.
 */
export function paretoFront(choices: readonly { readonly cost: number; readonly error: number }[]): number[] {
  const order = [...choices.keys()]
    .filter((i) => Number.isFinite(choices[i]!.cost) && Number.isFinite(choices[i]!.error))
    .sort((i, j) => choices[i]!.cost - choices[j]!.cost || choices[i]!.error - choices[j]!.error);
  let best = Number.POSITIVE_INFINITY;
  return order.filter((i) => {
    if (choices[i]!.error >= best) return false;
    best = choices[i]!.error;
    return true;
  });
}
