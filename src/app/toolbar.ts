import { QUANTITIES, type QuantityKey } from '../scene/quantity.ts';
import type { View } from '../scene/scenery.ts';
import { byId, h } from './dom.ts';
import type { Panes, ViewName } from './panes.ts';
import type { Store } from './store.ts';

const LAYOUTS = {
  panes: ['Fields', 'Grid field, exact field and their difference, side by side'],
  overlay: ['Overlay', 'Both fields in one pane, with a divider to drag and contour lines of the exact field'],
  trust: [
    'Trust map',
    'The error at every point of the planes, against the tolerance, and which part of it is the largest',
  ],
} as const satisfies Record<View['layout'], readonly [string, string]>;

/** Windows whose head has no room for the layouts beside the places: they stand in the row above the panes then. */
const NARROW = '(max-width: 1180px)';

/** The row above the panes: what is shown, from where, and how it is coloured. */
export function buildToolbar(store: Store, panes: Panes): void {
  const layouts = Object.entries(LAYOUTS).map(([layout, [name, help]]) =>
    h(
      'button',
      { type: 'button', title: help, onclick: () => store.setView({ layout: layout as View['layout'] }) },
      name,
    ),
  );
  const views = byId('views');
  views.append(...layouts);
  const narrow = matchMedia(NARROW);
  const settle = () => (narrow.matches ? byId('toolbar').prepend(views) : byId('places').after(views));
  narrow.addEventListener('change', settle);

  const quantity = h('select', {
    title:
      'What the panes show. Magnitudes and S average neighbouring components to one point, alike on both sides; φ and A exist on the exact side alone.',
  });
  const groups = {
    component: 'Components, as they are',
    average: 'Averaged to one point',
    potential: 'Potentials (exact side)',
  };
  for (const [kind, label] of Object.entries(groups))
    quantity.append(
      h(
        'optgroup',
        { label },
        ...QUANTITIES.filter((q) => q.kind === kind).map((q) =>
          h('option', { value: q.key }, `${q.label} (${q.unit})`),
        ),
      ),
    );
  quantity.addEventListener('change', () => store.setView({ quantity: quantity.value as QuantityKey }));

  const difference = h(
    'select',
    { title: 'The difference signed, on a scale of its own, or its size in decibels of the field’s scale' },
    h('option', { value: 'signed' }, 'signed'),
    h('option', { value: 'decibels' }, 'in dB'),
  );
  difference.addEventListener('change', () => store.setView({ difference: difference.value as View['difference'] }));

  const gain = h('select', { title: 'The scale’s end divided by this: weak fields become visible' });
  for (const value of [0.5, 1, 2, 5, 10, 30, 100]) gain.append(h('option', { value: String(value) }, `× ${value}`));
  gain.addEventListener('change', () => store.setView({ gain: Number(gain.value) }));

  const contours = h('input', { type: 'checkbox' });
  contours.addEventListener('change', () => store.setView({ contours: contours.checked }));

  const looks = (['corner', 'x', 'y', 'z'] as const satisfies readonly ViewName[]).map((name) =>
    h(
      'button',
      {
        type: 'button',
        title: name === 'corner' ? 'Look from a corner (0)' : `Look along ${name}`,
        onclick: () => panes.look(name),
      },
      name === 'corner' ? 'Corner' : name,
    ),
  );
  const projection = h('button', { type: 'button', title: 'Perspective, or parallel projection (o)' }, 'Parallel');
  projection.addEventListener('click', () =>
    store.setView({ projection: store.state.view.projection === 'perspective' ? 'orthographic' : 'perspective' }),
  );

  const labelled = (text: string, control: HTMLElement) => h('label', {}, text, control);
  byId('toolbar').append(
    labelled('Show', quantity),
    labelled('Difference', difference),
    labelled('Colours', gain),
    labelled('Contours', contours),
    h('span', { className: 'group', role: 'group', 'aria-label': 'Look from' }, ...looks),
    projection,
  );
  settle();

  const show = () => {
    const { view } = store.state;
    for (const [n, layout] of Object.keys(LAYOUTS).entries())
      layouts[n]!.setAttribute('aria-pressed', String(layout === view.layout));
    quantity.value = view.quantity;
    difference.value = view.difference;
    gain.value = String(view.gain);
    contours.checked = view.contours;
    projection.setAttribute('aria-pressed', String(view.projection === 'orthographic'));
  };
  store.on(['view'], show);
  show();
}
