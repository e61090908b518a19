import { PARTS, type Part } from '../compare/budget.ts';
import type { Result } from '../compare/result.ts';
import { NEUTRALS, packed, type Scale, type SignedScale, type Theme } from '../draw/colour.ts';
import { contours } from '../draw/contour.ts';
import { absorberEdges, boxEdges, contourLines, planeOutline, wire } from '../draw/furniture.ts';
import { type Hit, pick } from '../draw/pick.ts';
import type { Box, Camera, Rectangle } from '../draw/projection.ts';
import type { Marker, Pane, Plane, Scene, Stroke } from '../draw/scene.ts';
import { formatQuantity } from '../elementary/quantity.ts';
import { PALETTE } from '../report/palette.ts';
import { FACES, type Scenario, type Vec3 } from '../scenario/model.ts';
import { cellsBehind } from '../scenario/walls.ts';
import type { Film } from './film.ts';
import { distanceOutlines, Pictures, partScale, type Side, trustPlanes, trustScale } from './pictures.ts';
import { type QuantityKey, quantityOf } from './quantity.ts';
import { planesShown } from './slices.ts';
import { currentOn, type DrawnSource, drawnSources, largestCurrent } from './wires.ts';

const TITLES: Readonly<Record<Side, string>> = { grid: 'Grid field', exact: 'Exact field', difference: 'Difference' };

/** What is looked at, and how. */
export interface View {
  readonly layout: 'panes' | 'overlay' | 'trust';
  readonly quantity: QuantityKey;
  readonly difference: 'signed' | 'decibels';
  /** contour lines of the exact field over the grid's colours */
  readonly contours: boolean;
  /** of the colour scale: values times this */
  readonly gain: number;
  readonly projection: 'perspective' | 'orthographic';
  /** place of the divider between grid and exact, 0…1 */
  readonly divider: number;
  /** whose traces are shown */
  readonly observer: string;
  /** instants a second when playing */
  readonly speed: number;
}

/** The view that one begins with. */
export const VIEW: View = {
  layout: 'panes',
  quantity: 'Ez',
  difference: 'signed',
  contours: false,
  gain: 1,
  projection: 'perspective',
  divider: 0.5,
  observer: '',
  speed: 20,
};

/** What there is to show. */
export interface Shown {
  readonly scenario: Scenario | null;
  readonly view: View;
  readonly theme: Theme;
  readonly film: Film | null;
  readonly frame: number;
  readonly result: Result | null;
}

/** What lies under the pointer, with the values of all three pictures there. */
export interface Reading {
  readonly hit: Hit;
  readonly unit: string;
  readonly label: string;
  readonly grid: number;
  readonly exact: number;
  /** point errors, where a trust map is shown */
  readonly trust?: { readonly E: number; readonly H: number; readonly largest?: Part };
}

/** What of a scenario does not change with time. */
interface Furniture {
  readonly scenario: Scenario;
  readonly sources: readonly DrawnSource[];
  readonly outer: Box;
  readonly current: SignedScale;
}

/** The corner of a plane by which it is taken. */
export function gripOf(scenario: Scenario, n: number, moved?: number): Vec3 {
  const { normal, at } = planesShown(scenario)[n]!;
  return scenario.grid.box.to.map((x, a) => (a === normal ? (moved ?? at) : x)) as unknown as Vec3;
}

/** From what there is to show to what is to be drawn, for the page and for files alike. */
export class Scenery {
  /** a plane on its way, and where along its normal it is, m */
  moving: { readonly plane: number; readonly at: number } | undefined;
  private readonly pictures = new Pictures();
  private furniture: Furniture | undefined;
  private masks:
    | { readonly film: Film; readonly mask: number; readonly theme: Theme; readonly strokes: Stroke[] }
    | undefined;

  /**
   * @param store whose state is shown
   * @param wantPotentials is told of a picture whose potentials are to be shown
   */
  constructor(
    private readonly store: { readonly state: Shown },
    private readonly wantPotentials: (frame: number) => void,
  ) {}

  /** Whether the next picture would look different, though nothing has happened. */
  get settling(): boolean {
    return this.pictures.settling;
  }

  /** The panes of the present view, one for each area; none before there is a scenario. */
  panes(camera: Camera, areas: readonly Rectangle[]): Pane[] {
    const { scenario, view } = this.store.state;
    if (!scenario) return [];
    const furniture = this.furnitureOf(scenario);
    return view.layout === 'trust'
      ? this.trustPanes(furniture, camera, areas)
      : this.fieldPanes(furniture, camera, areas);
  }

  private furnitureOf(scenario: Scenario): Furniture {
    if (this.furniture?.scenario === scenario) return this.furniture;
    const { from, to } = scenario.grid.box;
    const layers = (face: number, a: number) => {
      return cellsBehind(scenario.grid.boundary[FACES[face]!]) * scenario.grid.cellSize[a]!;
    };
    const outer: Box = {
      from: [0, 1, 2].map((a) => from[a]! - layers(2 * a, a)) as unknown as Vec3,
      to: [0, 1, 2].map((a) => to[a]! + layers(2 * a + 1, a)) as unknown as Vec3,
    };
    this.furniture = {
      scenario,
      sources: drawnSources(scenario),
      outer,
      current: { kind: 'signed', limit: largestCurrent(scenario), label: 'I, A' },
    };
    return this.furniture;
  }

