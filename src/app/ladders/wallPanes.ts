import { OrbitControls } from 'three/addons/controls/OrbitControls.js';
import { type CaseResult, isDone } from '../../compare/surveyResult.ts';
import { Picture } from '../../draw/picture.ts';
import { type Camera, cameraFor, type Rectangle } from '../../draw/projection.ts';
import type { Pane } from '../../draw/scene.ts';
import { formatQuantity } from '../../elementary/quantity.ts';
import { reflectionTimeChart } from '../../report/surveyCharts.ts';
import { caseName } from '../../report/surveyWords.ts';
import { loadScenario } from '../../scenario/load.ts';
import type { Scenario } from '../../scenario/model.ts';
import { Film } from '../../scene/film.ts';
import { QUANTITIES, type QuantityKey } from '../../scene/quantity.ts';
import { Scenery, type Shown } from '../../scene/scenery.ts';
import { LiveChart } from '../charts.ts';
import { h } from '../dom.ts';
import { paintLabels } from '../labels.ts';
import { VIEWS } from '../panes.ts';
import { type PageWorker, startWorker } from '../workers.ts';
import type { FilmReport, FilmRequest } from './filmer.ts';
import type { SurveyModel } from './model.ts';

/** Walls beside each other, at most: more panes are too small to see anything in. */
const MOST = 5;
const COLUMNS = 3;

/** Height of a pane, CSS pixels. */
const HEIGHT = 270;

/** Pictures a second. */
const SPEED = 20;

/** A wall whose fields are filmed. */
interface Wall {
  readonly name: string;
  readonly json: Record<string, unknown>;
  readonly scenario: Scenario;
}

/**
 * Several walls as panes beside the one exact field, on one time line, and what they send back beneath with a line at
 * the instant shown. Filmed on demand, on the first plane of the scenario.
 */
export class WallPanes {
  readonly element: HTMLElement;
  private readonly choices = h('div', { className: 'chosen', role: 'group', 'aria-label': 'Walls to show' });
  private readonly start = h('button', { type: 'button' }, 'Show their fields');
  private readonly status = h('span', { className: 'muted', role: 'status' });
  private readonly show = h('select', { 'aria-label': 'What the panes show' });
  private readonly quantity = h('select', { 'aria-label': 'Quantity' });
  private readonly play = h('button', { type: 'button' }, 'Play');
  private readonly slider = h('input', { type: 'range', min: '0', value: '0', 'aria-label': 'Instant shown' });
  private readonly time = h('output', {});
  private readonly image = h('canvas', {});
  private readonly texts = h('canvas', {});
  private readonly host: HTMLElement;
  private readonly body: HTMLElement;
  private readonly chart: LiveChart;
  private picture = new Picture(1, 1);
  private camera: Camera | undefined;
  private worker: PageWorker<FilmRequest> | undefined;
  private walls: readonly Wall[] = [];
  private films: Film[] = [];
  private sceneries: Scenery[] = [];
  private frame = 0;
  private playing = false;
  private last = 0;
  private dirty = false;
  private off = new Set<number>();

  constructor(private readonly model: SurveyModel) {
    this.host = h(
      'div',
      {
        className: 'panes',
        role: 'img',
        'aria-label': 'The exact field, and beside it the grid’s field with each of the walls, at one instant.',
      },
      this.image,
      this.texts,
    );
    this.chart = new LiveChart(
      () => 'Reflections in time: measured where walls are varied.',
      (time) => this.seek(time),
    );
    this.show.append(
      h('option', { value: 'grid' }, 'the fields'),
      h('option', { value: 'difference' }, 'errors, in dB'),
    );
    for (const { key, label, unit, kind } of QUANTITIES)
      if (kind !== 'potential') this.quantity.append(h('option', { value: key }, `${label} (${unit})`));
    this.quantity.value = 'Ez';
    for (const control of [this.show, this.quantity]) control.addEventListener('change', () => this.invalidate());
    this.start.addEventListener('click', () => (this.worker ? this.end('Cancelled.') : this.begin()));
    this.play.addEventListener('click', () => this.toggle());
    this.slider.addEventListener('input', () => {
      this.playing = false;
      this.setFrame(Number(this.slider.value));
    });
    this.body = h(
      'div',
      { hidden: true },
      this.host,
      h('div', { className: 'timeline' }, this.play, this.slider, this.time, this.show, this.quantity),
      h('div', { className: 'charts grid wide' }, this.chart.figure),
    );
    this.element = h(
      'section',
      { className: 'walls', 'aria-label': 'Walls beside the same exact field' },
      h('h2', {}, 'Walls beside the same exact field'),
      this.choices,
      h('div', { className: 'bar' }, this.start, this.status),
      this.body,
    );
    model.on(['result'], () => this.offer());
    // The survey's workers have the machine until it is done.
    model.on(['run'], () => {
      this.start.disabled = model.state.status === 'running';
    });
    model.store.on(['theme'], () => this.redrawAll());
    new ResizeObserver(() => this.resize()).observe(this.host);
    this.offer();
  }

