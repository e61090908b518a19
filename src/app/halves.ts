import { h } from './dom.ts';

/** One thing that is asked on the left: its name, what helps to answer it, and the controls. */
export function asked(name: HTMLElement | string, help: string, ...controls: (HTMLElement | null)[]): HTMLElement {
  return h('fieldset', { className: 'axis', title: help }, h('legend', {}, name), ...controls);
}

/**
 * A place in two halves: what is asked on the left, with one line of explanation below it of what is pointed at or has the
 * focus (its `title`), what is found on the right.
 */
export function halves(
  left: { readonly name: string; readonly element: HTMLElement },
  right: { readonly name: string; readonly elements: readonly HTMLElement[] },
): HTMLElement {
  const help = h(
    'p',
    { className: 'help', 'aria-live': 'polite' },
    'Point at a control, or go to it by keyboard, to read what it does.',
  );
  const asking = h(
    'section',
    { className: 'asked', 'aria-label': left.name },
    h('div', { className: 'controls' }, left.element),
    help,
  );
  const explain = ({ target }: Event) => {
    const title = (target as Element).closest<HTMLElement>('[title]')?.title;
    if (title && asking.contains(target as Node)) help.textContent = title;
  };
  asking.addEventListener('pointerover', explain);
  asking.addEventListener('focusin', explain);
  return h(
    'div',
    { className: 'halves' },
    asking,
    h('section', { className: 'found', 'aria-label': right.name, tabindex: '0' }, ...right.elements),
  );
}
