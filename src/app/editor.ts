import { parse } from '@humanwhocodes/momoa';
import type { Problem } from '../scenario/reading.ts';
import { h } from './dom.ts';
import type { Store } from './store.ts';

/** How long typing must pause before the text is judged. */
const SETTLE = 350;

/** Height of a line, CSS pixels: page.css has the same. */
const LINE = 18;

/** The line, from 1, of a place in a JSON text; of its nearest enclosing thing where the place itself is missing. */
export function lineOf(text: string, path: string): number {
  let node: Node;
  try {
    node = parse(text, { mode: 'json' }).body as Node;
  } catch (error) {
    return (error as { line?: number }).line ?? 1;
  }
  let line = path === '' ? 1 : node.loc.start.line;
  for (const key of path.split('.')) {
    const next =
      node.type === 'Object'
        ? node.members?.find(({ name }) => (name.value ?? name.name) === key)
        : node.type === 'Array'
          ? node.elements?.[Number(key)]
          : undefined;
    if (!next) break;
    line = next.loc.start.line;
    node = next.value as Node;
  }
  return line;
}

interface Node {
  readonly type: string;
  readonly loc: { readonly start: { readonly line: number } };
  readonly members?: readonly Member[];
  readonly elements?: readonly Member[];
}

interface Member {
  readonly loc: Node['loc'];
  readonly name: { readonly value?: string; readonly name?: string };
  readonly value: unknown;
}

/** The scenario as text, with the validator's messages at their lines. */
export class Editor {
  readonly element: HTMLElement;
  readonly area = h('textarea', {
    spellcheck: false,
    wrap: 'off',
    'aria-label': 'Scenario as text (JSON)',
    autocomplete: 'off',
  });
  private readonly gutter = h('div', { className: 'gutter', 'aria-hidden': 'true' });
  private readonly list = h('ul', {
    className: 'problems',
    'aria-live': 'polite',
    'aria-label': 'What is wrong with the text',
  });
  private timer = 0;

  constructor(private readonly store: Store) {
    this.element = h(
      'div',
      { className: 'editor' },
      h('div', { className: 'lines' }, this.gutter, this.area),
      this.list,
    );
    this.area.addEventListener('input', () => {
      this.number([]);
      clearTimeout(this.timer);
      this.timer = setTimeout(() => store.setText(this.area.value), SETTLE) as unknown as number;
    });
    store.on(['scenario'], () => this.show());
  }

  private show(): void {
    const { text, problems } = this.store.state;
    if (this.area.value !== text) {
      this.area.value = text;
      this.area.setSelectionRange(0, 0);
    }
    const placed = problems.map((problem) => ({ problem, line: this.line(problem) }));
    this.number(placed.map(({ line }) => line));
    this.list.replaceChildren(
      ...placed.map(({ problem, line }) => {
        const button = h('button', { type: 'button' }, h('b', {}, `Line ${line}: `), problem.message);
        button.addEventListener('click', () => this.goTo(line));
        return h('li', {}, button);
      }),
    );
  }

  private line({ path, message }: Problem): number {
    const syntax = /line (\d+), column/.exec(message);
    return path === '' && syntax ? Number(syntax[1]) : lineOf(this.store.state.text, path);
  }

  /** Numbers the lines; those with a problem stand out. */
  private number(bad: readonly number[]): void {
    const count = this.area.value.split('\n').length;
    this.area.style.height = `${count * LINE + 14}px`;
    this.gutter.replaceChildren();
    for (let line = 1; line <= count; line++)
      this.gutter.append(bad.includes(line) ? h('b', {}, `▸${line}\n`) : `${line}\n`);
  }

  private goTo(line: number): void {
    const lines = this.area.value.split('\n');
    const from = lines.slice(0, line - 1).reduce((sum, each) => sum + each.length + 1, 0);
    this.area.focus();
    this.area.setSelectionRange(from, from + (lines[line - 1]?.length ?? 0));
    this.area.parentElement!.scrollTop = (line - 4) * LINE;
  }
}