  /** Stops what moves while nobody looks. */
  rest(): void {
    this.playing = false;
    this.showPlay();
  }

  private stamp = '';

  /** The cases whose fields can stand beside each other: the same cells and box, other walls; on the finest cells. */
  private offer(): void {
    const { result } = this.model.state;
    const cases = result?.cases ?? [];
    const stamp = cases.map(({ hash }) => hash).join(' ');
    if (stamp === this.stamp) return;
    this.stamp = stamp;
    const groups = new Map<string, number[]>();
    cases.forEach((each, n) => {
      if (!isDone(each)) return;
      const others = Object.entries(each.settings).filter(([key]) => !key.startsWith('grid.boundary'));
      const key = JSON.stringify([each.cellSize, others]);
      groups.set(key, [...(groups.get(key) ?? []), n]);
    });
    const volume = (n: number) =>
      (cases[n] as CaseResult & { cellSize: readonly number[] }).cellSize.reduce((a, b) => a * b, 1);
    const best = [...groups.values()]
      .filter((group) => group.length > 1)
      .reduce<number[]>((a, b) => (a.length === 0 || volume(b[0]!) < volume(a[0]!) ? b : a), []);
    this.end('');
    this.body.hidden = true;
    this.element.hidden = best.length === 0;
    this.walls = best.flatMap((n): Wall[] => {
      const json = this.model.scenarioOf(n);
      const loaded = json && loadScenario(json);
      const { settings } = cases[n]!;
      return json && loaded && 'scenario' in loaded
        ? [{ name: caseName(settings), json, scenario: loaded.scenario }]
        : [];
    });
    this.off = new Set(this.walls.map((_, n) => n).slice(MOST));
    this.choices.replaceChildren(
      ...this.walls.map(({ name }, n) => {
        const box = h('input', { type: 'checkbox', checked: !this.off.has(n) });
        box.addEventListener('change', () => {
          if (box.checked && this.walls.length - this.off.size >= MOST) {
            box.checked = false;
            this.status.textContent = `At most ${MOST} walls at a time: take one out first.`;
            return;
          }
          if (box.checked) this.off.delete(n);
          else this.off.add(n);
        });
        return h('label', {}, box, ` ${name}`);
      }),
    );
  }

  private shown: readonly Wall[] = [];

  private begin(): void {
    this.shown = this.walls.filter((_, n) => !this.off.has(n));
    if (this.shown.length === 0) {
      this.status.textContent = 'Choose a wall first.';
      return;
    }
    this.films = [];
    this.sceneries = [];
    this.camera = undefined;
    this.body.hidden = false;
    this.status.textContent = 'Starting the workers…';
    this.start.textContent = 'Cancel';
    this.worker = startWorker<FilmRequest, FilmReport>(
      './filmer.js',
      (report) => this.take(report),
      (message) => this.end(message),
    );
    this.worker.ask({ scenarios: this.shown.map(({ json }) => json) });
  }

  private end(message: string): void {
    this.worker?.end();
    this.worker = undefined;
    this.start.textContent = 'Show their fields';
    this.status.textContent = message;
  }

  private take(report: FilmReport): void {
    switch (report.kind) {
      case 'film':
        this.films = this.shown.map(() => new Film(report));
        this.sceneries = this.films.map((_, n) => new Scenery(this.storeOf(n), () => {}));
        this.slider.max = String(report.instants.count - 1);
        this.frame = 0;
        this.playing = !matchMedia('(prefers-reduced-motion: reduce)').matches;
        this.showPlay();
        this.redrawAll();
        this.tick();
        break;
      case 'grid':
        this.films[report.wall]?.addGrid(report);
        this.invalidate();
        break;
      case 'exact':
        for (const film of this.films) film.addExact(report);
        this.invalidate();
        break;
      case 'progress':
        this.status.textContent = `${report.stage[0]!.toUpperCase()}${report.stage.slice(1)}: ${Math.round(100 * report.fraction)} %`;
        break;
      case 'done':
        for (const film of this.films) {
          film.exactKnown = true;
          film.revision++;
        }
        this.end('');
        this.invalidate();
        break;
      case 'failed':
        this.end(report.message);
        break;
    }
  }

  /** What one wall's scenery shows: the page's view of it at the instant of all. */
  private storeOf(n: number): { readonly state: Shown } {
    const panes = this;
    return {
      get state(): Shown {
        const { view, theme } = panes.model.store.state;
        return {
          scenario: panes.shown[n]!.scenario,
          view: {
            ...view,
            layout: 'panes',
            quantity: panes.quantity.value as QuantityKey,
            difference: 'decibels',
            contours: false,
            gain: 1,
          },
          theme,
          film: panes.films[n]!,
          frame: panes.frame,
          result: null,
        };
      },
    };
  }

  // ------------------------------------------------------------------------------------------------------------ drawing

