import GUI, { type Controller } from 'lil-gui';
import { formatQuantity } from '../elementary/quantity.ts';
import type { Problem } from '../scenario/reading.ts';
import { BOUNDARIES, WAVEFORMS } from '../scenario/schema.ts';
import { timeStepOf } from '../scenario/sites.ts';
import { parseFraction } from '../scenario/units.ts';
import { MOST_PLANES } from '../scene/slices.ts';
import { h } from './dom.ts';
import { addQuantity, asTyped, type Path, type QuantityField, setAt, shownNumber, valueAt } from './fields.ts';
import {
  BEGINNINGS,
  BOUNDARY_FIELDS,
  chosenBoundary,
  NEW_SOURCES,
  WAVEFORM_FIELDS,
  WAVEFORM_HELP,
} from './panelFields.ts';
import { waveformPreview } from './preview.ts';
import type { Draft, Store } from './store.ts';

/** How long an edit may go on before it counts: a slider being dragged, a number being typed. */
const SETTLE = 300;

/** The docked panels. They edit the scenario's file, so that text and panels always say the same. */
export class Panels {
  readonly element = h('div', { className: 'panels' });
  private readonly host = h('div', {});
  private readonly preview = h('div', {});
  private readonly cost = h('p', { className: 'note' });
  private gui: GUI | undefined;
  private structure = '';
  private readonly open = new Set<string>(['Scenario', 'Grid', 'Boundary']);
  private source = 0;
  private timer = 0;
  private pending: ((draft: Draft) => void)[] = [];
  private editing = false;
  /** by the place that they edit, keys joined by dots */
  private readonly controls = new Map<string, Controller>();
  /** what is wrong where no control is */
  unplaced: readonly Problem[] = [];

  constructor(
    private readonly store: Store,
    private readonly help: HTMLElement,
  ) {
    this.element.append(this.host);
    store.on(['scenario'], () => this.follow());
    store.on(['theme'], () => this.showPreview());
  }

  /** Rebuilds when the file was changed elsewhere, or its shape was; an edit made here leaves its control alone. */
  private follow(): void {
    const structure = shapeOf(this.store.state.json);
    if (!this.editing || structure !== this.structure) this.build();
    this.structure = structure;
    this.showProblems();
    this.showPreview();
    this.showCost();
  }

  /** What is wrong is said at its control, with a button that brings back what stood there when all was well. */
  private showProblems(): void {
    for (const old of this.host.querySelectorAll('.problem')) old.remove();
    const { problems, sound } = this.store.state;
    this.unplaced = problems.filter(({ path }) => !this.controls.has(path));
    for (const { path, message } of problems) {
      const controller = this.controls.get(path);
      if (!controller) continue;
      for (let folder: GUI | undefined = controller.parent; folder; folder = folder.parent) folder.open();
      const keys = path.split('.').map((key) => (/^\d+$/.test(key) ? Number(key) : key));
      const before = valueAt(sound, keys);
      const back = h('button', { type: 'button' }, before === undefined ? 'Leave it out' : `Back to ${before}`);
      back.addEventListener('click', () => this.store.edit((draft) => setAt(draft, keys, before)));
      controller.domElement.after(
        h('div', { className: 'problem' }, h('p', {}, message), sound === undefined ? null : back),
      );
    }
    this.host.querySelector('.problem')?.scrollIntoView({ block: 'nearest' });
  }

  private showPreview(): void {
    const { scenario, problems } = this.store.state;
    const source = scenario?.sources[Math.min(this.source, scenario.sources.length - 1)];
    if (problems.length > 0 || !scenario || !source) return;
    this.preview.replaceChildren(waveformPreview(scenario, source));
  }

  /** Writes an edit into the file once it has settled. */
  private settle(edit: (draft: Draft) => void, at = SETTLE): void {
    this.pending.push(edit);
    clearTimeout(this.timer);
    this.timer = setTimeout(() => {
      const edits = this.pending;
      this.pending = [];
      this.editing = true;
      this.store.edit((draft) => {
        for (const one of edits) one(draft);
      });
      this.editing = false;
    }, at) as unknown as number;
  }

