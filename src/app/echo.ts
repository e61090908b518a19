import { firstArrival } from '../scenario/distance.ts';
import { FACES, type Scenario, type Vec3 } from '../scenario/model.ts';
import type { Waveform } from '../scenario/waveform.ts';

/** Of its peak: where a pulse is said to begin. */
const BEGUN = 0.01;

/** Looks at a waveform to find where it begins. */
const LOOKS = 4000;

/** The first instant at which a current exceeds 1 % of its peak, s. */
function begins(waveform: Waveform, duration: number): number {
  for (let n = 0; n <= LOOKS; n++) {
    const t = (n / LOOKS) * duration;
    if (Math.abs(waveform.value(t)) >= BEGUN * waveform.peak) return t;
  }
  return duration;
}

/**
 * When the first reflection of a wall can reach a point: the pulse's beginning, plus the way from the source to the
 * point's mirror image in that wall. Infinite where there is none in the window.
 * @returns s, and the wall
 */
export function firstEcho(
  { sources, medium, grid, duration }: Scenario,
  at: Vec3,
): { readonly time: number; readonly face: string } {
  const echoes = FACES.map((face, f) => {
    const axis = f >> 1;
    const wall = (f % 2 === 0 ? grid.box.from : grid.box.to)[axis]!;
    const image = at.map((x, a) => (a === axis ? 2 * wall - x : x)) as unknown as Vec3;
    const time = Math.min(
      ...sources.map((source) => begins(source.waveform, duration) + firstArrival([source], medium, image)),
    );
    return { time, face };
  });
  return echoes.reduce((a, b) => (b.time < a.time ? b : a));
}
