import { withinTolerance } from '../compare/result.ts';
import { Film } from '../scene/film.ts';
import { planesShown } from '../scene/slices.ts';
import type { Report, Request } from './messages.ts';
import type { Store } from './store.ts';
import { type PageWorker, startWorker } from './workers.ts';

/** What decides a comparison's numbers: everything but title and planes. Runs are not repeated for those. */
function decisive(json: unknown): string {
  if (typeof json !== 'object' || json === null) return '';
  const { title: _, planes: __, ...rest } = json as Record<string, unknown>;
  return JSON.stringify(rest);
}

/** Runs scenarios in a worker and puts what it tells into the store. One run at a time. */
export class Runner {
  private worker: PageWorker<Request> | null = null;
  private ran = '';
  private readonly asked = new Set<string>();

  constructor(private readonly store: Store) {}

  /** Runs the store's scenario, or only films it anew where nothing but its planes has changed since the last verdict. */
  update(): void {
    const { json, scenario, problems, result } = this.store.state;
    if (problems.length > 0 || !scenario) return;
    const wanted = decisive(json);
    if (this.worker && result && wanted === this.ran)
      this.ask({ kind: 'planes', planes: planesShown(scenario) }, 'the grid, for the pictures');
    else this.start();
  }

  /** Ends what runs and begins anew. */
  start(): void {
    const { json, scenario } = this.store.state;
    if (!scenario) return;
    this.stop();
    this.worker = startWorker<Request, Report>(
      './coordinator.js',
      (report) => this.take(report),
      (message) => this.take({ kind: 'failed', message }),
    );
    this.ran = decisive(json);
    this.store.state.result = null;
    this.store.state.traces = [];
    this.store.state.spectra = [];
    this.store.tell('result');
    this.ask({ kind: 'run', scenario: json, planes: planesShown(scenario) }, 'starting the workers');
  }

  private ask(request: Request, stage: string): void {
    this.store.setRun({ status: 'running', stage, fraction: 0, secondsLeft: undefined, message: '' });
    this.worker!.ask(request);
  }

  /** Ends the run at once; what is known already stays. */
  cancel(): void {
    this.stop();
    this.store.setRun({ status: 'cancelled', stage: '', message: '' });
  }

  private stop(): void {
    this.worker?.end();
    this.worker = null;
    this.asked.clear();
  }

  /** Has φ and A computed at a picture of the film, unless that has been asked already. */
  wantPotentials(frame: number): void {
    this.store.state.film?.films.forEach((film, slice) => {
      const key = `${slice} ${frame}`;
      if (film.potentials.has(frame) || this.asked.has(key)) return;
      this.asked.add(key);
      this.worker?.ask({ kind: 'potentials', slice, frame });
    });
  }

  private take(report: Report): void {
    const { store } = this;
    const { state } = store;
    switch (report.kind) {
      case 'progress': {
        const { stage, fraction, secondsLeft } = report;
        store.setRun({ stage, fraction, secondsLeft });
        break;
      }
      case 'film': {
        const first = state.film === null;
        const share = state.film && state.film.frames > 1 ? state.frame / (state.film.frames - 1) : 0;
        state.film = new Film(report);
        state.frame = Math.round(share * (state.film.frames - 1));
        this.asked.clear();
        if (first) state.playing = !matchMedia('(prefers-reduced-motion: reduce)').matches;
        // Where nothing moves by itself, the first picture is one with something in it.
        if (first && !state.playing) state.frame = state.film.frames >> 1;
        store.tell('film');
        store.tell('frame');
        break;
      }
      case 'grid':
        state.film?.addGrid(report);
        store.tell('film');
        break;
      case 'exact':
        state.film?.addExact(report);
        store.tell('film');
        break;
      case 'exactKnown':
        if (state.film) state.film.exactKnown = true;
        store.tell('film');
        break;
      case 'traces':
        // those of the comparison, with their parts, stand
        if (state.result) break;
        state.traces = report.traces;
        store.tell('result');
        break;
      case 'result':
        state.result = report.result;
        state.traces = report.traces;
        state.spectra = report.spectra;
        performance.mark('verdict', { detail: withinTolerance(report.result) });
        store.tell('result');
        break;
      case 'trust':
        state.film?.addTrust(report.slice, report.map);
        store.tell('film');
        break;
      case 'potentials':
        state.film?.addPotentials(report);
        store.tell('film');
        break;
      case 'refused':
        store.setRun({
          status: 'refused',
          stage: '',
          message: report.problems.map(({ message }) => message).join('\n'),
        });
        store.refuse(report.problems);
        break;
      case 'failed':
        this.stop();
        store.setRun({ status: 'failed', stage: '', message: report.message });
        break;
      case 'done':
        store.setRun({ status: 'done', stage: '', fraction: 1, secondsLeft: undefined });
        break;
    }
  }
}
