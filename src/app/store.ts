import type { Result } from '../compare/result.ts';
import type { Theme } from '../draw/colour.ts';
import type { ObserverTrace } from '../files/traces.ts';
import type { ObserverSpectra } from '../report/report.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import type { Problem } from '../scenario/reading.ts';
import { textOf } from '../scenario/text.ts';
import type { Film } from '../scene/film.ts';
import { VIEW, type View } from '../scene/scenery.ts';

/** How a run stands. */
export interface RunState {
  readonly status: 'idle' | 'running' | 'done' | 'cancelled' | 'refused' | 'failed';
  /** what is being done, while it runs */
  readonly stage: string;
  readonly fraction: number;
  readonly secondsLeft?: number | undefined;
  /** why it was refused or failed */
  readonly message: string;
}

export interface State {
  /** the scenario as text, as it is edited and saved */
  text: string;
  /** what JSON.parse makes of it; undefined where it is no JSON */
  json: unknown;
  /** the last sound scenario; null before there is any */
  scenario: Scenario | null;
  /** what stood in its file; undefined before there is any */
  sound: unknown;
  problems: readonly Problem[];
  view: View;
  theme: Theme;
  frame: number;
  playing: boolean;
  run: RunState;
  film: Film | null;
  result: Result | null;
  traces: readonly ObserverTrace[];
  spectra: readonly ObserverSpectra[];
}

/** What of the state has changed. */
export type Topic = 'scenario' | 'view' | 'frame' | 'run' | 'film' | 'result' | 'theme';

const HISTORY = 200;

/** The state of the page, and who is told of its changes. There is one. */
export class Store {
  readonly state: State;
  private readonly listeners = new Map<Topic, (() => void)[]>();
  private readonly past: string[] = [];
  private readonly future: string[] = [];
  private soundBefore: unknown;

  constructor(theme: Theme) {
    this.state = {
      text: '',
      json: undefined,
      scenario: null,
      sound: undefined,
      problems: [],
      view: VIEW,
      theme,
      frame: 0,
      playing: false,
      run: { status: 'idle', stage: '', fraction: 0, message: '' },
      film: null,
      result: null,
      traces: [],
      spectra: [],
    };
  }

  on(topics: readonly Topic[], listener: () => void): void {
    for (const topic of topics) this.listeners.set(topic, [...(this.listeners.get(topic) ?? []), listener]);
  }

  tell(topic: Topic): void {
    for (const listener of this.listeners.get(topic) ?? []) listener();
  }

  setView(change: Partial<View>): void {
    this.state.view = { ...this.state.view, ...change };
    this.tell('view');
  }

  setFrame(frame: number): void {
    const last = (this.state.film?.frames ?? 1) - 1;
    const within = Math.min(last, Math.max(0, Math.round(frame)));
    if (within === this.state.frame) return;
    this.state.frame = within;
    this.tell('frame');
  }

  setRun(change: Partial<RunState>): void {
    this.state.run = { ...this.state.run, ...change };
    this.tell('run');
  }

  /**
   * Another scenario, as text. An unsound one is kept with its problems; the run and the pictures stay those of the last
   * sound one.
   */
  setText(text: string, keepHistory = true): void {
    const { state } = this;
    if (text === state.text) return;
    if (keepHistory && state.text !== '') {
      this.past.push(state.text);
      if (this.past.length > HISTORY) this.past.shift();
      this.future.length = 0;
    }
    state.text = text;
    try {
      state.json = JSON.parse(text);
    } catch {
      state.json = undefined;
    }
    const loaded = loadScenario(state.json === undefined ? text : state.json);
    state.problems = 'problems' in loaded ? loaded.problems : [];
    if ('scenario' in loaded) {
      state.scenario = loaded.scenario;
      this.soundBefore = state.sound;
      state.sound = state.json;
      const names = loaded.scenario.observers.map(({ name }) => name);
      if (!names.includes(state.view.observer)) state.view = { ...state.view, observer: names[0] ?? '' };
    }
    this.tell('scenario');
  }

  /** What a run found wrong with the scenario, though it had seemed sound. */
  refuse(problems: readonly Problem[]): void {
    this.state.problems = problems;
    this.state.sound = this.soundBefore;
    this.tell('scenario');
  }

  /** Another scenario, as an edit of what JSON.parse made of the present one. */
  edit(change: (draft: Draft) => void): void {
    const draft = structuredClone(this.state.json ?? {}) as Draft;
    change(draft);
    this.setText(textOf(draft));
  }

  get canUndo(): boolean {
    return this.past.length > 0;
  }

  get canRedo(): boolean {
    return this.future.length > 0;
  }

  undo(): void {
    const text = this.past.pop();
    if (text === undefined) return;
    this.future.push(this.state.text);
    this.setText(text, false);
  }

  redo(): void {
    const text = this.future.pop();
    if (text === undefined) return;
    this.past.push(this.state.text);
    this.setText(text, false);
  }
}

/** A scenario file's content, of any shape. */
// biome-ignore lint/suspicious/noExplicitAny: what a user typed may hold anything; loadScenario judges it
export type Draft = any;