  private fieldPanes(furniture: Furniture, camera: Camera, areas: readonly Rectangle[]): Pane[] {
    const { film, view, frame } = this.store.state;
    const { scenario } = furniture;
    const quantity = quantityOf(view.quantity);
    if (film && quantity.kind === 'potential') this.wantPotentials(frame);
    const scales =
      film && this.pictures.scalesOf(film, scenario.grid.mask, quantity, frame, view.gain, view.difference);
    const planes = (side: Side): Plane[] =>
      scales && film?.films[0] ? this.pictures.planes(film, scenario, quantity, frame, side, scales[side]) : [];
    const strokes = this.strokesOf(furniture);
    const common = { camera, markers: this.markersOf(scenario), axes: scenario.grid.box };
    const lines = (exact: readonly Plane[]): Stroke[] => {
      const field = scales?.exact;
      if (field?.kind !== 'signed') return [];
      const { limit } = field;
      return exact.map((plane) =>
        contourLines(
          plane,
          [0.1, 0.3, 0.5, 0.7, 0.9].map((s) => s * limit),
          NEUTRALS[this.store.state.theme],
        ),
      );
    };
    const withScale = (scale: Scale | undefined) => (scale ? { scale } : {});
    const onOneSide = quantity.kind === 'potential';
    const missing = (side: Side) => onOneSide && side !== 'exact';
    const quantityTitle = (side: Side) =>
      missing(side)
        ? `${TITLES[side]}: the grid has no ${quantity.label}`
        : `${TITLES[side]}, ${quantity.label}${stillMissing(film, frame, onOneSide, side)}`;
    if (view.layout === 'overlay') {
      const [grid, exact] = [planes('grid'), planes('exact')];
      return [
        {
          ...common,
          area: areas[0]!,
          title: `${quantity.label}: grid on the left of the divider, exact on its right; lines are the exact field’s contours`,
          planes: grid,
          overlay: { divider: view.divider, planes: exact },
          strokes: [...strokes, ...lines(exact)],
          ...withScale(scales?.grid),
        },
      ];
    }
    return (['grid', 'exact', 'difference'] as const).map((side, n) => ({
      ...common,
      area: areas[n]!,
      title: quantityTitle(side),
      planes: planes(side),
      strokes:
        side === (onOneSide ? 'exact' : 'grid') && view.contours ? [...strokes, ...lines(planes('exact'))] : strokes,
      ...(missing(side) ? { barRoom: true } : withScale(scales?.[side])),
    }));
  }

  private trustPanes(furniture: Furniture, camera: Camera, areas: readonly Rectangle[]): Pane[] {
    const { film, result, theme } = this.store.state;
    const { scenario } = furniture;
    const scales = {
      E: trustScale(scenario.tolerance, 'E'),
      H: trustScale(scenario.tolerance, 'H'),
      largest: partScale(theme),
    };
    const outside = packed(PALETTE.outside[theme]);
    const { ink, muted } = NEUTRALS[theme];
    const verdict = result?.verdict;
    const bounds = (limit: object | undefined, colour: number): Stroke[] =>
      film && limit && 'distance' in limit
        ? distanceOutlines(film, scenario, limit.distance as number, colour).map((s) => ({
            ...s,
            width: 1.6,
            dash: [5, 3],
          }))
        : [];
    const distances = [...bounds(verdict?.closest, ink), ...bounds(verdict?.farthest, muted)];
    const strokesOn = (planes: readonly Plane[]): Stroke[] => [
      ...planes.map((plane): Stroke => {
        const points = contours(plane, [scenario.tolerance]);
        return { points, form: 'segments', colour: outside, width: 1.8 };
      }),
      ...distances,
    ];
    const clearance =
      verdict?.wallClearance.status === 'crossing' ? [clearanceBox(scenario, verdict.wallClearance.distance, ink)] : [];
    const titles = { E: 'Error of E', H: 'Error of H', largest: 'Largest part of E’s error' };
    return (['E', 'H', 'largest'] as const).map((which, n) => {
      const planes = film ? trustPlanes(film, scenario, which, scales[which]) : [];
      return {
        camera,
        markers: this.markersOf(scenario),
        axes: scenario.grid.box,
        area: areas[n]!,
        title: planes.length > 0 ? titles[which] : `${titles[which]}: not known yet`,
        planes,
        strokes: [...this.strokesOf(furniture), ...clearance, ...(which === 'largest' ? [] : strokesOn(planes))],
        scale: scales[which],
      };
    });
  }