  private resize(): void {
    const count = this.films.length + 1;
    const width = this.host.clientWidth;
    if (this.films.length === 0 || width === 0) return;
    const height = Math.ceil(count / this.columns()) * HEIGHT;
    this.host.style.height = `${height}px`;
    const ratio = Math.min(devicePixelRatio, Math.sqrt(2.4e6 / (width * height)));
    this.image.width = Math.round(width * ratio);
    this.image.height = Math.round(height * ratio);
    this.texts.width = Math.round(width * devicePixelRatio);
    this.texts.height = Math.round(height * devicePixelRatio);
    this.picture = new Picture(this.image.width, this.image.height);
    this.invalidate();
  }

  private columns(): number {
    return Math.max(1, Math.min(COLUMNS, this.films.length + 1, Math.floor(this.host.clientWidth / 200)));
  }

  private areas(): Rectangle[] {
    const columns = this.columns();
    const rows = Math.ceil((this.films.length + 1) / columns);
    const { width, height } = this.image;
    return Array.from({ length: this.films.length + 1 }, (_, n) => {
      const [i, j] = [n % columns, Math.floor(n / columns)];
      const x = Math.round((i * width) / columns);
      const y = Math.round((j * height) / rows);
      return {
        x,
        y,
        width: Math.round(((i + 1) * width) / columns) - x - 1,
        height: Math.round(((j + 1) * height) / rows) - y - 1,
      };
    });
  }

  private redrawAll(): void {
    const { result } = this.model.state;
    this.chart.draw(result && result.cases.length > 0 ? reflectionTimeChart(result) : null);
    this.resize();
    this.invalidate();
  }

  private invalidate(): void {
    if (this.dirty) return;
    this.dirty = true;
    requestAnimationFrame(() => {
      this.dirty = false;
      this.draw();
    });
  }

  private cameraOf(area: Rectangle): Camera {
    if (this.camera) return this.camera;
    const { box } = this.shown[0]!.scenario.grid;
    const camera = cameraFor(box, 'perspective', area.width / Math.max(1, area.height - 74), VIEWS.corner);
    const controls = new OrbitControls(camera, this.image);
    controls.target.set(...([0, 1, 2].map((a) => (box.from[a]! + box.to[a]!) / 2) as [number, number, number]));
    controls.enableZoom = false;
    controls.update();
    controls.addEventListener('change', () => this.invalidate());
    this.camera = camera;
    return camera;
  }

  private draw(): void {
    if (this.films.length === 0 || this.image.width < 2 || this.host.clientWidth === 0) return;
    const areas = this.areas();
    const camera = this.cameraOf(areas[0]!);
    const { theme } = this.model.store.state;
    const side = this.show.value === 'grid' ? 0 : 2;
    const all = this.sceneries.map((scenery, n) => scenery.panes(camera, [areas[n + 1]!, areas[0]!, areas[n + 1]!]));
    const [first] = all;
    const exact = first![1]!;
    // One scale for all: the exact field's, and for errors that of the first.
    const scale = side === 0 ? exact.scale : first![2]!.scale;
    const walls = all.map((panes, n): Pane => {
      const pane = panes[side]!;
      const planes = scale ? pane.planes.map((plane) => ({ ...plane, scale })) : pane.planes;
      return { ...pane, planes, title: this.shown[n]!.name, ...(scale ? { scale } : {}) };
    });
    const ratio = this.image.width / this.host.clientWidth;
    const labels = this.picture.draw({ theme, pixelRatio: ratio, panes: [exact, ...walls] });
    const { bytes, width, height } = this.picture.surface;
    this.image.getContext('2d')!.putImageData(new ImageData(bytes, width, height), 0, 0);
    paintLabels(
      this.texts,
      labels.filter(({ role }) => role !== 'tick'),
      theme,
      ratio,
    );
    if (this.sceneries.some(({ settling }) => settling)) this.invalidate();
    const time = this.films[0]!.instants.E[this.frame]!;
    this.time.textContent = formatQuantity(time, 's');
    this.slider.value = String(this.frame);
    this.slider.setAttribute('aria-valuetext', this.time.textContent);
    this.chart.showTime(time);
  }

  // --------------------------------------------------------------------------------------------------------------- time

  private setFrame(frame: number): void {
    this.frame = frame;
    this.showPlay();
    this.invalidate();
  }

  private seek(time: number): void {
    const [film] = this.films;
    if (!film) return;
    this.playing = false;
    const n = film.instants.E.findIndex((t) => t >= time);
    this.setFrame(n < 0 ? film.frames - 1 : n);
  }

  private toggle(): void {
    this.playing = !this.playing;
    this.showPlay();
    if (this.playing) this.tick();
  }

  private showPlay(): void {
    this.play.textContent = this.playing ? 'Pause' : 'Play';
  }

  private tick(): void {
    requestAnimationFrame((now) => {
      const [film] = this.films;
      if (!this.playing || !film) return;
      // The grid of the last wall is the last to be known.
      const known = Math.min(...this.films.map(({ gridFrames }) => gridFrames));
      if (now - this.last >= 1000 / SPEED && known > 0) {
        this.last = now;
        this.setFrame(this.frame + 1 < known ? this.frame + 1 : known === film.frames ? 0 : this.frame);
      }
      this.tick();
    });
  }
}
