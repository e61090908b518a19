import type { Scenario, Source } from '../scenario/model.ts';

/** A source as a line to draw: vertices, and the arc length of each. */
export interface DrawnSource {
  readonly source: Source;
  readonly points: Float64Array;
  readonly places: Float64Array;
}

/** Pieces that a filament is drawn in: enough for a pulse that is a tenth of it long. */
const PIECES = 64;

export function drawnSources({ sources, grid }: Scenario): DrawnSource[] {
  return sources.map((source) => {
    if (source.type === 'dipole') {
      const half = Math.max(source.length, Math.max(...grid.cellSize)) / 2;
      const points = [-half, half].flatMap((s) => source.at.map((x, a) => x + s * source.direction[a]!));
      return { source, points: Float64Array.from(points), places: Float64Array.of(0, 0) };
    }
    const { pieces, length } = source.curve;
    const each = Math.max(2, Math.ceil(PIECES / pieces.length));
    const points: number[] = [];
    const places: number[] = [];
    const at = new Float64Array(3);
    for (const piece of pieces)
      for (let n = 0; n <= each; n++) {
        const s = piece.s0 + (piece.length * n) / each;
        piece.point(s, at);
        points.push(...at);
        places.push(Math.min(s, length));
      }
    return { source, points: Float64Array.from(points), places: Float64Array.from(places) };
  });
}

/** I(s, t) at every vertex, A. */
export function currentOn({ source, places }: DrawnSource, t: number): Float64Array {
  if (source.type === 'dipole') return new Float64Array(places.length).fill(source.waveform.value(t));
  return places.map((s) =>
    source.terms.reduce(
      (sum, { factor, delay, slowness, profile }) =>
        sum + factor * (profile ? profile.value(s) : 1) * source.waveform.value(t - delay - slowness * s),
      0,
    ),
  );
}

/** Largest current that any source can carry, A: the end of the scale of wires. */
export function largestCurrent({ sources }: Scenario): number {
  return Math.max(
    ...sources.map(
      (source) =>
        source.waveform.peak *
        (source.type === 'dipole' ? 1 : Math.max(...source.terms.map(({ factor }) => Math.abs(factor)), 0)),
    ),
  );
}
