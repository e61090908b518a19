import { formatQuantity } from '../elementary/quantity.ts';
import type { Vec3 } from '../scenario/model.ts';
import { h } from './dom.ts';
import { nextName } from './panels.ts';
import type { Store } from './store.ts';

let open: HTMLElement | undefined;

/** Asks for the name of an observer where a pane was clicked, and adds it. */
export function nameObserver(store: Store, place: Vec3, x: number, y: number): void {
  open?.remove();
  const name = h('input', {
    type: 'text',
    value: nextName(store.state.json),
    'aria-label': 'Name of the new observer',
    maxLength: 100,
  });
  const add = h('button', { type: 'submit', className: 'primary' }, 'Add observer');
  const cancel = h('button', { type: 'button' }, 'Cancel');
  const form = h('form', { className: 'popover' }, name, add, cancel);
  form.title = `At ${place.map((value) => formatQuantity(value, 'm')).join(', ')}`;
  const close = () => {
    form.remove();
    open = undefined;
  };
  form.addEventListener('submit', (event) => {
    event.preventDefault();
    const given = name.value.trim() || nextName(store.state.json);
    close();
    store.setView({ observer: given });
    store.edit((draft) => {
      const at = place.map((value) => `${Number((value * 1000).toPrecision(4))} mm`);
      draft.observers = [...(Array.isArray(draft.observers) ? draft.observers : []), { name: given, at }];
    });
    store.setView({ observer: given });
  });
  cancel.addEventListener('click', close);
  form.addEventListener('keydown', (event) => {
    if (event.key === 'Escape') close();
    event.stopPropagation();
  });
  document.body.append(form);
  open = form;
  form.style.left = `${Math.max(8, Math.min(x + 8, innerWidth - form.offsetWidth - 8))}px`;
  form.style.top = `${Math.max(8, Math.min(y + 8, innerHeight - form.offsetHeight - 8))}px`;
  name.focus();
  name.select();
}
