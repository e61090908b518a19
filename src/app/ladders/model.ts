import { type SurveyResult, surveyResultSchema } from '../../compare/surveyResult.ts';
import type { Problem } from '../../scenario/reading.ts';
import { BOUNDARIES, CPML_DEFAULTS } from '../../scenario/schema.ts';
import { expandSurvey, loadSurvey } from '../../scenario/survey.ts';
import { textOf } from '../../scenario/text.ts';
import type { Store } from '../store.ts';
import { type PageWorker, startWorker } from '../workers.ts';
import { Folder } from './folder.ts';
import type { Report, Request } from './messages.ts';

/** What is varied, as a survey file has it. */
export type Vary = Readonly<Record<string, readonly unknown[]>>;

export type Status = 'idle' | 'running' | 'done' | 'cancelled' | 'refused' | 'failed' | 'following' | 'shown';

export interface SurveyState {
  vary: Vary;
  combine: 'all' | 'paired';
  status: Status;
  /** what is being done, while it runs */
  stage: string;
  fraction: number;
  secondsLeft: number | undefined;
  /** why it was refused or failed; where a result that is shown comes from */
  message: string;
  problems: readonly Problem[];
  /** of the cases known by now */
  result: SurveyResult | null;
  /** cases in all */
  of: number;
}

/** What of the state has changed. */
export type SurveyTopic = 'survey' | 'run' | 'result';

/**
 * The survey of the page: the store's scenario and what is varied in it; its run in workers, with finished cases kept, so
 * that one that was cancelled or changed goes on with what is known; or a result from elsewhere, which is shown.
 */
export class SurveyModel {
  readonly state: SurveyState;
  private worker: PageWorker<Request> | undefined;
  private readonly kept = new Map<string, string>();
  private readonly listeners = new Map<SurveyTopic, (() => void)[]>();
  private folder: Folder | undefined;

  constructor(readonly store: Store) {
    this.state = {
      vary: presets(store).ladder,
      combine: 'all',
      status: 'idle',
      stage: '',
      fraction: 0,
      secondsLeft: undefined,
      message: '',
      problems: [],
      result: null,
      of: 0,
    };
    this.check();
    store.on(['scenario'], () => {
      this.check();
      this.tell('survey');
    });
  }

  on(topics: readonly SurveyTopic[], listener: () => void): void {
    for (const topic of topics) this.listeners.set(topic, [...(this.listeners.get(topic) ?? []), listener]);
  }

  private tell(topic: SurveyTopic): void {
    for (const listener of this.listeners.get(topic) ?? []) listener();
  }

  private set(change: Partial<SurveyState>): void {
    Object.assign(this.state, change);
    this.tell('run');
  }

  /** The survey file. */
  get file(): { title?: string; scenario: unknown; vary: Vary; combine: 'all' | 'paired' } {
    const { vary, combine } = this.state;
    return { scenario: this.store.state.json, vary, combine };
  }

  edit(change: { vary?: Vary; combine?: 'all' | 'paired' }): void {
    Object.assign(this.state, change);
    this.check();
    this.tell('survey');
  }

  private check(): void {
    const loaded = loadSurvey(this.file, () => null);
    this.state.problems = 'problems' in loaded ? loaded.problems : [];
    this.state.of = 'survey' in loaded ? expandSurvey(loaded.survey).length : 0;
  }

  /** Takes a survey file: its scenario becomes the page's. @throws Error where it is none */
  open(json: unknown, scenarioNamed: (name: string) => unknown): void {
    const loaded = loadSurvey(json, scenarioNamed);
    if ('problems' in loaded) throw new Error(loaded.problems.map(({ message }) => message).join(' '));
    const { scenario, vary, combine } = loaded.survey;
    this.stop();
    this.state.vary = Object.fromEntries(vary.map(({ key, values }) => [key, values]));
    this.state.combine = combine;
    this.state.result = null;
    this.set({ status: 'idle', message: '' });
    this.store.setText(textOf(scenario));
    this.check();
    this.tell('survey');
    this.tell('result');
  }

