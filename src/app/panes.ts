import { OrthographicCamera, PerspectiveCamera, Vector3 } from 'three';
import { OrbitControls } from 'three/addons/controls/OrbitControls.js';
import { viewOf } from '../draw/display.ts';
import { paneAt, pick, pickMarker, slide } from '../draw/pick.ts';
import { Picture } from '../draw/picture.ts';
import { type Box, cameraFor, type Camera as PaneCamera, type Rectangle } from '../draw/projection.ts';
import type { Scene } from '../draw/scene.ts';
import type { Scenario, Vec3 } from '../scenario/model.ts';
import { gripOf, type Reading, type Scenery } from '../scene/scenery.ts';
import { planesShown } from '../scene/slices.ts';
import { byId } from './dom.ts';
import { paintLabels } from './labels.ts';
import type { Store } from './store.ts';

/** Image pixels that are drawn at most: beyond, the image is drawn smaller and stretched, the texts are not. */
const MOST_PIXELS = 2.4e6;

/** In narrow windows the panes stand one above the other; page.css makes room for them. */
const NARROW = '(max-width: 900px)';

/** Panes lower than this, CSS pixels, leave the lengths below the box less room. */
const LOW = 330;

/** Views along the axes and the one that a run begins with: direction from the middle of the box to the eye. */
export const VIEWS = {
  corner: [0.9, -1.3, 0.75],
  x: [1, 0, 0.0001],
  y: [0, -1, 0.0001],
  z: [0, -0.0001, 1],
} as const satisfies Record<string, Vec3>;
export type ViewName = keyof typeof VIEWS;

/** The panes: one image for all, drawn when something in it has changed. */
export class Panes {
  private readonly canvas = byId<HTMLCanvasElement>('panes-image');
  private readonly texts = byId<HTMLCanvasElement>('panes-texts');
  private readonly host = byId('panes');
  private picture = new Picture(1, 1);
  private ratio = 1;
  private narrowness = 1;
  private camera: PaneCamera = new PerspectiveCamera();
  private controls: OrbitControls | undefined;
  /** the box that the camera was set up for */
  private box: Box | undefined;
  private dirty = false;
  private drag:
    | { readonly plane: number; readonly from: Vec3; readonly normal: Vec3; at: number; readonly pane: number }
    | undefined;
  private dividing = false;
  /** index of the plane that the keyboard moves */
  private chosen = 0;
  private pressed: { readonly x: number; readonly y: number; readonly time: number } | undefined;
  scene: Scene | undefined;
  /** pictures drawn so far */
  drawn = 0;
  /** milliseconds that the last pictures took */
  readonly costs: number[] = [];

  constructor(
    private readonly store: Store,
    private readonly scenery: Scenery,
    private readonly onRead: (reading: Reading | undefined) => void,
    private readonly onPick: (place: Vec3, x: number, y: number) => void,
  ) {
    new ResizeObserver(() => this.resize()).observe(this.host);
    store.on(['view', 'frame', 'film', 'theme', 'scenario', 'result'], () => this.invalidate());
    store.on(['view'], () => this.fit());
    this.listen();
  }

  /** Whether what is shown is what there is to show. */
  get settled(): boolean {
    return this.drawn > 0 && !this.dirty && !this.scenery.settling;
  }

  /** Draws again at the next opportunity. */
  invalidate(): void {
    if (this.dirty) return;
    this.dirty = true;
    requestAnimationFrame(() => {
      this.dirty = false;
      this.draw();
    });
  }

  /** Turns the camera to one of the named views, keeping its kind. */
  look(name: ViewName): void {
    this.setCamera(VIEWS[name]);
  }

  /** Turns or tips the camera by some degrees, and brings it nearer by a factor: for the keyboard. */
  turn(degreesRight: number, degreesUp: number, nearer = 1): void {
    const target = this.controls?.target ?? new Vector3();
    const arm = this.camera.position.clone().sub(target);
    const up = new Vector3(0, 0, 1);
    arm.applyAxisAngle(up, (-degreesRight * Math.PI) / 180);
    const side = new Vector3().crossVectors(up, arm).normalize();
    const tipped = arm.clone().applyAxisAngle(side, (-degreesUp * Math.PI) / 180);
    if (Math.abs(tipped.clone().normalize().z) < 0.9999) arm.copy(tipped);
    if (this.camera instanceof OrthographicCamera) this.camera.zoom *= nearer;
    else arm.divideScalar(nearer);
    this.camera.position.copy(target).add(arm);
    this.camera.lookAt(target);
    this.controls?.update();
    this.invalidate();
  }

