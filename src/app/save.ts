import { strToU8, zipSync } from 'fflate';
import { writeTracesNpz } from '../files/npz.ts';
import { fileWords } from '../files/words.ts';
import { chartFiles, type ResultFile } from '../report/folder.ts';
import { PALETTE } from '../report/palette.ts';
import { CHART_CSS } from '../report/svg.ts';
import type { Scenario } from '../scenario/model.ts';
import type { SliceFilm } from '../scene/film.ts';
import type { SnapshotRegion } from '../trace/snapshots.ts';
import type { Charts } from './charts.ts';
import { byId, h } from './dom.ts';
import type { EncoderRequest } from './encoder.ts';
import { notify } from './notice.ts';
import type { PackAnswer, PackRequest } from './packer.ts';
import type { Panes } from './panes.ts';
import type { Store } from './store.ts';
import { answerOf, startWorker } from './workers.ts';
import { nameOf, written } from './written.ts';

/** Hands a file to the browser's downloads. */
export function download(name: string, content: Blob): void {
  const url = URL.createObjectURL(content);
  h('a', { href: url, download: name }).click();
  setTimeout(() => URL.revokeObjectURL(url), 60_000);
}

export const textBlob = (text: string, type: string) => new Blob([text], { type: `${type};charset=utf-8` });

const bytesBlob = (bytes: Uint8Array, type: string) => new Blob([bytes as Uint8Array<ArrayBuffer>], { type });

const asBlob = (canvas: HTMLCanvasElement) =>
  new Promise<Blob>((resolve, reject) =>
    canvas.toBlob((blob) => (blob ? resolve(blob) : reject(new Error('The browser made no picture.'))), 'image/png'),
  );

const TYPES: Readonly<Record<ResultFile, string>> = {
  'result.json': 'application/json',
  'traces.csv': 'text/csv',
  'report.html': 'text/html',
};

/** The menu of everything that can be taken away. */
export class Saving {
  private readonly menu = h('div', { className: 'menu', role: 'menu', id: 'save-menu', hidden: true });
  private readonly button = h(
    'button',
    {
      type: 'button',
      className: 'compare-only',
      'aria-haspopup': 'menu',
      'aria-expanded': 'false',
      'aria-controls': 'save-menu',
    },
    'Save ▾',
  );
  private busy = false;

  constructor(
    private readonly store: Store,
    private readonly panes: Panes,
    private readonly charts: Charts,
  ) {
    const item = (name: string, help: string, run: () => void | Promise<void>) => {
      const element = h('button', { type: 'button', role: 'menuitem' }, h('span', {}, name), h('small', {}, help));
      element.addEventListener('click', () => {
        this.close();
        void Promise.resolve(run()).catch((error: Error) => notify(`Nothing was saved: ${error.message}`, 'bad'));
      });
      return element;
    };
    this.menu.append(
      item('Scenario', 'the file, JSON (Ctrl S)', () => this.scenario()),
      item('Report', 'verdict, budget and charts in one HTML file; printing the page (Ctrl P) gives it, too', () =>
        this.result('report.html'),
      ),
      item('Result', 'all figures, result.json', () => this.result('result.json')),
      item('Traces', 'every observer and part, CSV', () => this.result('traces.csv')),
      item('Traces for NumPy', 'the same as arrays, .npz', () => this.arrays()),
      item('Charts as SVG', 'those of the report, a zip archive', () => this.chartFiles()),
      item('Fields as VTK images', 'both fields on the planes, numbered .vti in a zip archive', () =>
        this.fields('vti'),
      ),
      item('Fields as HDF5', 'both fields on the planes, with units and axes', () => this.fields('hdf5')),
      item('Picture of the panes', 'as shown, PNG', () => this.picture()),
      item('Pictures of the charts', 'as shown, one PNG', () => this.chartsPicture()),
      item('Film, WebM', 'the panes at all instants; takes as long as it will play', () => this.film()),
      item('Film, animated PNG', 'the panes at all instants, colours exact; a larger file', () => this.animation()),
    );
    this.button.addEventListener('click', () => (this.menu.hidden ? this.open() : this.close()));
    this.menu.addEventListener('keydown', (event) => this.move(event));
    window.addEventListener('pointerdown', (event) => {
      if (!this.menu.hidden && !byId('actions').contains(event.target as Node)) this.close();
    });
    byId('actions').append(this.button, this.menu);
  }

  open(): void {
    this.menu.hidden = false;
    this.button.setAttribute('aria-expanded', 'true');
    (this.menu.firstElementChild as HTMLElement).focus();
  }

