import { formatQuantity } from '../elementary/quantity.ts';
import { byId, h } from './dom.ts';
import { firstEcho } from './echo.ts';
import type { Store } from './store.ts';
import { instantText } from './verdict.ts';

/** Instants a second. */
export const SPEEDS = [5, 10, 20, 40, 80] as const;

/** Play, pause, step, speed, scrub; and where the first echo of a wall can reach the selected observer. */
export class Timeline {
  private readonly play = h('button', { type: 'button', title: 'Play or pause (space)' });
  private readonly slider = h('input', {
    type: 'range',
    min: '0',
    step: '1',
    value: '0',
    'aria-label': 'Instant shown',
  });
  private readonly mark = h('div', { className: 'mark', hidden: true }, h('span'));
  private readonly text = h('output', { 'aria-live': 'off' });
  private last = 0;

  constructor(private readonly store: Store) {
    const step = (by: number) => () => this.stepBy(by);
    const back = h(
      'button',
      { type: 'button', title: 'One picture back (left arrow)', 'aria-label': 'One picture back', onclick: step(-1) },
      '‹',
    );
    const on = h(
      'button',
      { type: 'button', title: 'One picture on (right arrow)', 'aria-label': 'One picture on', onclick: step(1) },
      '›',
    );
    const speed = h('select', { 'aria-label': 'Speed, pictures a second', title: 'Speed: pictures a second' });
    for (const each of SPEEDS)
      speed.append(h('option', { value: String(each), selected: each === store.state.view.speed }, `${each} /s`));
    speed.addEventListener('change', () => store.setView({ speed: Number(speed.value) }));
    this.play.addEventListener('click', () => this.toggle());
    this.slider.addEventListener('input', () => {
      const frame = Number(this.slider.value);
      this.pause();
      store.setFrame(frame);
    });
    const observer = observerSelect(store);
    byId('timeline').append(
      h('span', { className: 'group' }, back, this.play, on),
      h('div', { className: 'track' }, this.slider, this.mark),
      this.text,
      speed,
      h('label', {}, 'Observer', observer),
    );
    store.on(['view'], () => {
      speed.value = String(store.state.view.speed);
    });
    store.on(['frame', 'film'], () => this.show());
    store.on(['scenario', 'view', 'film'], () => this.showEcho());
    this.show();
  }

  toggle(): void {
    const { state } = this.store;
    state.playing = !state.playing;
    if (state.playing && state.frame >= (state.film?.frames ?? 1) - 1) this.store.setFrame(0);
    this.show();
  }

  pause(): void {
    this.store.state.playing = false;
    this.show();
  }

  stepBy(by: number): void {
    this.pause();
    this.store.setFrame(this.store.state.frame + by);
  }

  /** Called once a screen refresh: moves on when it is time. At the end it begins again; it waits for the grid. */
  tick(now: number): void {
    const { film, playing, view, frame } = this.store.state;
    if (!playing || !film || now - this.last < 1000 / view.speed) return;
    this.last = now;
    const known = film.gridFrames;
    if (frame + 1 < known) this.store.setFrame(frame + 1);
    else if (known === film.frames) this.store.setFrame(0);
  }

  private show(): void {
    const { film, frame, playing, scenario } = this.store.state;
    this.play.textContent = playing ? 'Pause' : 'Play';
    this.slider.max = String((film?.frames ?? 1) - 1);
    this.slider.value = String(frame);
    if (!film || !scenario) return;
    const time = film.instants.E[frame]!;
    const step = Math.round(time / ((film.instants.H[0]! - film.instants.E[0]!) * 2));
    this.text.textContent = instantText(time, step);
    this.slider.setAttribute('aria-valuetext', this.text.textContent);
  }

  private showEcho(): void {
    const { film, scenario, view } = this.store.state;
    const observer = scenario?.observers.find(({ name }) => name === view.observer);
    this.mark.hidden = true;
    if (!film || !scenario || !observer?.inside) return;
    const { time, face } = firstEcho(scenario, observer.at);
    const [from, to] = [film.instants.E[0]!, film.instants.E[film.frames - 1]!];
    if (!(time >= from && time <= to)) return;
    const share = (time - from) / (to - from);
    this.mark.hidden = false;
    // the thumb's middle runs from 8 px inside one end to 8 px inside the other
    this.mark.style.left = `calc(8px + ${share} * (100% - 16px))`;
    this.mark.classList.toggle('late', share > 0.6);
    this.mark.title = `From ${formatQuantity(time, 's')} on, the ${face} wall’s echo of the pulse can reach ${observer.name}.`;
    this.mark.firstElementChild!.textContent = `first wall echo at ${observer.name}, ${formatQuantity(time, 's')}`;
  }
}

/** Chooses whose traces, spectra and first echo are shown. */
function observerSelect(store: Store): HTMLSelectElement {
  const select = h('select', {
    title: 'Whose traces and spectra the charts show, and whose first wall echo is marked',
  });
  select.addEventListener('change', () => store.setView({ observer: select.value }));
  const show = () => {
    const names = store.state.scenario?.observers.map(({ name }) => name) ?? [];
    if (names.join('\n') !== [...select.options].map(({ value }) => value).join('\n'))
      select.replaceChildren(...names.map((name) => h('option', { value: name }, name)));
    select.disabled = names.length === 0;
    select.value = store.state.view.observer;
  };
  store.on(['view', 'scenario'], show);
  show();
  return select;
}