  /** Shifts the camera by fractions of the height it sees. */
  shift(right: number, up: number): void {
    const { camera, controls } = this;
    if (!controls) return;
    const height =
      camera instanceof OrthographicCamera
        ? (camera.top - camera.bottom) / camera.zoom
        : (2 * Math.tan((camera.fov * Math.PI) / 360) * camera.position.distanceTo(controls.target)) / camera.zoom;
    camera.updateMatrixWorld();
    const step = new Vector3()
      .setFromMatrixColumn(camera.matrixWorld, 0)
      .multiplyScalar(right * height)
      .addScaledVector(new Vector3().setFromMatrixColumn(camera.matrixWorld, 1), up * height);
    camera.position.add(step);
    controls.target.add(step);
    controls.update();
    this.invalidate();
  }

  private setCamera(from?: Vec3): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const { projection } = this.store.state.view;
    const old = this.controls?.target.clone();
    const direction = from ?? (old ? this.camera.position.clone().sub(old).toArray() : VIEWS.corner);
    const [area] = this.areas(this.paneCount());
    this.camera = cameraFor(scenario.grid.box, projection, this.aspect(), direction as Vec3);
    this.narrowness = Math.min(1, this.aspect());
    this.camera.zoom = area!.height / this.ratio < LOW ? 0.92 : 1.04;
    this.camera.updateProjectionMatrix();
    this.controls?.dispose();
    const controls = new OrbitControls(this.camera, this.canvas);
    controls.target.set(
      ...([0, 1, 2].map((a) => (scenario.grid.box.from[a]! + scenario.grid.box.to[a]!) / 2) as [
        number,
        number,
        number,
      ]),
    );
    const distance = this.camera.position.distanceTo(controls.target);
    controls.minDistance = distance / 20;
    controls.maxDistance = distance * 8;
    controls.minZoom = 0.25;
    controls.maxZoom = 20;
    controls.update();
    controls.addEventListener('change', () => this.invalidate());
    this.controls = controls;
    this.invalidate();
  }

  private resize(): void {
    const { clientWidth: width, clientHeight: height } = this.host;
    if (width === 0 || height === 0) return;
    this.ratio = Math.min(devicePixelRatio, Math.sqrt(MOST_PIXELS / (width * height)));
    this.canvas.width = Math.round(width * this.ratio);
    this.canvas.height = Math.round(height * this.ratio);
    this.texts.width = Math.round(width * devicePixelRatio);
    this.texts.height = Math.round(height * devicePixelRatio);
    this.picture = new Picture(this.canvas.width, this.canvas.height);
    this.fit();
    this.invalidate();
  }

  /** Width over height of the part of a pane that shows space. */
  private aspect(): number {
    const [area] = this.areas(this.paneCount());
    return area!.width / Math.max(1, area!.height - 74 * this.ratio);
  }

  /** Keeps the box in sight when a pane becomes narrower, and as large as it was when it becomes wider again. */
  private fit(): void {
    const narrowness = Math.min(1, this.aspect());
    const factor = narrowness / this.narrowness;
    if (Math.abs(factor - 1) < 0.01) return;
    this.narrowness = narrowness;
    this.turn(0, 0, factor);
  }

  private paneCount(): number {
    return this.store.state.view.layout === 'overlay' ? 1 : 3;
  }

  private areas(count: number): Rectangle[] {
    const { width, height } = this.canvas;
    const stacked = count > 1 && matchMedia(NARROW).matches;
    const gap = Math.round(this.ratio);
    return Array.from({ length: count }, (_, n) => {
      const [from, to] = [n, n + 1].map((k) => Math.round(((stacked ? height : width) * k) / count)) as [
        number,
        number,
      ];
      return stacked
        ? { x: 0, y: from, width, height: to - from - gap }
        : { x: from, y: 0, width: to - from - gap, height };
    });
  }

  private draw(): void {
    const { scenario, theme, view } = this.store.state;
    if (!scenario || this.canvas.width < 2) return;
    if (!sameBox(this.box, scenario.grid.box)) {
      this.setCamera(this.box ? undefined : VIEWS.corner);
      this.box = scenario.grid.box;
    }
    const started = performance.now();
    const kind = this.camera instanceof PerspectiveCamera ? 'perspective' : 'orthographic';
    if (kind !== view.projection) this.setCamera();
    const areas = this.areas(this.paneCount());
    this.scene = { theme, pixelRatio: this.ratio, panes: this.scenery.panes(this.camera, areas) };
    const labels = this.picture.draw(this.scene);
    const { bytes, width, height } = this.picture.surface;
    this.canvas.getContext('2d')!.putImageData(new ImageData(bytes, width, height), 0, 0);
    const { panes, pixelRatio } = this.scene;
    const ends = panes.map((pane) => viewOf(pane, pixelRatio)).map(({ y, height: h }) => y + h);
    // a length that would lie over the colour bar is left out
    const shown = labels.filter(({ role, pane, y }) => role !== 'tick' || y < ends[pane]! - 3 * pixelRatio);
    paintLabels(this.texts, shown, theme, this.ratio);
    if (this.scenery.settling) this.invalidate();
    this.costs.push(performance.now() - started);
    if (this.costs.length > 600) this.costs.shift();
    this.drawn++;
    if (this.drawn === 1) performance.mark('first picture');
  }

  // ------------------------------------------------------------------------------------------------------------ pointer

  private place(event: PointerEvent): [number, number] {
    const bounds = this.canvas.getBoundingClientRect();
    return [(event.clientX - bounds.left) * this.ratio, (event.clientY - bounds.top) * this.ratio];
  }

  private listen(): void {
    const { canvas } = this;
    canvas.addEventListener('pointerdown', (event) => this.press(event), { capture: true });
    canvas.addEventListener('pointermove', (event) => this.move(event));
    canvas.addEventListener('pointerup', (event) => this.release(event));
    canvas.addEventListener('pointerleave', () => this.onRead(undefined));
    // The page must not scroll while the wheel zooms.
    canvas.addEventListener('wheel', (event) => event.preventDefault(), { passive: false });
  }

  private press(event: PointerEvent): void {
    const { scene } = this;
    const { scenario, view } = this.store.state;
    if (!scene || !scenario || event.button !== 0) return;
    const [x, y] = this.place(event);
    this.pressed = { x: event.clientX, y: event.clientY, time: event.timeStamp };
    if (view.layout === 'overlay' && Math.abs(x - this.dividerPixel()) < 8 * this.ratio) {
      this.dividing = true;
      if (this.controls) this.controls.enabled = false;
      return;
    }
    const marker = pickMarker(scene, x, y, 12 * this.ratio);
    const pane = paneAt(scene, x, y);
    const n = planesShown(scenario).findIndex((_, k) => sameVec(gripOf(scenario, k), marker?.at));
    if (n < 0 || pane === undefined) return;
    const { normal, at } = planesShown(scenario)[n]!;
    this.drag = {
      plane: n,
      pane,
      from: gripOf(scenario, n),
      normal: [0, 1, 2].map((a) => (a === normal ? 1 : 0)) as unknown as Vec3,
      at,
    };
    if (this.controls) this.controls.enabled = false;
    canvasCapture(this.canvas, event.pointerId);
  }

  private dividerPixel(): number {
    const [area] = this.areas(1);
    return area!.x + this.store.state.view.divider * area!.width;
  }

  private move(event: PointerEvent): void {
    const { scene, drag } = this;
    if (!scene) return;
    const [x, y] = this.place(event);
    if (this.dividing) {
      const [area] = this.areas(1);
      this.store.setView({ divider: Math.min(1, Math.max(0, (x - area!.x) / area!.width)) });
      return;
    }
    if (drag) {
      const { scenario } = this.store.state;
      const moved = slide(scene, drag.pane, drag.from, drag.normal, x, y);
      if (!scenario || moved === undefined) return;
      const axis = drag.normal.indexOf(1);
      drag.at = onNode(scenario, axis, drag.from[axis]! + moved);
      this.scenery.moving = drag;
      this.invalidate();
      return;
    }
    if (event.buttons === 0) this.onRead(this.readingAt(x, y));
  }

  private release(event: PointerEvent): void {
    const { drag, pressed, scene } = this;
    this.pressed = undefined;
    if (this.controls) this.controls.enabled = true;
    if (this.dividing) {
      this.dividing = false;
      return;
    }
    if (drag) {
      this.drag = undefined;
      this.scenery.moving = undefined;
      this.movePlane(drag.plane, drag.at);
      this.invalidate();
      return;
    }
    if (!pressed || !scene || event.button !== 0) return;
    if (Math.hypot(event.clientX - pressed.x, event.clientY - pressed.y) > 4 || event.timeStamp - pressed.time > 500)
      return;
    const [x, y] = this.place(event);
    const marker = pickMarker(scene, x, y, 10 * this.ratio);
    if (marker && this.store.state.scenario?.observers.some(({ name }) => name === marker.name)) {
      this.store.setView({ observer: marker.name });
      return;
    }
    const hit = pick(scene, x, y);
    if (hit) this.onPick(hit.point, event.clientX, event.clientY);
  }

  /** Chooses the plane that the keyboard moves. */
  nextPlane(): void {
    const { scenario } = this.store.state;
    if (scenario) this.chosen = (this.chosen + 1) % planesShown(scenario).length;
  }

  /** Moves the chosen plane by some cells. */
  stepPlane(cells: number): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const shown = planesShown(scenario);
    const n = Math.min(this.chosen, shown.length - 1);
    const { normal, at } = shown[n]!;
    const present = onNode(scenario, normal, at);
    this.movePlane(n, onNode(scenario, normal, present + cells * scenario.grid.cellSize[normal]!));
  }

  /** Asks for the name of an observer on the chosen plane, halfway from its middle to its corner. */
  offerObserver(): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const shown = planesShown(scenario);
    const { normal, at } = shown[Math.min(this.chosen, shown.length - 1)]!;
    const { from, to } = scenario.grid.box;
    const place = from.map((x, a) => (a === normal ? at : x + 0.75 * (to[a]! - x))) as unknown as Vec3;
    const bounds = this.host.getBoundingClientRect();
    this.onPick(place, bounds.left + bounds.width / 6, bounds.top + bounds.height / 2);
  }

  /** Puts a plane elsewhere in the scenario. */
  movePlane(index: number, at: number): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const shown = planesShown(scenario);
    this.store.edit((draft) => {
      if (!Array.isArray(draft.planes) || draft.planes.length === 0)
        draft.planes = shown.map(({ name, normal, at: where }) => ({ name, normal: 'xyz'[normal], at: where }));
      draft.planes[index].at = `${Number((at * 1000).toPrecision(6))} mm`;
    });
  }

  /** The values of all pictures under a place in the image. */
  readingAt(x: number, y: number): Reading | undefined {
    return this.scene && this.scenery.readingAt(this.scene, x, y);
  }

  /** The image with its texts, as it stands, for files. */
  still(): HTMLCanvasElement {
    const copy = document.createElement('canvas');
    copy.width = this.canvas.width;
    copy.height = this.canvas.height;
    const context = copy.getContext('2d')!;
    context.drawImage(this.canvas, 0, 0);
    context.drawImage(this.texts, 0, 0, copy.width, copy.height);
    return copy;
  }

  /** Draws at once, for films that are being saved. */
  drawNow(): void {
    this.draw();
  }
}

function canvasCapture(canvas: HTMLCanvasElement, pointer: number): void {
  // A pointer that has left by then cannot be captured, which is no harm.
  if (canvas.hasPointerCapture?.(pointer) === false) canvas.setPointerCapture(pointer);
}

/** The nearest place along an axis where a plane of nodes lies inside the box, m. */
function onNode({ grid: { box, cellSize, cells } }: Scenario, axis: number, at: number): number {
  const nodes = Math.round((at - box.from[axis]!) / cellSize[axis]!);
  return box.from[axis]! + Math.min(cells[axis]! - 1, Math.max(1, nodes)) * cellSize[axis]!;
}

const sameBox = (a: Box | undefined, b: Box): boolean =>
  a !== undefined && sameVec(a.from, b.from) && sameVec(a.to, b.to);

const sameVec = (a: Vec3, b: Vec3 | undefined): boolean => a.every((x, k) => x === b?.[k]);
