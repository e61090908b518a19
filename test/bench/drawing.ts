import { NEUTRALS, packed } from '../../src/draw/colour.ts';
import { absorberEdges, boxEdges, wire } from '../../src/draw/furniture.ts';
import { Picture } from '../../src/draw/picture.ts';
import { cameraFor } from '../../src/draw/projection.ts';
import { type Plane, planeOfSamples, type Scene } from '../../src/draw/scene.ts';

/** One way of using the panes, and what a picture of it cost. */
export interface DrawingCost {
  readonly case: string;
  /** milliseconds */
  readonly median: number;
  readonly least: number;
  readonly most: number;
  readonly pictures: number;
  /** of the last picture, so that no work can be left out unseen */
  readonly checksum: number;
}

const SAMPLES = 256;
const BOX = { from: [-0.15, -0.15, -0.15], to: [0.15, 0.15, 0.15] } as const;
const OUTER = { from: [-0.2, -0.2, -0.2], to: [0.2, 0.2, 0.2] } as const;
const STEP = 0.3 / SAMPLES;
const FIRST = -0.15 + STEP / 2;

/** Outgoing rings at an instant 0…1, on three planes. */
function planesAt(instant: number, limit: number): Plane[] {
  const scale = { kind: 'signed', limit, label: 'Ez, V/m' } as const;
  return (['yz', 'xz', 'xy'] as const).map((name, normal) => {
    const values = new Float32Array(SAMPLES * SAMPLES);
    for (let j = 0; j < SAMPLES; j++)
      for (let i = 0; i < SAMPLES; i++) {
        const r = Math.hypot(FIRST + i * STEP, FIRST + j * STEP);
        values[j * SAMPLES + i] = (Math.sin(120 * (r - 0.1 * instant)) * 0.02) / (0.02 + r);
      }
    const along = (axis: number) => [0, 1, 2].map((k) => (k === axis ? STEP : 0)) as unknown as Plane['u'];
    const first = [0, 1, 2].map((k) => (k === normal ? 0 : FIRST)) as unknown as Plane['origin'];
    return planeOfSamples(
      name,
      first,
      along((normal + 1) % 3),
      along((normal + 2) % 3),
      SAMPLES,
      SAMPLES,
      values,
      scale,
    );
  });
}

/** Three panes side by side in 1280 × 800, all they can show, the camera turned by an angle and zoomed. */
function sceneAt(
  kind: 'perspective' | 'orthographic',
  angle: number,
  zoom: number,
  panes: readonly (readonly Plane[])[],
): Scene {
  const camera = cameraFor(BOX, kind, 426 / 730, [Math.cos(angle), Math.sin(angle), 0.5]);
  camera.zoom = zoom;
  const neutrals = NEUTRALS.light;
  const points = Array.from({ length: 65 }, (_, n) => [0, 0, -0.05 + (0.1 * n) / 64]).flat();
  const current = Array.from({ length: 65 }, (_, n) => Math.sin(n / 8 + angle));
  const scale = { kind: 'signed', limit: 1, label: 'I, A' } as const;
  return {
    theme: 'light',
    pixelRatio: 1,
    panes: panes.map((planes, n) => ({
      area: { x: 427 * n, y: 0, width: 426, height: 800 },
      title: ['Grid field', 'Exact field', 'Difference'][n]!,
      camera,
      planes,
      strokes: [
        absorberEdges(OUTER, neutrals),
        boxEdges(BOX, neutrals),
        ...wire(points, current, scale, 'light', neutrals),
      ],
      markers: [{ at: [0.1, 0.02, 0.035], name: 'A', colour: packed('#009e73') }],
      axes: BOX,
      scale: planes[0]!.scale,
    })),
  };
}

/**
 * Draws pictures of three panes of three planes of 256² samples in 1280 × 800: turning (the data stay), turning
 * so near that the planes fill the panes, and playing (all nine planes change for every picture), with both cameras.
 * @param present shows the finished picture, within the time measured
 */
export function measureDrawing(present: (picture: Picture) => void, pictures = 150): DrawingCost[] {
  const picture = new Picture(1280, 800);
  const instants = [0, 0.25, 0.5, 0.75].map((instant) => [1, 1, 0.05].map((limit) => planesAt(instant, limit)));
  const cases = (['perspective', 'orthographic'] as const).flatMap((kind) =>
    (['turning', 'turning, near', 'playing'] as const).map((use) => ({ kind, use })),
  );
  return cases.map(({ kind, use }) => {
    const times: number[] = [];
    for (let n = -20; n < pictures; n++) {
      const planes = instants[use === 'playing' ? (n + 20) % 4 : 0]!;
      const revised =
        use === 'turning' ? planes : planes.map((pane) => pane.map((plane) => ({ ...plane, revision: n })));
      const scene = sceneAt(kind, 0.03 * n, use === 'turning, near' ? 3 : 1, revised);
      const start = performance.now();
      picture.draw(scene);
      present(picture);
      if (n >= 0) times.push(performance.now() - start);
    }
    times.sort((a, b) => a - b);
    const checksum = picture.surface.pixels.reduce((sum, pixel) => (Math.imul(sum, 31) + pixel) >>> 0, 0);
    const median = times[Math.floor(times.length / 2)]!;
    return { case: `${kind}, ${use}`, median, least: times[0]!, most: times.at(-1)!, pictures, checksum };
  });
}