  private build(): void {
    this.gui?.destroy();
    this.controls.clear();
    const { json } = this.store.state;
    if (typeof json !== 'object' || json === null) return;
    const gui = new GUI({ container: this.host, injectStyles: false, title: 'Panels' });
    gui.$title.hidden = true;
    this.gui = gui;
    this.scenarioFolder(this.folder(gui, 'Scenario'), json);
    this.sourcesFolder(this.folder(gui, 'Sources and waveforms'), json);
    this.gridFolder(this.folder(gui, 'Grid'), json);
    this.boundaryFolder(this.folder(gui, 'Boundary'), json);
    this.observersFolder(this.folder(gui, 'Observers'), json);
    this.planesFolder(this.folder(gui, 'Planes'), json);
  }

  /** A folder that stays as open as it was when the panels are rebuilt. */
  private folder(gui: GUI, title: string): GUI {
    const folder = gui.addFolder(title);
    if (!this.open.has(title)) folder.close();
    folder.onOpenClose((changed) => {
      if (changed !== folder) return;
      if (folder._closed) this.open.delete(title);
      else this.open.add(title);
    });
    return folder;
  }

  private explain(controller: Controller, text: string): void {
    const show = () => {
      this.help.textContent = text;
    };
    controller.domElement.title = text;
    controller.domElement.addEventListener('focusin', show);
    controller.domElement.addEventListener('pointerenter', show);
  }

  private quantity(gui: GUI, json: Draft, field: QuantityField): void {
    const controller = addQuantity(gui, field, valueAt(json, field.path), (written) =>
      this.settle((draft) => setAt(draft, field.path, written)),
    );
    this.controls.set(field.path.join('.'), controller);
    const range =
      field.min === undefined ? '' : ` Usual range ${field.min} to ${field.max}${field.unit && ` ${field.unit}`}.`;
    this.explain(controller, field.help + range);
  }

  private choice(
    gui: GUI,
    name: string,
    help: string,
    options: readonly string[],
    value: string,
    change: (value: string) => void,
  ): void {
    const held = { value };
    this.explain(
      gui
        .add(held, 'value', [...options])
        .name(name)
        .onChange(change),
      help,
    );
  }

  private action(gui: GUI, name: string, help: string, run: (draft: Draft) => void): void {
    const held = { run: () => this.store.edit(run) };
    this.explain(gui.add(held, 'run').name(name), help);
  }

  private text(gui: GUI, json: Draft, path: Path, name: string, help: string): void {
    const held = { value: String(valueAt(json, path) ?? '') };
    const controller = gui.add(held, 'value').name(name);
    controller.onChange((value: string) => this.settle((draft) => setAt(draft, path, value), 700));
    this.controls.set(path.join('.'), controller);
    this.explain(controller, help);
  }

  private vector(gui: GUI, json: Draft, path: Path, name: string, help: string): void {
    for (const [a, axis] of ['x', 'y', 'z'].entries())
      this.quantity(gui, json, { path: [...path, a], name: `${name} ${axis}`, unit: 'mm', help, step: 1 });
  }

  private scenarioFolder(gui: GUI, json: Draft): void {
    this.text(gui, json, ['title'], 'title', 'Title of reports and files.');
    this.quantity(gui, json, {
      path: ['duration'],
      name: 'duration',
      unit: 'ns',
      help: 'How long the field is computed, ns: the pulse must have passed the observers.',
      min: 0.1,
      max: 20,
      step: 0.1,
    });
    const tolerance = { percent: 5 };
    const given = json.tolerance === undefined ? { value: 0.05 } : parseFraction(json.tolerance);
    if ('value' in given) tolerance.percent = Number((100 * given.value).toPrecision(6));
    this.explain(
      asTyped(gui.add(tolerance, 'percent', 0.1, 50, 0.1))
        .name('tolerance, %')
        .onChange((percent: number) =>
          this.settle((draft) => {
            draft.tolerance = Number((percent / 100).toPrecision(6));
          }),
        ),
      'Largest relative error that is good enough, % of the exact field. The verdict is for this.',
    );
    this.quantity(gui, json, {
      path: ['medium', 'relativePermittivity'],
      name: 'permittivity εr',
      unit: '',
      help: 'Of the homogeneous medium, relative to vacuum; 1 or more.',
      min: 1,
      max: 20,
      step: 0.05,
      fallback: 1,
    });
    this.quantity(gui, json, {
      path: ['medium', 'relativePermeability'],
      name: 'permeability μr',
      unit: '',
      help: 'Of the homogeneous medium, relative to vacuum; 1 or more.',
      min: 1,
      max: 20,
      step: 0.05,
      fallback: 1,
    });
  }

