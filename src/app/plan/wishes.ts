import { boundaryText } from '../../compare/boundaryWords.ts';
import { formatPercent, formatQuantity } from '../../elementary/quantity.ts';
import { WALLS } from '../../run/planSearch.ts';
import { sourceBounds } from '../../scenario/distance.ts';
import { parseFraction, parseQuantity } from '../../scenario/units.ts';
import { h } from '../dom.ts';
import { asked } from '../halves.ts';
import type { Store } from '../store.ts';
import type { Wanted } from './messages.ts';

export type Wish = Omit<Wanted, 'scenario'>;

/** Ends of the sliders: tolerances as fractions. */
const TOLERANCES = [1e-3, 0.2] as const;
const STEPS = 200;

/** Two digits on a logarithmic slider. */
const onSlider = (value: number, [from, to]: readonly [number, number]): number =>
  Math.round((STEPS * Math.log(value / from)) / Math.log(to / from));
const offSlider = (at: number, [from, to]: readonly [number, number]): number =>
  Number((from * (to / from) ** (at / STEPS)).toPrecision(2));

/** What a plan is to meet: sliders and choices. */
export class Wishes {
  readonly element: HTMLElement;
  wish: Wish;
  private readonly listeners: (() => void)[] = [];
  private readonly shows: (() => void)[] = [];
  /** whether the tolerance is the scenario's still */
  private own = true;

  constructor(private readonly store: Store) {
    this.wish = { tolerance: store.state.scenario?.tolerance ?? 0.05, walls: WALLS };
    this.element = h(
      'div',
      { className: 'axes' },
      this.tolerance(),
      this.where(),
      this.signal(),
      this.walls(),
      this.ownSolver(),
    );
    store.on(['scenario'], () => this.follow());
    this.follow();
    this.show();
  }

  onChange(listener: () => void): void {
    this.listeners.push(listener);
  }

  private set(change: Partial<Wish>): void {
    this.wish = { ...this.wish, ...change };
    this.show();
    for (const listener of this.listeners) listener();
  }

  private show(): void {
    for (const show of this.shows) show();
  }

