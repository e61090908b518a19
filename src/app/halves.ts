import { h } from './dom.ts';

/**
 * A place in two halves: what is asked on the left, with one line of explanation below it of what is pointed at or has the
 * focus (its `title`), what is found on the right.
 */
export function halves(
  asked: { readonly name: string; readonly element: HTMLElement },
  found: { readonly name: string; readonly elements: readonly HTMLElement[] },
): HTMLElement {
  const help = h(
    'p',
    { className: 'help', 'aria-live': 'polite' },
    'Point at a control, or go to it by keyboard, to read what it does.',
  );
  const left = h(
    'section',
    { className: 'asked', 'aria-label': asked.name },
    h('div', { className: 'controls' }, asked.element),
    help,
  );
  const explain = ({ target }: Event) => {
    const title = (target as Element).closest<HTMLElement>('[title]')?.title;
    if (title && left.contains(target as Node)) help.textContent = title;
  };
  left.addEventListener('pointerover', explain);
  left.addEventListener('focusin', explain);
  return h(
    'div',
    { className: 'halves' },
    left,
    h('section', { className: 'found', 'aria-label': found.name, tabindex: '0' }, ...found.elements),
  );
}
