import { printable } from '../scenario/text.ts';
import { byId, h } from './dom.ts';

/** Says something in the corner until it is dismissed; a mere note goes by itself after a while. */
export function notify(
  text: string,
  kind: 'note' | 'kept' | 'bad' = 'note',
  action?: { readonly name: string; readonly run: () => void },
): void {
  const shown = text.split('\n').map(printable).join('\n');
  const close = h('button', { type: 'button', 'aria-label': 'Dismiss' }, '×');
  const notice = h(
    'div',
    { className: `notice ${kind}`, role: kind === 'bad' ? 'alert' : 'status' },
    h('p', {}, shown),
  );
  if (action) {
    const button = h('button', { type: 'button' }, action.name);
    button.addEventListener('click', () => {
      action.run();
      notice.remove();
    });
    notice.append(button);
  }
  close.addEventListener('click', () => notice.remove());
  notice.append(close);
  byId('notices').append(notice);
  if (kind === 'note') setTimeout(() => notice.remove(), 12_000);
}