  private strokesOf({ scenario, sources, outer, current }: Furniture): Stroke[] {
    const { film, frame, theme } = this.store.state;
    const neutrals = NEUTRALS[theme];
    const t = film ? film.instants.E[frame]! : 0;
    const absorber =
      JSON.stringify(outer) === JSON.stringify(scenario.grid.box) ? [] : [absorberEdges(outer, neutrals)];
    const wires = sources.flatMap((source) => wire(source.points, currentOn(source, t), current, theme, neutrals));
    return [
      ...absorber,
      boxEdges(scenario.grid.box, neutrals),
      ...this.maskStrokes(scenario),
      ...wires,
      ...this.movingRim(scenario),
    ];
  }

  /** The outlines of the mask, kept while film and mask are the same. */
  private maskStrokes(scenario: Scenario): Stroke[] {
    const { film, theme } = this.store.state;
    if (!film) return [];
    const { mask } = scenario.grid;
    if (this.masks?.film === film && this.masks.mask === mask && this.masks.theme === theme) return this.masks.strokes;
    const strokes = distanceOutlines(film, scenario, mask, NEUTRALS[theme].muted).map(
      (stroke): Stroke => ({ ...stroke, dash: [2, 3] }),
    );
    this.masks = { film, mask, theme, strokes };
    return strokes;
  }

  private markersOf(scenario: Scenario): Marker[] {
    const { theme, view } = this.store.state;
    const { ink, muted } = NEUTRALS[theme];
    const observers = scenario.observers.map(({ at, name }) => ({
      at,
      name,
      colour: name === view.observer ? ink : muted,
    }));
    const grips = planesShown(scenario).map(({ normal, at }, n) => {
      const moved = this.moving?.plane === n ? this.moving.at : at;
      const name = `↔ ${'xyz'[normal]} = ${formatQuantity(moved, 'm')}`;
      return { at: gripOf(scenario, n, moved), name, colour: muted };
    });
    return [...observers, ...grips];
  }

  /** The rim of the plane on its way. */
  private movingRim(scenario: Scenario): Stroke[] {
    const { moving } = this;
    if (!moving) return [];
    const { normal } = planesShown(scenario)[moving.plane]!;
    const [u, v] = [0, 1, 2].filter((a) => a !== normal) as [number, number];
    const { from, to } = scenario.grid.box;
    const edge = (axis: number) => [0, 1, 2].map((a) => (a === axis ? to[a]! - from[a]! : 0)) as unknown as Vec3;
    const origin = from.map((x, a) => (a === normal ? moving.at : x)) as unknown as Vec3;
    return [{ ...planeOutline({ origin, u: edge(u), v: edge(v) }, NEUTRALS[this.store.state.theme]), width: 2 }];
  }

  /** The values of all pictures under a place in the image. */
  readingAt(scene: Scene, x: number, y: number): Reading | undefined {
    const { film, scenario, view, frame } = this.store.state;
    if (!film || !scenario) return undefined;
    const hit = pick(scene, x, y);
    if (!hit) return undefined;
    const n = film.films.findIndex(({ slice }) => slice.name === hit.plane.name);
    if (view.layout === 'trust') {
      const map = film.films[n]?.trust;
      const p = hit.j * hit.plane.nu + hit.i;
      const largest = map && PARTS[map.largest[p]!];
      const trust = map && { E: map.E[p]!, H: map.H[p]!, ...(largest ? { largest } : {}) };
      return trust && { hit, unit: '', label: '', grid: Number.NaN, exact: Number.NaN, trust };
    }
    const quantity = quantityOf(view.quantity);
    const scales = this.pictures.scalesOf(film, scenario.grid.mask, quantity, frame, view.gain, view.difference);
    const value = (side: 'grid' | 'exact') =>
      this.pictures.planes(film, scenario, quantity, frame, side, scales[side])[n]!.values[
        hit.j * hit.plane.nu + hit.i
      ]!;
    return { hit, unit: quantity.unit, label: quantity.label, grid: value('grid'), exact: value('exact') };
  }
}

/** What of a picture is not known yet, for its title. */
function stillMissing(film: Film | null, frame: number, potential: boolean, side: Side): string {
  const nothing = ': not known yet';
  if (!film) return nothing;
  if (potential) return film.films.every(({ potentials }) => potentials.has(frame)) ? '' : nothing;
  if (side === 'grid') return frame < film.gridFrames ? '' : nothing;
  if (film.exactKnown) return '';
  const known = (least: number) => film.films.some(({ known: cells }) => cells.some((how) => how >= least));
  if (known(2)) return ': filling in';
  return side === 'exact' && known(1) ? ': coarse yet' : nothing;
}

/** What the walls leave: the box without the clearance on every side. */
function clearanceBox({ grid }: Scenario, clearance: number, colour: number): Stroke {
  const inner: Box = {
    from: grid.box.from.map((x) => x + clearance) as unknown as Vec3,
    to: grid.box.to.map((x) => x - clearance) as unknown as Vec3,
  };
  return { ...boxEdges(inner, { line: colour, background: 0, ink: colour, muted: colour }), dash: [6, 4] };
}
