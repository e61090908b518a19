import { byId, h } from './dom.ts';
import { Editor } from './editor.ts';
import { Panels } from './panels.ts';
import type { Store } from './store.ts';

export type SideView = 'panels' | 'text';

/** The docked side: panels, or the scenario as text; one line of explanation below. */
export class Side {
  readonly editor: Editor;
  private readonly panels: Panels;
  private readonly buttons: Readonly<Record<SideView, HTMLButtonElement>>;
  private readonly trouble = h('p', { className: 'help trouble', hidden: true });
  private shown: SideView = 'panels';

  constructor(store: Store) {
    const help = h(
      'p',
      { className: 'help', id: 'help', 'aria-live': 'polite' },
      'Point at a control, or go to it by keyboard, to read what it does.',
    );
    this.panels = new Panels(store, help);
    this.editor = new Editor(store);
    const button = (view: SideView, name: string, title: string) => {
      const element = h('button', { type: 'button', title }, name);
      element.addEventListener('click', () => this.show(view));
      return element;
    };
    this.buttons = {
      panels: button('panels', 'Panels', 'Edit the scenario by controls'),
      text: button('text', 'Text', 'Edit the scenario as text (e)'),
    };
    byId('side').append(
      h(
        'div',
        { className: 'tabs' },
        h(
          'span',
          { className: 'group', role: 'group', 'aria-label': 'How the scenario is edited' },
          this.buttons.panels,
          this.buttons.text,
        ),
      ),
      this.panels.element,
      this.editor.element,
      this.trouble,
      help,
    );
    store.on(['scenario'], () => {
      const [problem] = this.panels.unplaced;
      this.trouble.hidden = !problem || this.shown === 'text';
      this.trouble.textContent = problem ? `Not run: ${problem.message}` : '';
    });
    this.show('panels');
  }

  show(view: SideView): void {
    this.shown = view;
    this.panels.element.hidden = view !== 'panels';
    this.editor.element.hidden = view !== 'text';
    for (const [name, button] of Object.entries(this.buttons))
      button.setAttribute('aria-pressed', String(name === view));
    if (view === 'text') {
      this.trouble.hidden = true;
      this.editor.area.focus();
    }
  }

  toggle(): void {
    this.show(this.shown === 'text' ? 'panels' : 'text');
  }
}
