/** The middle one of a list of numbers, the upper of two. */
export const median = (list) => list.toSorted((a, b) => a - b)[list.length >> 1];