  /** Shows a finished result as it is. @throws Error where it is none */
  show(json: unknown, from: string): void {
    const result = surveyResultSchema.safeParse(json);
    if (!result.success)
      throw new Error(`it is no survey-result.json of this version: ${result.error.issues[0]!.message}`);
    this.stop();
    this.take({ kind: 'soFar', result: result.data as unknown as SurveyResult, of: result.data.cases.length });
    this.set({ status: 'shown', message: from });
  }

  /** Follows the survey whose folder is served with the page, while it grows. */
  follow(): void {
    this.stop();
    this.set({ status: 'following', stage: 'no case yet', fraction: 0, message: '' });
    this.folder = new Folder(
      (survey, kept) => this.ask({ kind: 'collect', survey, kept }),
      (json) => this.show(json, 'the folder that is served'),
      (message) => this.set({ status: 'failed', message }),
    );
  }

  run(): void {
    if (this.state.problems.length > 0) return;
    this.stop();
    this.state.result = null;
    this.tell('result');
    this.set({ status: 'running', stage: 'starting the workers', fraction: 0, secondsLeft: undefined, message: '' });
    this.ask({ kind: 'run', survey: this.file, kept: [...this.kept] });
  }

  /** Ends what runs at once; finished cases are kept. */
  cancel(): void {
    this.stop();
    this.set({ status: 'cancelled', stage: '', message: '' });
  }

  private stop(): void {
    this.worker?.end();
    this.worker = undefined;
    this.folder?.end();
    this.folder = undefined;
  }

  private ask(request: Request): void {
    this.worker ??= startWorker<Request, Report>(
      './survey.js',
      (report) => this.take(report),
      (message) => this.take({ kind: 'failed', message }),
    );
    this.worker.ask(request);
  }

  private take(report: Report): void {
    switch (report.kind) {
      case 'progress': {
        const { stage, fraction, secondsLeft } = report;
        this.set({ stage, fraction, secondsLeft });
        break;
      }
      case 'kept':
        this.kept.set(report.hash, report.text);
        break;
      case 'soFar':
        this.state.result = report.result;
        this.state.of = report.of;
        if (this.state.status === 'following') {
          const done = report.result.cases.length;
          this.set({ stage: `${done} of ${report.of} cases`, fraction: report.of > 0 ? done / report.of : 0 });
        }
        this.tell('result');
        break;
      case 'done':
        this.stop();
        this.state.result = report.result;
        this.tell('result');
        this.set({ status: 'done', fraction: 1, secondsLeft: undefined });
        break;
      case 'refused':
        this.stop();
        this.set({ status: 'refused', message: report.problems.map(({ message }) => message).join('\n') });
        break;
      case 'failed':
        this.stop();
        this.set({ status: 'failed', message: report.message });
        break;
    }
  }

  /** The scenario of one case of the result, as its run had it. */
  scenarioOf(index: number): Record<string, unknown> | null {
    const { result } = this.state;
    const wanted = result?.cases[index];
    if (!result || !wanted) return null;
    const loaded = loadSurvey(result.survey, () => null);
    if ('problems' in loaded) return null;
    const settings = JSON.stringify(wanted.settings);
    const found = expandSurvey(loaded.survey).find((each) => JSON.stringify(each.settings) === settings);
    if (!found) return null;
    const grid = { ...(result.mask === null ? {} : { mask: result.mask }), ...(found.scenario.grid as object) };
    return { ...found.scenario, grid };
  }
}

/** Surveys to begin with, by what they are about. */
export function presets({ state }: Store): Readonly<Record<'ladder' | 'walls' | 'clearance', Vary>> {
  const { scenario } = state;
  const millimetres = (m: number) => `${Number((1000 * m).toPrecision(4))} mm`;
  const cell = scenario ? Math.max(...scenario.grid.cellSize) : 5e-3;
  const cells = [2, 1.5, 1].map((factor) => millimetres(factor * cell));
  return {
    ladder: { 'grid.cellSize': cells },
    walls: {
      'grid.boundary': BOUNDARIES.map((type) =>
        type === 'cpml' || type === 'splitPml' ? { type, layers: CPML_DEFAULTS.layers } : { type },
      ),
    },
    clearance: {
      'grid.boundary': [{ type: 'mur1' }, { type: 'cpml', layers: 8 }],
      'grid.clearance': [8, 12, 18].map((n) => millimetres(n * cell)),
    },
  };
}