  private sourcesFolder(gui: GUI, json: Draft): void {
    gui.$children.prepend(this.preview);
    const sources: Draft[] = Array.isArray(json.sources) ? json.sources : [];
    sources.forEach((source, n) => {
      const title = `${source?.name ?? `${source?.type} ${n + 1}`} (${source?.type})`;
      const folder = this.folder(gui, title);
      folder.$title.addEventListener('click', () => {
        this.source = n;
        this.showPreview();
      });
      const path = ['sources', n];
      if (source?.type === 'dipole') {
        this.vector(folder, json, [...path, 'at'], 'at', 'Position of the element, mm.');
        this.quantity(folder, json, {
          path: [...path, 'length'],
          name: 'length',
          unit: 'mm',
          help: 'Length of the element, mm; its moment is current times length.',
          min: 0.1,
          max: 100,
          step: 0.1,
        });
      } else if (source?.type === 'loop') {
        this.vector(folder, json, [...path, 'centre'], 'centre', 'Centre of the circle, mm.');
        this.quantity(folder, json, {
          path: [...path, 'radius'],
          name: 'radius',
          unit: 'mm',
          help: 'Radius of the circle, mm.',
          min: 1,
          max: 200,
          step: 0.5,
        });
      } else if (Array.isArray(source?.points)) this.wireFolder(folder, json, path, source);
      this.waveformControls(folder, json, [...path, 'current', 'waveform']);
      if (sources.length > 1)
        this.action(
          folder,
          `Remove ${source?.name ?? source?.type}`,
          'Takes this source out of the scenario.',
          (draft) => draft.sources.splice(n, 1),
        );
    });
    for (const { name, help, made } of NEW_SOURCES)
      this.action(gui, name, help, (draft) => {
        const names = (draft.sources ?? []).map((s: Draft) => s?.name);
        let k = 1;
        while (names.includes(`added ${k}`)) k++;
        draft.sources = [...(draft.sources ?? []), { name: `added ${k}`, ...made(`${20 * k} mm`) }];
      });
  }

  private wireFolder(gui: GUI, json: Draft, path: Path, source: Draft): void {
    const shown = source.points.length <= 6 ? source.points : [];
    shown.forEach((_: unknown, k: number) => {
      this.vector(
        gui,
        json,
        [...path, 'points', k],
        `point ${k + 1}`,
        'A corner of the wire, mm; positive current flows from the first to the last.',
      );
    });
    if (shown.length === 0) this.help.textContent = `This wire has ${source.points.length} corners: edit them as text.`;
    if (source.current?.waves) return;
    const profile = source.current?.profile ?? 'uniform';
    this.choice(
      gui,
      'current along the wire',
      'uniform: the same everywhere; travelling: a wave from the first point to the last.',
      ['uniform', 'travelling'],
      profile,
      (value) =>
        this.store.edit((draft) => {
          const current = valueAt(draft, [...path, 'current']) as Draft;
          current.profile = value;
          if (value === 'uniform') delete current.speed;
        }),
    );
    if (profile === 'travelling')
      this.quantity(gui, json, {
        path: [...path, 'current', 'speed'],
        name: 'speed, of the medium’s',
        unit: '',
        help: 'Speed of the wave along the wire, relative to the medium’s, above 0 and at most 1.',
        min: 0.1,
        max: 1,
        step: 0.01,
        fallback: 1,
      });
  }

  private waveformControls(gui: GUI, json: Draft, path: Path): void {
    const waveform = valueAt(json, path) as Draft;
    const type = waveform?.type ?? 'gaussian';
    this.choice(gui, 'waveform', WAVEFORM_HELP, WAVEFORMS, type, (value) =>
      this.store.edit((draft) => {
        const fields = WAVEFORM_FIELDS[value] ?? [];
        const kept = Object.fromEntries(
          fields.flatMap(({ name }) => (name in waveform ? [[name, waveform[name]]] : [])),
        );
        setAt(draft, path, { type: value, ...BEGINNINGS[value], ...kept });
      }),
    );
    for (const field of WAVEFORM_FIELDS[type] ?? [])
      this.quantity(gui, json, { ...field, path: [...path, field.name] });
  }

