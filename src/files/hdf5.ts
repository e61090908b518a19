import type { Dataset, File, Group } from 'h5wasm';
import { SIDES, type Slab, type SnapshotFrame, type SnapshotRegion } from '../trace/snapshots.ts';
import { COMPONENTS, STAGGER } from '../trace/trace.ts';

/**
 * Snapshots as HDF5. A group a region, in it the axes `x`, `y`, `z` (m, of the cells' nodes), `time_E`, `time_H` (s), and
 * `grid/Ex` to `exact/Hz`, each [instant][z][y][x] with its `units`, its `axes`, and the `offset` (m) of its places from the
 * nodes. Axes are attached as dimension scales too.
 */
export class SnapshotFile {
  readonly #regions: readonly { readonly region: SnapshotRegion; readonly sets: ReadonlyMap<string, Dataset> }[];

  /**
   * @param file of the HDF5 library, open for writing and empty
   * @param about what stands at the file's root, as attributes
   */
  constructor(
    readonly file: File,
    regions: readonly SnapshotRegion[],
    readonly frame: SnapshotFrame,
    about: Readonly<Record<string, string>>,
  ) {
    for (const [name, text] of Object.entries(about)) file.create_attribute(name, text);
    file.create_attribute(
      'places',
      'Nothing is interpolated: each component is given where it lives, `offset` away from the nodes x, y, z. NaN: on a source.',
    );
    this.#regions = regions.map((region) => ({ region, sets: makeRegion(file, region, frame) }));
  }

  /** Puts a slab of region number `index` in its place. */
  write(index: number, { side, layer, row, rows, values }: Slab): void {
    const { region, sets } = this.#regions[index]!;
    const { count } = this.frame.instants;
    const points = rows * region.counts[0];
    COMPONENTS.forEach((component, c) => {
      const data = realsFor(this.frame, count * points);
      for (let m = 0; m < count; m++)
        for (let p = 0; p < points; p++) data[m * points + p] = values[(p * 6 + c) * count + m]!;
      sets.get(`${side}/${component}`)!.write_slice([[0, count], [layer, layer + 1], [row, row + rows], []], data);
    });
  }
}

const realsFor = ({ precision }: SnapshotFrame, length: number) =>
  precision === 'single' ? new Float32Array(length) : new Float64Array(length);

function makeRegion(file: File, region: SnapshotRegion, frame: SnapshotFrame): Map<string, Dataset> {
  const { name, counts, origin, spacing } = region;
  const group = file.create_group(name);
  const axis = (axisName: string, data: Float64Array, units: string, what: string) => {
    const set = group.create_dataset({ name: axisName, data });
    set.create_attribute('units', units);
    set.create_attribute('long_name', what);
    set.make_scale(axisName);
  };
  for (const [a, axisName] of ['x', 'y', 'z'].entries()) {
    const nodes = Float64Array.from({ length: counts[a]! }, (_, n) => origin[a]! + n * spacing[a]!);
    axis(axisName, nodes, 'm', `${axisName} of the nodes of the cells`);
  }
  axis('time_E', frame.instants.E, 's', 'instants of E');
  axis('time_H', frame.instants.H, 's', 'instants of H');
  const sets = new Map<string, Dataset>();
  for (const side of SIDES) {
    const solver = group.create_group(side);
    solver.create_attribute(
      'long_name',
      side === 'grid' ? 'the grid solver in its box' : 'the exact field of the designed currents',
    );
    for (const c of COMPONENTS.keys()) {
      const set = component(solver, c, region, frame);
      ['z', 'y', 'x'].forEach((axisName, n) => {
        set.attach_scale(n + 1, `/${name}/${axisName}`);
      });
      set.attach_scale(0, `/${name}/time_${c < 3 ? 'E' : 'H'}`);
      sets.set(`${side}/${COMPONENTS[c]}`, set);
    }
  }
  return sets;
}

/** A data set of one component, made with its first instant alone and then stretched, so that none is in memory whole. */
function component(group: Group, c: number, { counts, cellSize }: SnapshotRegion, frame: SnapshotFrame): Dataset {
  const [nx, ny, nz] = counts;
  const { count } = frame.instants;
  const set = group.create_dataset({
    name: COMPONENTS[c]!,
    data: realsFor(frame, nx).fill(Number.NaN),
    shape: [1, 1, 1, nx],
    maxshape: [count, nz, ny, nx],
    chunks: [1, 1, ny, nx],
  });
  set.resize([count, nz, ny, nx]);
  set.create_attribute('units', c < 3 ? 'V/m' : 'A/m');
  set.create_attribute('axes', [c < 3 ? 'time_E' : 'time_H', 'z', 'y', 'x']);
  set.create_attribute(
    'offset',
    Float64Array.from(STAGGER[c]!, (s, a) => s * cellSize[a]!),
  );
  return set;
}