  /** Another scenario: its tolerance unless one was chosen, and an observer only where it has it. */
  private follow(): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const { tolerance, at } = this.wish;
    this.wish = {
      ...this.wish,
      tolerance: this.own ? scenario.tolerance : tolerance,
      at: scenario.observers.some(({ name }) => name === at) ? at : undefined,
    };
    this.show();
  }

  fields(): ReadonlyMap<string, string> {
    const { tolerance, at, distance, band, walls, ownRate } = this.wish;
    const given: (readonly [string, string | undefined])[] = [
      ['tolerance', this.own ? undefined : String(tolerance)],
      ['observer', at],
      ['distance', distance?.toString()],
      ['band', band?.toString()],
      ['walls', walls.length === WALLS.length ? undefined : walls.map((wall) => WALLS.indexOf(wall)).join('.')],
      ['rate', ownRate?.toString()],
    ];
    return new Map(given.flatMap(([key, value]) => (value === undefined ? [] : [[key, value] as const])));
  }

  open(fields: ReadonlyMap<string, string>): void {
    const number = (key: string) => {
      const value = Number(fields.get(key));
      return Number.isFinite(value) && value > 0 ? value : undefined;
    };
    const walls = (fields.get('walls') ?? '').split('.').flatMap((n) => WALLS[Number(n)] ?? []);
    const tolerance = number('tolerance');
    if (tolerance !== undefined) this.own = false;
    this.set({
      tolerance: Math.min(1, tolerance ?? this.store.state.scenario?.tolerance ?? this.wish.tolerance),
      at: fields.get('observer'),
      distance: number('distance'),
      band: number('band'),
      walls: fields.has('walls') && walls.length > 0 ? walls : WALLS,
      ownRate: number('rate'),
    });
  }

  private tolerance(): HTMLElement {
    const range = h('input', { type: 'range', min: '0', max: String(STEPS), step: '1', 'aria-label': 'Tolerance' });
    const text = h('input', { type: 'text', spellcheck: false, 'aria-label': 'Tolerance, a percentage or a fraction' });
    const choose = (tolerance: number) => {
      this.own = false;
      this.set({ tolerance });
    };
    range.addEventListener('input', () => choose(offSlider(Number(range.value), TOLERANCES)));
    text.addEventListener('change', () => {
      const parsed = parseFraction(numberOrText(text.value));
      if ('value' in parsed && parsed.value > 0 && parsed.value <= 1) choose(parsed.value);
      else this.show();
    });
    this.shows.push(() => {
      const { tolerance } = this.wish;
      range.value = String(onSlider(tolerance, TOLERANCES));
      range.setAttribute('aria-valuetext', formatPercent(tolerance, 3));
      text.value = formatPercent(tolerance, 3);
    });
    return asked(
      'Tolerance',
      'The largest relative error of E that is allowed, predicted with what predictions may be off.',
      h('div', { className: 'slide' }, range, text),
    );
  }

  private where(): HTMLElement {
    const DISTANCE = '\u0000distance';
    const select = h('select', { 'aria-label': 'Where it must hold' });
    const range = h('input', { type: 'range', min: '0', max: String(STEPS), step: '1', 'aria-label': 'Distance' });
    const text = h('input', { type: 'text', spellcheck: false, 'aria-label': 'Distance, with its unit' });
    const row = h('div', { className: 'slide' }, range, text);
    const ends = (): readonly [number, number] => {
      const size = sourceSize(this.store);
      return [size / 4, size * 8];
    };
    select.addEventListener('change', () => {
      const { value } = select;
      if (value === DISTANCE) this.set({ at: undefined, distance: Number(sourceSize(this.store).toPrecision(2)) });
      else this.set({ at: value === '' ? undefined : value, distance: undefined });
    });
    range.addEventListener('input', () => this.set({ distance: offSlider(Number(range.value), ends()) }));
    text.addEventListener('change', () => {
      const parsed = parseQuantity(numberOrText(text.value), 'length');
      if ('value' in parsed && parsed.value > 0) this.set({ distance: parsed.value });
      else this.show();
    });
    this.shows.push(() => {
      const names = this.store.state.scenario?.observers.map(({ name }) => name) ?? [];
      select.replaceChildren(
        h('option', { value: '' }, names.length === 0 ? 'at observers (there are none)' : 'at every observer'),
        ...names.map((name) => h('option', { value: name }, `at ${name}`)),
        h('option', { value: DISTANCE }, 'at a distance, all round'),
      );
      const { at, distance } = this.wish;
      select.value = distance === undefined ? (at ?? '') : DISTANCE;
      row.hidden = distance === undefined;
      if (distance === undefined) return;
      range.value = String(onSlider(distance, ends()));
      range.setAttribute('aria-valuetext', formatQuantity(distance, 'm'));
      text.value = formatQuantity(distance, 'm');
    });
    return asked(
      'Where',
      'At the observers, or at a distance from the sources in every direction that radiates.',
      select,
      row,
    );
  }

  private signal(): HTMLElement {
    const select = h(
      'select',
      { 'aria-label': 'Of what the error is' },
      h('option', { value: 'whole' }, 'of the whole signal'),
      h('option', { value: 'band' }, 'in every band up to'),
    );
    const text = h('input', { type: 'text', spellcheck: false, 'aria-label': 'Highest frequency, with its unit' });
    select.addEventListener('change', () => this.set({ band: select.value === 'band' ? 1e9 : undefined }));
    text.addEventListener('change', () => {
      const parsed = parseQuantity(numberOrText(text.value), 'frequency');
      if ('value' in parsed && parsed.value > 0) this.set({ band: parsed.value });
      else this.show();
    });
    this.shows.push(() => {
      const { band } = this.wish;
      select.value = band === undefined ? 'whole' : 'band';
      text.hidden = band === undefined;
      if (band !== undefined) text.value = formatQuantity(band, 'Hz');
    });
    return asked(
      'Signal',
      'The error over the whole window, or in every sixth-octave band up to a frequency.',
      select,
      text,
    );
  }

  private walls(): HTMLElement {
    const boxes = WALLS.map((wall) => {
      const box = h('input', { type: 'checkbox' });
      box.addEventListener('change', () => {
        const walls = WALLS.filter((each) => (each === wall ? box.checked : this.wish.walls.includes(each)));
        // One at least.
        if (walls.length > 0) this.set({ walls });
        else this.show();
      });
      this.shows.push(() => {
        box.checked = this.wish.walls.includes(wall);
      });
      return h('label', {}, box, ` ${boundaryText(wall)}`);
    });
    return asked(
      'Walls',
      'Boundary conditions that may be chosen: those whose reflections are predicted.',
      h('div', { className: 'choices' }, ...boxes),
    );
  }

  private ownSolver(): HTMLElement {
    const text = h('input', {
      type: 'text',
      spellcheck: false,
      placeholder: '3e8',
      'aria-label': 'Cell updates a second of your own solver',
    });
    text.addEventListener('change', () => {
      const value = Number(text.value);
      this.set({ ownRate: text.value.trim() !== '' && value > 0 && Number.isFinite(value) ? value : undefined });
    });
    this.shows.push(() => {
      const { ownRate } = this.wish;
      if (document.activeElement !== text) text.value = ownRate === undefined ? '' : String(ownRate);
    });
    return asked(
      'Your own solver, cells/s',
      'Cell updates a second of your own solver, such as 3e8: tells how long it will take there.',
      text,
    );
  }
}

const numberOrText = (text: string): number | string =>
  text.trim() !== '' && Number.isFinite(Number(text)) ? Number(text) : text;

/** The longest side of the box around the sources, at least a few cells, m. */
function sourceSize({ state }: Store): number {
  const { scenario } = state;
  if (!scenario) return 0.1;
  const bounds = scenario.sources.map(sourceBounds);
  const sides = [0, 1, 2].map(
    (a) => Math.max(...bounds.map(({ to }) => to[a]!)) - Math.min(...bounds.map(({ from }) => from[a]!)),
  );
  return Math.max(...sides, 10 * Math.max(...scenario.grid.cellSize));
}
