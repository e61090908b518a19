import { FIELDS } from '../compare/fields.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import type { ObserverTrace } from '../files/traces.ts';
import { distanceChart, partsChart, spectrumChart, strongestTrace, traceChart, wallChart } from '../report/charts.ts';
import { CHART_CSS, type Chart, type ChartLayout, chartLayout, chartSvg } from '../report/svg.ts';
import { byId, h } from './dom.ts';
import type { Store } from './store.ts';

const NAMESPACE = 'http://www.w3.org/2000/svg';

/** How far from a dot a click is still one on it, CSS pixels. */
const REACH = 14;

/** A chart on the page: the report's drawing, with a line at the instant shown and a reading under the pointer. */
export class LiveChart {
  readonly figure = h('figure', {});
  private readonly tip = h('div', { className: 'tip', hidden: true });
  private chart: Chart | null = null;
  private layout: ChartLayout | undefined;
  private cursor: SVGLineElement | undefined;
  private hover: SVGLineElement | undefined;

  constructor(
    /** what is said in its place while there is nothing to draw */
    private readonly empty: () => string,
    private readonly onTime?: (time: number) => void,
    /** told of a dot that was clicked: what it stands for */
    private readonly onKey?: (key: string) => void,
  ) {
    this.figure.addEventListener('pointermove', (event) => this.read(event));
    this.figure.addEventListener('pointerleave', () => this.unread());
    this.figure.addEventListener('click', (event) => {
      const x = this.valueAt(event.clientX);
      if (x !== undefined) this.onTime?.(x);
      const key = this.onKey && this.keyAt(event);
      if (key !== undefined) this.onKey!(key);
    });
    this.draw(null);
  }

  draw(chart: Chart | null): void {
    this.chart = chart;
    const width = Math.max(260, Math.round(this.figure.clientWidth || 380));
    this.figure.replaceChildren();
    if (!chart) {
      this.figure.append(h('p', { className: 'empty' }, this.empty()));
      return;
    }
    const size = { width, height: Math.round(Math.min(250, Math.max(200, width * 0.5))) };
    this.layout = chartLayout(chart, size);
    this.figure.innerHTML = chartSvg(chart, size).text;
    const svg = this.figure.querySelector('svg')!;
    const line = (name: string) => {
      const element = document.createElementNS(NAMESPACE, 'line');
      element.setAttribute('class', name);
      element.setAttribute('y1', String(this.layout!.top));
      element.setAttribute('y2', String(this.layout!.bottom));
      element.setAttribute('visibility', 'hidden');
      svg.append(element);
      return element;
    };
    this.cursor = line('cursor');
    this.hover = line('hover');
    this.tip.hidden = true;
    this.figure.append(this.tip);
  }

  /** The line at an instant, s. */
  showTime(time: number): void {
    if (this.onTime) place(this.cursor, this.layout, time);
  }

  private valueAt(clientX: number): number | undefined {
    const svg = this.figure.querySelector('svg');
    if (!svg || !this.layout || !this.chart) return undefined;
    const bounds = svg.getBoundingClientRect();
    const pixel = ((clientX - bounds.left) / bounds.width) * this.layout.width;
    const { left, right } = this.layout;
    if (pixel < left || pixel > right) return undefined;
    const share = (pixel - left) / (right - left);
    const [from, to] = this.chart.x.domain;
    return this.chart.x.scale === 'log' ? from * (to / from) ** share : from + (to - from) * share;
  }

  /** What the nearest dot within reach stands for. */
  private keyAt({ clientX, clientY }: MouseEvent): string | undefined {
    const dots = [...this.figure.querySelectorAll<SVGElement>('[data-key]')].map((dot) => {
      const { left, top, width, height } = dot.getBoundingClientRect();
      return { dot, off: Math.hypot(left + width / 2 - clientX, top + height / 2 - clientY) };
    });
    const nearest = dots.reduce((a, b) => (b.off < a.off ? b : a), { dot: null as SVGElement | null, off: REACH });
    return nearest.dot?.dataset.key;
  }

  /** The values of every line nearest to the pointer, with units. */
  private read(event: PointerEvent): void {
    const x = this.valueAt(event.clientX);
    if (x === undefined || !this.chart) {
      this.unread();
      return;
    }
    const { series, x: horizontal, y: vertical } = this.chart;
    const write = (axis: Chart['x'], value: number) => axis.format?.(value) ?? formatQuantity(value, axis.unit);
    const nearest = series.flatMap(({ name, points }) => {
      if (points.length === 0) return [];
      const point = points.reduce((a, b) => (Math.abs(b[0] - x) < Math.abs(a[0] - x) ? b : a));
      return [{ name, point }];
    });
    if (nearest.length === 0) {
      this.unread();
      return;
    }
    place(this.hover, this.layout, nearest[0]!.point[0]);
    this.tip.textContent = [
      `${horizontal.label} ${write(horizontal, nearest[0]!.point[0])}`,
      ...nearest.map(({ name, point }) => `${name} ${write(vertical, point[1])}`),
    ].join('\n');
    this.tip.hidden = false;
    const bounds = this.figure.getBoundingClientRect();
    const left = event.clientX - bounds.left;
    this.tip.style.left = left > bounds.width / 2 ? '' : `${left + 12}px`;
    this.tip.style.right = left > bounds.width / 2 ? `${bounds.width - left + 12}px` : '';
    this.tip.style.top = '56px';
  }

