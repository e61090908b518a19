import { settingWord } from '../../report/surveyWords.ts';
import { GRIDDINGS } from '../../scenario/model.ts';
import { BOUNDARIES } from '../../scenario/schema.ts';
import { h } from '../dom.ts';
import { asked } from '../halves.ts';
import { presets, type SurveyModel, type Vary } from './model.ts';

/** How long typing must pause before it counts. */
const SETTLE = 300;

/** An axis whose values are written in a line, with commas between. */
interface Written {
  readonly key: string;
  readonly name: string;
  readonly help: string;
  /** what stands there when it is switched on */
  readonly begin: (model: SurveyModel) => readonly unknown[];
}

const WRITTEN: readonly Written[] = [
  {
    key: 'grid.cellSize',
    name: 'Cell sizes',
    help: 'Lengths with units, coarse to fine. Three or more give an observed order and a grid convergence index; the finest takes longest.',
    begin: ({ store }) => presets(store).ladder['grid.cellSize']!,
  },
  {
    key: 'grid.clearance',
    name: 'Clearances',
    help: 'Distances from the box around the sources to each wall, with units; they set the box. Observers should lie inside the smallest.',
    begin: ({ store }) => presets(store).clearance['grid.clearance']!,
  },
  {
    key: 'grid.courant',
    name: 'Courant numbers',
    help: 'Time step over its stability limit, above 0 and at most 1.',
    begin: () => [0.99, 0.7, 0.5],
  },
];

const LAYERS: Readonly<Record<string, readonly number[]>> = { cpml: [6, 8, 10, 12], splitPml: [10] };

/** Walls that are offered beside those the survey has. */
const WALLS: readonly unknown[] = BOUNDARIES.flatMap(
  (type): unknown[] => LAYERS[type]?.map((layers) => ({ type, layers })) ?? [{ type }],
);

const PRESETS = {
  ladder: ['Ladder', 'Three cell sizes: how the error falls with the cells'],
  walls: ['Walls', 'Every kind of wall beside the same exact field'],
  clearance: ['Clearance', 'Two kinds of wall at three distances'],
} as const;

const same = (a: unknown, b: unknown): boolean => JSON.stringify(a) === JSON.stringify(b);

/** What is varied: axes to switch on, with their values; the last line says what is wrong. */
export class Axes {
  readonly element: HTMLElement;
  private readonly rows: (() => void)[] = [];

  constructor(private readonly model: SurveyModel) {
    const named = Object.entries(PRESETS).map(([key, [name, help]]) =>
      h(
        'button',
        {
          type: 'button',
          title: help,
          onclick: () => model.edit({ vary: presets(model.store)[key as keyof typeof PRESETS], combine: 'all' }),
        },
        name,
      ),
    );
    this.element = h(
      'div',
      { className: 'axes' },
      h(
        'div',
        { className: 'axis' },
        h('span', { className: 'muted' }, 'Begin with'),
        h('span', { className: 'group', role: 'group', 'aria-label': 'Begin with' }, ...named),
      ),
      this.written(WRITTEN[0]!),
      this.choices('grid.boundary', 'Walls', 'Boundary conditions, on all faces.', () => WALLS),
      ...WRITTEN.slice(1).map((axis) => this.written(axis)),
      this.choices(
        'grid.gridding',
        'Gridding',
        'How currents are put on edges; other solvers often use nearest or staircase.',
        () => GRIDDINGS,
      ),
      this.other(),
      this.combine(),
    );
    model.on(['survey'], () => this.show());
    this.show();
  }

  private show(): void {
    for (const row of this.rows) row();
  }

  private set(key: string, values: readonly unknown[] | undefined): void {
    const { [key]: _, ...others } = this.model.state.vary;
    // An axis keeps its place: the last one varies fastest.
    const vary: Vary =
      values === undefined
        ? others
        : key in this.model.state.vary
          ? { ...this.model.state.vary, [key]: values }
          : { ...others, [key]: values };
    this.model.edit({ vary });
  }

  private trouble(key: string): string {
    return this.model.state.problems
      .filter(({ path }) => path === `vary.${key}` || path.startsWith(`vary.${key}.`))
      .map(({ message }) => message)
      .join(' ');
  }

  /** A switch with a name, and below it what it switches on. */
  private axis(
    key: string,
    name: string,
    help: string,
    begin: () => readonly unknown[],
    body: HTMLElement,
  ): HTMLElement {
    const on = h('input', { type: 'checkbox' });
    on.addEventListener('change', () => this.set(key, on.checked ? begin() : undefined));
    const trouble = h('p', { className: 'trouble outside' });
    this.rows.push(() => {
      on.checked = key in this.model.state.vary;
      body.hidden = !on.checked;
      trouble.textContent = this.trouble(key);
    });
    return asked(h('label', {}, on, ` ${name}`), help, body, trouble);
  }