  private close(): void {
    if (this.menu.hidden) return;
    this.menu.hidden = true;
    this.button.setAttribute('aria-expanded', 'false');
    this.button.focus();
  }

  private move(event: KeyboardEvent): void {
    const items = [...this.menu.children] as HTMLElement[];
    const at = items.indexOf(document.activeElement as HTMLElement);
    if (event.key === 'Escape') this.close();
    else if (event.key === 'ArrowDown') items[(at + 1) % items.length]!.focus();
    else if (event.key === 'ArrowUp') items[(at + items.length - 1) % items.length]!.focus();
    else return;
    event.preventDefault();
    event.stopPropagation();
  }

  scenario(): void {
    download(`${nameOf(this.store)}.json`, textBlob(this.store.state.text, 'application/json'));
  }

  private async result(file: ResultFile): Promise<void> {
    download(`${nameOf(this.store)}-${file}`, textBlob(await written(this.store, file), TYPES[file]));
  }

  private arrays(): void {
    const { result, traces } = this.store.state;
    if (!result) throw new Error('there is no result yet; wait for the verdict.');
    download(`${nameOf(this.store)}-traces.npz`, bytesBlob(writeTracesNpz(traces), 'application/zip'));
  }

  private chartFiles(): void {
    const { result, traces, spectra } = this.store.state;
    if (!result) throw new Error('there is no result yet; wait for the verdict.');
    const files = Object.entries(chartFiles({ result, traces, spectra }));
    const archive = zipSync(Object.fromEntries(files.map(([name, text]) => [name, strToU8(text)])));
    download(`${nameOf(this.store)}-charts.zip`, bytesBlob(archive, 'application/zip'));
  }

  /** What the panes show, as numbers: both fields on all planes at all instants of the film. */
  private async fields(format: PackRequest['format']): Promise<void> {
    const { film, scenario } = this.store.state;
    if (!film?.exactKnown || !scenario)
      throw new Error('the fields are not all known yet; wait until the run is done.');
    const words = fileWords(film.films.map(({ slice }) => slice.name));
    const request: PackRequest = {
      format,
      title: scenario.title,
      frame: { instants: film.instants, precision: 'single' },
      films: film.films.map(({ slice, grid, exact, known }, n) => ({
        region: regionOf(scenario, slice, words[n]!),
        grid,
        exact,
        blank: slice.hole.map((hole, p) => (hole === 1 || known[p] !== 2 ? 1 : 0)),
      })),
    };
    notify('Packing the fields; the page can be used meanwhile.');
    const answer = await answerOf<PackRequest, PackAnswer>('./packer.js', request);
    if ('failed' in answer) throw new Error(answer.failed);
    const name = format === 'vti' ? 'fields-vti.zip' : 'fields.h5';
    const type = format === 'vti' ? 'application/zip' : 'application/x-hdf5';
    download(`${nameOf(this.store)}-${name}`, bytesBlob(answer.bytes, type));
  }

  private async picture(): Promise<void> {
    this.panes.drawNow();
    download(`${nameOf(this.store)}-panes.png`, await asBlob(this.panes.still()));
  }

  /** All charts one beside the other, at twice their size. */
  private async chartsPicture(): Promise<void> {
    const images = await Promise.all(
      this.charts.figures.flatMap((figure) => {
        const svg = figure.querySelector('svg');
        return svg ? [imageOf(svg, this.store)] : [];
      }),
    );
    if (images.length === 0) throw new Error('there are no charts yet; wait for the verdict.');
    const canvas = document.createElement('canvas');
    canvas.width = images.reduce((sum, { width }) => sum + 2 * width, 0);
    canvas.height = Math.max(...images.map(({ height }) => 2 * height));
    const context = canvas.getContext('2d')!;
    context.fillStyle = PALETTE.background[this.store.state.theme];
    context.fillRect(0, 0, canvas.width, canvas.height);
    let x = 0;
    for (const { image, width, height } of images) {
      context.drawImage(image, x, 0, 2 * width, 2 * height);
      x += 2 * width;
    }
    download(`${nameOf(this.store)}-charts.png`, await asBlob(canvas));
  }

