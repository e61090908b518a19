import { uniformFloat64 } from 'pure-rand/distribution/uniformFloat64';
import { xoroshiro128plus } from 'pure-rand/generator/xoroshiro128plus';
import { OrthographicCamera, PerspectiveCamera } from 'three';
import type { SignedScale } from '../../src/draw/colour.ts';
import type { Camera, Vec3 } from '../../src/draw/projection.ts';
import type { Pane, Plane, Scene } from '../../src/draw/scene.ts';

/** Seeded cameras and planes, made so that many cut the near plane or are seen at a grazing angle. */
export class Chance {
  private readonly generator;

  constructor(seed: number) {
    this.generator = xoroshiro128plus(seed);
  }

  between(low: number, high: number): number {
    return low + (high - low) * uniformFloat64(this.generator);
  }

  vector(size: number): Vec3 {
    return [this.between(-size, size), this.between(-size, size), this.between(-size, size)];
  }

  /** Looks past the origin from up to `far` away. */
  camera(kind: 'perspective' | 'orthographic', near: number, far: number): Camera {
    const camera =
      kind === 'perspective'
        ? new PerspectiveCamera(this.between(20, 90), 1, near, 10 * far)
        : new OrthographicCamera(-1.2, 1.2, 1.2, -1.2, near, 10 * far);
    camera.position.set(...this.vector(far));
    camera.up.set(...this.vector(1));
    camera.lookAt(...this.vector(0.5));
    camera.updateMatrixWorld();
    return camera;
  }

  plane(name: string): Plane {
    const [nu, nv] = [Math.floor(this.between(2, 40)), Math.floor(this.between(2, 40))];
    const values = Float32Array.from({ length: nu * nv }, () => this.between(-1, 1));
    return { name, origin: this.vector(1), u: this.vector(2), v: this.vector(2), nu, nv, values, scale: SCALE };
  }
}

export const SCALE: SignedScale = { kind: 'signed', limit: 1, label: 'Ez, V/m' };

/** A pane without strokes, markers or colour bar. */
export function paneOf(camera: Camera, planes: readonly Plane[], width = 160, height = 150): Pane {
  return { area: { x: 0, y: 0, width, height }, title: '', camera, planes, strokes: [], markers: [] };
}

export function sceneOf(...panes: readonly Pane[]): Scene {
  return { theme: 'light', pixelRatio: 1, panes };
}