  private gridFolder(gui: GUI, json: Draft): void {
    if (Array.isArray(json.grid?.cellSize))
      for (const [a, axis] of ['x', 'y', 'z'].entries())
        this.quantity(gui, json, {
          path: ['grid', 'cellSize', a],
          name: `cell along ${axis}`,
          unit: 'mm',
          help: 'Cell size, mm: halving it costs sixteen times the work.',
          min: 0.5,
          max: 20,
          step: 0.1,
        });
    else
      this.quantity(gui, json, {
        path: ['grid', 'cellSize'],
        name: 'cell size',
        unit: 'mm',
        help: 'Edge of the cubic cells, mm: halving it costs sixteen times the work.',
        min: 1,
        max: 20,
        step: 0.25,
      });
    this.quantity(gui, json, {
      path: ['grid', 'courant'],
      name: 'Courant number',
      unit: '',
      help: 'Time step relative to the Courant limit, above 0 and at most 1.',
      min: 0.1,
      max: 1,
      step: 0.01,
      fallback: 0.99,
    });
    this.vector(
      gui,
      json,
      ['grid', 'box', 'from'],
      'box from',
      'Lower corner of the working box, mm; absorbing layers lie outside it.',
    );
    this.vector(
      gui,
      json,
      ['grid', 'box', 'to'],
      'box to',
      'Upper corner of the working box, mm; rounded outwards to whole cells.',
    );
    this.choice(
      gui,
      'precision',
      'Of the fields on the grid: double to measure below −80 dB, at half the speed.',
      ['single', 'double'],
      json.grid?.precision ?? 'single',
      (value) => this.store.edit((draft) => setAt(draft, ['grid', 'precision'], value)),
    );
    const mask: QuantityField = {
      path: ['grid', 'mask'],
      name: 'mask',
      unit: 'mm',
      help: 'Samples nearer to a source than this are left out of box norms, mm (default: 8 cells). Drawn dotted on the planes.',
      min: 0,
      max: 200,
      step: 1,
    };
    const scenario = this.store.state.scenario;
    this.quantity(gui, json, { ...mask, fallback: scenario ? shownNumber(scenario.grid.mask, mask) : 0 });
    gui.$children.append(this.cost);
    this.showCost();
  }

  /** What the grid comes to, below its controls. */
  private showCost(): void {
    const { scenario } = this.store.state;
    if (!scenario) return;
    const { grid, medium, duration } = scenario;
    const step = timeStepOf(grid, medium);
    this.cost.textContent = `${grid.cells.join(' × ')} cells, ${Math.ceil(duration / step)} steps of ${formatQuantity(step, 's')}`;
  }

  private boundaryFolder(gui: GUI, json: Draft): void {
    const given = json.grid?.boundary;
    const each = typeof given === 'object' && given !== null && !('type' in given);
    if (each) {
      for (const face of Object.keys(given)) {
        const type = given[face]?.type ?? 'cpml';
        this.choice(gui, `wall ${face}`, 'What this wall does to outgoing waves.', BOUNDARIES, type, (value) =>
          this.store.edit((draft) => setAt(draft, ['grid', 'boundary', face], { type: value })),
        );
      }
      this.action(gui, 'The same for all walls', 'Replaces the six walls by a CPML of ten layers all round.', (draft) =>
        setAt(draft, ['grid', 'boundary'], { type: 'cpml', layers: 10 }),
      );
      return;
    }
    const type = given?.type ?? 'cpml';
    this.choice(
      gui,
      'all walls',
      'cpml absorbs best, splitPml nearly so; higdon2, liao, mur2 and mur1 are simple absorbers; pec and pmc reflect all, for scale.',
      BOUNDARIES,
      type,
      (value) => this.store.edit((draft) => setAt(draft, ['grid', 'boundary'], chosenBoundary(value))),
    );
    // One angle alone would be no pair.
    for (const field of BOUNDARY_FIELDS[type] ?? [])
      if (field.path[0] !== 'angles' || Array.isArray(given.angles))
        this.quantity(gui, json, { ...field, path: ['grid', 'boundary', ...field.path] });
    this.action(gui, 'A wall of its own for each face', 'Lets the six walls differ.', (draft) => {
      const all = draft.grid.boundary ?? { type: 'cpml', layers: 10 };
      draft.grid.boundary = Object.fromEntries(['x-', 'x+', 'y-', 'y+', 'z-', 'z+'].map((face) => [face, { ...all }]));
    });
  }

