import { byId, h } from './dom.ts';
import { notify } from './notice.ts';

/** The places of the page, as its address names them. */
export type PlaceKey = 'compare' | string;

/** What a place is once it has been started. */
export interface Started {
  /** Shows what an address holds for this place; called whenever the place is come to by an address. */
  open?(fields: ReadonlyMap<string, string>): void;
  /** What the address must hold to show the same again: fields beside the scenario's. */
  fields?(): Promise<ReadonlyMap<string, string>> | ReadonlyMap<string, string>;
  /** Called when the place is come to, and when it is left. */
  shown?(): void;
  left?(): void;
  /** Takes a file that was opened or dropped; false where it is none of this place's. */
  take?(name: string, json: unknown, file: File): boolean;
}

/** A place that the page may be at: a name in its head, and what is loaded when it is first come to. */
export interface Place {
  readonly key: PlaceKey;
  readonly name: string;
  readonly help: string;
  /** Builds the place inside its element. */
  readonly start: (host: HTMLElement, places: Places) => Promise<Started>;
}

const COMPARE = { key: 'compare', name: 'Compare', help: 'Both fields side by side, their difference and the verdict' };

/**
 * Where on the page one is. “Compare” stands in the page itself; the others are loaded and built when they are first
 * come to. The scenario is one for all of them.
 */
export class Places {
  current: PlaceKey = COMPARE.key;
  private readonly buttons = new Map<PlaceKey, HTMLButtonElement>();
  private readonly hosts = new Map<PlaceKey, HTMLElement>([[COMPARE.key, byId('compare')]]);
  private readonly started = new Map<PlaceKey, Promise<Started | null>>();

  /**
   * @param onMove is told when one has gone from one place to another
   * @param onAddress is told when what the address must hold has changed; a move is a step of the browser's history
   */
  constructor(
    private readonly list: readonly Place[],
    private readonly onMove: () => void,
    private readonly onAddress: (step: boolean) => void,
  ) {
    const entries = [COMPARE, ...list];
    byId('places').append(
      ...entries.map(({ key, name, help }) => {
        const button = h('button', { type: 'button', title: help, onclick: () => this.go(key) }, name);
        this.buttons.set(key, button);
        return button;
      }),
    );
    this.show();
  }

  /** Goes to a place; with `fields`, to show what an address holds. */
  go(key: PlaceKey, fields?: ReadonlyMap<string, string>): void {
    const known = this.buttons.has(key) ? key : COMPARE.key;
    if (known !== key)
      notify(`The link names the place “${key}”; there are ${[...this.buttons.keys()].join(', ')}.`, 'bad');
    const before = this.current;
    this.current = known;
    if (before !== known) {
      void this.started.get(before)?.then((place) => place?.left?.());
      this.show();
      this.onMove();
    }
    const started = this.startedAt(known);
    void started?.then((place) => {
      if (this.current !== known) return;
      if (fields) place?.open?.(fields);
      if (before !== known) place?.shown?.();
    });
    if (before !== known && !fields) this.onAddress(true);
  }

  /** One place on, or back. */
  turn(by: number): void {
    const keys = [...this.buttons.keys()];
    const next = keys[(keys.indexOf(this.current) + by + keys.length) % keys.length]!;
    this.go(next);
    this.buttons.get(next)!.focus();
  }

  /** Tells that the present place wants another address. */
  changed(): void {
    this.onAddress(false);
  }

  /** The fields of the present place's address, its name first; none for Compare. */
  async fields(): Promise<ReadonlyMap<string, string>> {
    if (this.current === COMPARE.key) return new Map();
    const place = await this.started.get(this.current);
    return new Map([['at', this.current], ...((await place?.fields?.()) ?? [])]);
  }

  /** Hands a file to the present place; false where it is none of its. */
  async take(name: string, json: unknown, file: File): Promise<boolean> {
    return (await this.started.get(this.current))?.take?.(name, json, file) ?? false;
  }

  private startedAt(key: PlaceKey): Promise<Started | null> | undefined {
    const place = this.list.find((each) => each.key === key);
    if (!place) return undefined;
    let started = this.started.get(key);
    if (!started) {
      const host = this.hosts.get(key)!;
      started = place.start(host, this).catch((error: Error) => {
        host.replaceChildren(h('p', { className: 'nothing' }, `This place could not be loaded: ${error.message}`));
        return null;
      });
      this.started.set(key, started);
    }
    return started;
  }

  private show(): void {
    document.body.dataset.place = this.current;
    const place = this.list.find(({ key }) => key === this.current);
    if (place && !this.hosts.has(place.key)) {
      const host = h('main', { className: 'place', 'aria-label': place.name });
      byId('compare').after(host);
      this.hosts.set(place.key, host);
    }
    for (const [key, host] of this.hosts) host.hidden = key !== this.current;
    for (const [key, button] of this.buttons)
      if (key === this.current) button.setAttribute('aria-current', 'page');
      else button.removeAttribute('aria-current');
  }
}
