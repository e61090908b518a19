import { h } from './dom.ts';

/** A table with a caption, which scrolls where it is wider than its place. */
export function table(
  caption: string,
  head: readonly string[],
  rows: readonly (readonly (HTMLElement | string)[])[],
): HTMLElement {
  return h(
    'div',
    { className: 'scroll', tabindex: '0', role: 'region', 'aria-label': caption },
    h(
      'table',
      {},
      h('caption', {}, caption),
      h('thead', {}, h('tr', {}, ...head.map((cell) => (cell === '' ? h('td') : h('th', { scope: 'col' }, cell))))),
      h('tbody', {}, ...rows.map((row) => h('tr', {}, ...row.map((cell) => h('td', {}, cell))))),
    ),
  );
}