  private observersFolder(gui: GUI, json: Draft): void {
    const observers: Draft[] = Array.isArray(json.observers) ? json.observers : [];
    observers.forEach((observer, n) => {
      const name = observer?.name ?? `observer ${n + 1}`;
      const folder = this.folder(gui, `Observer ${name}`);
      this.text(folder, json, ['observers', n, 'name'], 'name', 'Unique name.');
      this.vector(
        folder,
        json,
        ['observers', n, 'at'],
        'at',
        'Position, mm; on the grid it is the nearest node. Outside the box there is an exact field only.',
      );
      this.action(folder, `Remove ${name}`, 'Takes this observer out of the scenario.', (draft) =>
        draft.observers.splice(n, 1),
      );
    });
    this.action(
      gui,
      'Add an observer',
      'Adds one in the middle of the box’s upper half; a click in a pane adds one there.',
      (draft) => {
        const { grid } = this.store.state.scenario ?? {};
        const at = grid ? grid.box.from.map((x, a) => x + 0.75 * (grid.box.to[a]! - x)) : [0.05, 0.05, 0.05];
        draft.observers = [
          ...(draft.observers ?? []),
          { name: nextName(draft), at: at.map((x) => `${Number((x * 1000).toPrecision(4))} mm`) },
        ];
      },
    );
  }

  private planesFolder(gui: GUI, json: Draft): void {
    const planes: Draft[] = Array.isArray(json.planes) ? json.planes.slice(0, MOST_PLANES) : [];
    planes.forEach((plane, n) => {
      const folder = this.folder(gui, `Plane ${plane?.name ?? n + 1}`);
      this.choice(
        folder,
        'normal to',
        'Axis that the plane stands across.',
        ['x', 'y', 'z'],
        plane?.normal ?? 'y',
        (value) => this.store.edit((draft) => setAt(draft, ['planes', n, 'normal'], value)),
      );
      const axis = 'xyz'.indexOf(plane?.normal);
      const box = this.store.state.scenario?.grid.box;
      const range = box && axis >= 0 ? { min: box.from[axis]! * 1000, max: box.to[axis]! * 1000 } : {};
      this.quantity(folder, json, {
        path: ['planes', n, 'at'],
        name: 'at',
        unit: 'mm',
        help: 'Where on that axis, mm, within the box. The plane can be dragged by its corner, too.',
        step: 1,
        ...range,
      });
      this.action(folder, 'Remove this plane', 'The comparison does not depend on planes.', (draft) =>
        draft.planes.splice(n, 1),
      );
    });
    if (planes.length < MOST_PLANES)
      this.action(gui, 'Add a plane', `Up to ${MOST_PLANES} are shown.`, (draft) => {
        const used = planes.map(({ normal }) => normal);
        const normal = ['y', 'z', 'x'].find((axis) => !used.includes(axis)) ?? 'y';
        const names = planes.map(({ name }) => name);
        const name = [...'xyz'].filter((axis) => axis !== normal).join('');
        const box = this.store.state.scenario?.grid.box;
        const a = 'xyz'.indexOf(normal);
        const middle = box ? (box.from[a]! + box.to[a]!) / 2 : 0;
        draft.planes = [
          ...(draft.planes ?? []),
          {
            name: names.includes(name) ? `${name} ${planes.length + 1}` : name,
            normal,
            at: `${Number((middle * 1000).toPrecision(5))} mm`,
          },
        ];
      });
  }
}

/** The first letter, then pair of letters, that no observer has. */
export function nextName(json: Draft): string {
  const taken = new Set((Array.isArray(json?.observers) ? json.observers : []).map((o: Draft) => o?.name));
  const letters = [...'ABCDEFGHIJKLMNOPQRSTUVWXYZ'];
  return letters.find((letter) => !taken.has(letter)) ?? `A${taken.size}`;
}

/** What of a file decides which controls there are: keys, lengths of lists, and texts that choose. */
function shapeOf(json: unknown): string {
  return JSON.stringify(json, (key, value) =>
    typeof value === 'number' ||
    (typeof value === 'string' && !['type', 'profile', 'normal', 'precision'].includes(key))
      ? 0
      : value,
  );
}