  private unread(): void {
    this.tip.hidden = true;
    this.hover?.setAttribute('visibility', 'hidden');
  }
}

function place(line: SVGLineElement | undefined, layout: ChartLayout | undefined, value: number): void {
  if (!line || !layout) return;
  const x = layout.x(value);
  const seen = x >= layout.left && x <= layout.right;
  line.setAttribute('x1', String(x));
  line.setAttribute('x2', String(x));
  line.setAttribute('visibility', seen ? 'visible' : 'hidden');
}

/** The component of an observer that the panes show, or its strongest one of E. */
function traceOf(store: Store): ObserverTrace | undefined {
  const { traces, view } = store.state;
  const own = traces.filter(({ observer }) => observer === view.observer);
  const shown = own.find(({ component }) => component === view.quantity);
  if (shown) return shown;
  const field = view.quantity === 'H' || view.quantity.startsWith('A') ? 'H' : 'E';
  return strongestTrace({ name: view.observer } as Parameters<typeof strongestTrace>[0], field, own);
}

/** Charts under the panes: traces and parts at the selected observer, spectrum and band, errors against distances. */
export class Charts {
  private readonly charts: readonly { readonly live: LiveChart; readonly chart: () => Chart | null }[];
  private readonly host = byId('charts');
  private next = 0;

  constructor(private readonly store: Store) {
    const style = new CSSStyleSheet();
    style.replaceSync(CHART_CSS);
    document.adoptedStyleSheets.push(style);
    const seek = (time: number) => {
      const { film } = store.state;
      if (!film) return;
      store.state.playing = false;
      const n = film.instants.E.findIndex((t) => t >= time);
      store.setFrame(n < 0 ? film.frames - 1 : n);
    };
    const observer = () => store.state.result?.observers.find(({ name }) => name === store.state.view.observer);
    const trace = () => traceOf(store);
    const atObserver = (what: string, otherwise: string) => () => {
      const { scenario, view } = store.state;
      if (scenario?.observers.length === 0)
        return `${what} at an observer: there is none. A click on a plane adds one.`;
      return `${what} at ${view.observer || 'an observer'}: ${otherwise}`;
    };
    const whenDone = (what: string) => () =>
      store.state.result ? `${what}: nothing was measured here.` : `${what}: known once both solvers are done.`;
    const both = 'known once both solvers are done.';
    this.charts = [
      {
        live: new LiveChart(atObserver('Both fields in time', 'known as soon as the grid has run.'), seek),
        chart: () => {
          const own = trace();
          return own ? traceChart(own) : null;
        },
      },
      {
        live: new LiveChart(atObserver('The parts of the error in time', both), seek),
        chart: () => {
          const own = trace();
          return own && store.state.result ? partsChart(own) : null;
        },
      },
      {
        live: new LiveChart(atObserver('Spectrum and trusted band', both)),
        chart: () => {
          const own = observer();
          const field = FIELDS.find((f) => trace()?.component.startsWith(f)) ?? 'E';
          const spectra = store.state.spectra.find((s) => s.observer === own?.name && s.field === field);
          return own && spectra ? spectrumChart(own, field, spectra.spectra) : null;
        },
      },
      {
        live: new LiveChart(whenDone('Error by distance to the source')),
        chart: () => (store.state.result ? distanceChart(store.state.result) : null),
      },
      {
        live: new LiveChart(whenDone('Error by distance to the walls')),
        chart: () => (store.state.result ? wallChart(store.state.result) : null),
      },
    ];
    this.host.append(...this.charts.map(({ live }) => live.figure));
    store.on(['scenario', 'result', 'view', 'theme'], () => this.redraw());
    store.on(['frame', 'film'], () => this.showTime());
    new ResizeObserver(() => this.redraw()).observe(this.host);
  }

  /** The figures as they stand, for files. */
  get figures(): readonly HTMLElement[] {
    return this.charts.map(({ live }) => live.figure);
  }

  private key = '';

  /** Draws one chart a task, apart from the panes' own, so that none of them holds the page up. */
  private redraw(): void {
    const { view, result, traces } = this.store.state;
    const key = `${this.store.state.scenario?.observers.length} ${view.observer} ${view.quantity} ${result?.verdict.sentence ?? ''} ${result?.timings.box.seconds ?? ''} ${traces.length} ${this.host.clientWidth}`;
    if (key === this.key) return;
    this.key = key;
    const idle = this.next === 0;
    this.next = this.charts.length;
    if (idle) setTimeout(() => this.drawNext());
  }

  private drawNext(): void {
    const { live, chart } = this.charts[this.charts.length - this.next]!;
    live.draw(chart());
    this.next--;
    if (this.next > 0) setTimeout(() => this.drawNext());
    else this.showTime();
  }

  private showTime(): void {
    const { film, frame } = this.store.state;
    if (film) for (const { live } of this.charts) live.showTime(film.instants.E[frame]!);
  }
}