  /** Shows every instant once, giving each to `take`; the page stays usable, the time line runs along. */
  private async eachPicture(
    perSecond: number,
    take: (still: HTMLCanvasElement) => Promise<void> | void,
  ): Promise<void> {
    const { state } = this.store;
    if (!state.film || this.busy)
      throw new Error(this.busy ? 'a film is being made already.' : 'there are no pictures yet.');
    this.busy = true;
    state.playing = false;
    const before = state.frame;
    try {
      for (let frame = 0; frame < state.film.frames; frame++) {
        this.store.setFrame(frame);
        this.panes.drawNow();
        await take(this.panes.still());
        await new Promise((done) => setTimeout(done, perSecond > 0 ? 1000 / perSecond : 0));
      }
    } finally {
      this.busy = false;
      this.store.setFrame(before);
    }
  }

  private async film(): Promise<void> {
    const type = ['video/webm;codecs=vp9', 'video/webm;codecs=vp8', 'video/webm'].find((each) =>
      globalThis.MediaRecorder?.isTypeSupported(each),
    );
    if (!type) {
      notify('This browser records no WebM; an animated PNG is made instead.');
      return this.animation();
    }
    const canvas = this.panes.still();
    const context = canvas.getContext('2d')!;
    const stream = canvas.captureStream(0);
    const track = stream.getVideoTracks()[0] as CanvasCaptureMediaStreamTrack;
    const recorder = new MediaRecorder(stream, { mimeType: type, videoBitsPerSecond: 8e6 });
    const parts: Blob[] = [];
    recorder.addEventListener('dataavailable', ({ data }) => parts.push(data));
    const ended = new Promise((done) => recorder.addEventListener('stop', done));
    notify('Recording the film; it takes as long as it will play.');
    recorder.start();
    await this.eachPicture(this.store.state.view.speed, (still) => {
      context.drawImage(still, 0, 0);
      track.requestFrame();
    });
    recorder.stop();
    await ended;
    download(`${nameOf(this.store)}.webm`, new Blob(parts, { type: 'video/webm' }));
  }

  private async animation(): Promise<void> {
    type Answer = { kind: string; bytes?: Uint8Array<ArrayBuffer> };
    let answered: { resolve: (answer: Answer) => void; reject: (error: Error) => void };
    const encoder = startWorker<EncoderRequest, Answer>(
      './encoder.js',
      (answer) => answered.resolve(answer),
      (message) => answered.reject(new Error(message)),
    );
    const ask = (request: EncoderRequest, transfer: Transferable[] = []) =>
      new Promise<Answer>((resolve, reject) => {
        answered = { resolve, reject };
        encoder.ask(request, transfer);
      });
    notify('Making the film; the time line runs along.');
    try {
      await this.eachPicture(0, async (still) => {
        const { data, width, height } = still.getContext('2d')!.getImageData(0, 0, still.width, still.height);
        await ask({ kind: 'picture', bytes: data, width, height }, [data.buffer]);
      });
      const { bytes } = await ask({ kind: 'end', perSecond: this.store.state.view.speed });
      download(`${nameOf(this.store)}.png`, new Blob([bytes!], { type: 'image/png' }));
    } finally {
      encoder.end();
    }
  }
}

/** A chart as an image, its colours those of the theme. */
async function imageOf(svg: SVGSVGElement, store: Store) {
  const copy = svg.cloneNode(true) as SVGSVGElement;
  const { width, height } = svg.viewBox.baseVal;
  copy.setAttribute('width', String(width));
  copy.setAttribute('height', String(height));
  const style = document.createElementNS('http://www.w3.org/2000/svg', 'style');
  const colours = Object.entries(PALETTE).map(([name, themes]) => `--${name}:${themes[store.state.theme]}`);
  style.textContent = `svg{${colours.join(';')}}${CHART_CSS}.cursor,.hover{display:none}`;
  copy.prepend(style);
  const url = URL.createObjectURL(new Blob([new XMLSerializer().serializeToString(copy)], { type: 'image/svg+xml' }));
  try {
    const image = new Image(width, height);
    image.src = url;
    await image.decode();
    return { image, width, height };
  } finally {
    URL.revokeObjectURL(url);
  }
}

/** The cells of a slice, as files of fields describe them. */
function regionOf({ grid }: Scenario, slice: SliceFilm['slice'], name: string): SnapshotRegion {
  const each = (of: (a: 0 | 1 | 2) => number): [number, number, number] => [of(0), of(1), of(2)];
  const { normal, layer, axes, nu, nv, stride } = slice;
  return {
    name,
    counts: each((a) => (a === normal ? 1 : a === axes[0] ? nu : nv)),
    origin: each((a) => grid.box.from[a] + (a === normal ? layer * grid.cellSize[a] : 0)),
    spacing: each((a) => stride * grid.cellSize[a]),
    cellSize: grid.cellSize,
  };
}