  private written({ key, name, help, begin }: Written): HTMLElement {
    const input = h('input', { type: 'text', spellcheck: false, 'aria-label': `${name}, with commas between` });
    let timer = 0;
    input.addEventListener('input', () => {
      clearTimeout(timer);
      timer = setTimeout(() => this.set(key, valuesOf(input.value)), SETTLE) as unknown as number;
    });
    this.rows.push(() => {
      const values = this.model.state.vary[key];
      if (values && !same(valuesOf(input.value), values)) input.value = values.map(lineWord).join(', ');
    });
    return this.axis(key, name, help, () => begin(this.model), input);
  }

  private choices(key: string, name: string, help: string, offered: () => readonly unknown[]): HTMLElement {
    const list = h('div', { className: 'choices' });
    this.rows.push(() => {
      const chosen = this.model.state.vary[key] ?? [];
      const all = [...offered(), ...chosen.filter((value) => !offered().some((each) => same(each, value)))];
      const focused = [...list.querySelectorAll('input')].indexOf(document.activeElement as HTMLInputElement);
      list.replaceChildren(
        ...all.map((value) => {
          const box = h('input', { type: 'checkbox', checked: chosen.some((each) => same(each, value)) });
          box.addEventListener('change', () => {
            const others = chosen.filter((each) => !same(each, value));
            const next = box.checked ? [...chosen, value] : others;
            this.set(
              key,
              all.filter((each) => next.some((one) => same(one, each))),
            );
          });
          return h('label', {}, box, ` ${settingWord(value)}`);
        }),
      );
      if (focused >= 0) list.querySelectorAll('input')[focused]?.focus();
    });
    return this.axis(key, name, help, () => offered().slice(0, 3), list);
  }

  /** Any other key, with its values as JSON. */
  private other(): HTMLElement {
    const known = new Set([...WRITTEN.map(({ key }) => key), 'grid.boundary', 'grid.gridding']);
    const list = h('div', { className: 'others' });
    const key = h('input', { type: 'text', placeholder: 'duration', 'aria-label': 'Key of the scenario, as a path' });
    const add = h('button', { type: 'button' }, 'Add');
    const help =
      'Any key of the scenario as a path, such as duration or sources.0.at, with its values as JSON: ["3 ns", "4 ns"].';
    add.addEventListener('click', () => {
      if (key.value.trim() !== '') this.set(key.value.trim(), []);
      key.value = '';
    });
    this.rows.push(() => {
      const others = Object.keys(this.model.state.vary).filter((each) => !known.has(each));
      if (list.contains(document.activeElement)) return;
      list.replaceChildren(
        ...others.map((each) => {
          const input = h('input', {
            type: 'text',
            spellcheck: false,
            value: JSON.stringify(this.model.state.vary[each]),
            'aria-label': `Values of ${each}, a JSON list`,
          });
          input.addEventListener('change', () => {
            let values: unknown;
            try {
              values = JSON.parse(input.value);
            } catch {
              values = input.value;
            }
            this.set(each, values as readonly unknown[]);
          });
          const out = h(
            'button',
            { type: 'button', 'aria-label': `Do not vary ${each}`, onclick: () => this.set(each, undefined) },
            '✕',
          );
          return h('div', { className: 'other' }, h('span', {}, each), input, out);
        }),
      );
    });
    const trouble = h('p', { className: 'trouble outside' });
    this.rows.push(() => {
      const others = Object.keys(this.model.state.vary).filter((each) => !known.has(each));
      trouble.textContent = others.map((each) => this.trouble(each)).join(' ');
    });
    return h(
      'fieldset',
      { className: 'axis', title: help },
      h('legend', {}, 'Any other key'),
      list,
      h('div', { className: 'other' }, key, add),
      trouble,
    );
  }

  private combine(): HTMLElement {
    const select = h(
      'select',
      { title: 'all: every value with every other; paired: first with first, second with second' },
      h('option', { value: 'all' }, 'every value with every other'),
      h('option', { value: 'paired' }, 'first with first, and so on'),
    );
    select.addEventListener('change', () => this.model.edit({ combine: select.value as 'all' | 'paired' }));
    this.rows.push(() => {
      select.value = this.model.state.combine;
    });
    return h('label', { className: 'axis combine' }, h('span', { className: 'muted' }, 'Combine'), select);
  }
}

/** "10 mm, 5 mm": numbers as numbers, JSON in brackets as JSON, all else as text. */
function valuesOf(line: string): unknown[] {
  const parts = line.match(/(?:\[[^\]]*\]|[^,])+/g) ?? [];
  return parts
    .map((part) => part.trim())
    .filter((part) => part !== '')
    .map((part) => {
      if (part.startsWith('['))
        try {
          return JSON.parse(part);
        } catch {
          return part;
        }
      return Number.isFinite(Number(part)) ? Number(part) : part;
    });
}

const lineWord = (value: unknown): string => (typeof value === 'object' ? JSON.stringify(value) : String(value));
