import { SIDES, type Side, type Slab, type SnapshotFrame, type SnapshotRegion } from '../trace/snapshots.ts';
import { COMPONENTS, STAGGER } from '../trace/trace.ts';

/**
 * Snapshots as VTK ImageData, a file an instant: point data at the nodes of the kept cells, appended raw, so that where each
 * value lies in the file is known before it is. Source: VTK User's Guide, "VTK File Formats" (XML, version 1.0), from memory.
 */
export interface ImageData {
  readonly head: Uint8Array<ArrayBuffer>;
  readonly tail: Uint8Array<ArrayBuffer>;
  /** bytes of head, values and tail */
  readonly size: number;
  /** where the values of an array begin, by side and field, bytes from the file's beginning */
  readonly begin: Readonly<Record<`${Side} ${'E' | 'H'}`, number>>;
}

const FIELDS = ['E', 'H'] as const;
const UNITS = { E: 'V/m', H: 'A/m' } as const;

/** Arrays of three components in the order they stand in the file. */
const ARRAYS = SIDES.flatMap((side) => FIELDS.map((field) => ({ side, field })));

/** A block of appended data begins with the number of its bytes, UInt64. */
const COUNT_BYTES = 8;

const real = ({ precision }: SnapshotFrame) => (precision === 'single' ? 4 : 8);

/** All of a file but its values: those of instant m. */
export function imageData(region: SnapshotRegion, frame: SnapshotFrame, m: number): ImageData {
  const { counts, origin, spacing, cellSize } = region;
  const points = counts[0] * counts[1] * counts[2];
  const bytes = 3 * points * real(frame);
  const type = frame.precision === 'single' ? 'Float32' : 'Float64';
  const extent = counts.map((n) => `0 ${n - 1}`).join(' ');
  const arrays = ARRAYS.map(({ side, field }, n) => {
    const names = [0, 1, 2].map((c) => ` ComponentName${c}="${COMPONENTS[c + (field === 'E' ? 0 : 3)]}"`).join('');
    return (
      `<DataArray type="${type}" Name="${field} ${side} (${UNITS[field]})" NumberOfComponents="3"${names}` +
      ` format="appended" offset="${n * (COUNT_BYTES + bytes)}"/>`
    );
  });
  const number = (name: string, values: readonly number[], components = 1) =>
    `<DataArray type="Float64" Name="${name}" NumberOfComponents="${components}" NumberOfTuples="${values.length / components}"` +
    ` format="ascii">${values.join(' ')}</DataArray>`;
  const head = `<?xml version="1.0"?>
<!-- SI units. Nothing is interpolated: a point holds the six components of the Yee cell of its node, each of which lives
     "offset of a component" from the node; H is later than E by half a time step. NaN: on a source. -->
<VTKFile type="ImageData" version="1.0" byte_order="LittleEndian" header_type="UInt64">
<ImageData WholeExtent="${extent}" Origin="${origin.join(' ')}" Spacing="${spacing.join(' ')}">
<FieldData>
${number('TimeValue', [frame.instants.E[m]!])}
${number('time of E (s)', [frame.instants.E[m]!])}
${number('time of H (s)', [frame.instants.H[m]!])}
${COMPONENTS.map((component, c) =>
  number(
    `offset of ${component} (m)`,
    STAGGER[c]!.map((s, a) => s * cellSize[a]!),
    3,
  ),
).join('\n')}
</FieldData>
<Piece Extent="${extent}">
<PointData Vectors="E grid (V/m)">
${arrays.join('\n')}
</PointData>
</Piece>
</ImageData>
<AppendedData encoding="raw">
_`;
  const tail = new TextEncoder().encode('\n</AppendedData>\n</VTKFile>\n');
  const start = new TextEncoder().encode(head);
  const begin = Object.fromEntries(
    ARRAYS.map(({ side, field }, n) => [`${side} ${field}`, start.length + n * (COUNT_BYTES + bytes) + COUNT_BYTES]),
  ) as ImageData['begin'];
  return { head: start, tail, size: start.length + ARRAYS.length * (COUNT_BYTES + bytes) + tail.length, begin };
}

/** A run of bytes and where in a file it belongs. */
export interface Patch {
  readonly at: number;
  readonly bytes: Uint8Array<ArrayBuffer>;
}

/** What goes into a file before any value: its head, the counts of its arrays, and its tail. */
export function framing({ head, tail, size, begin }: ImageData, region: SnapshotRegion, frame: SnapshotFrame): Patch[] {
  const [nx, ny, nz] = region.counts;
  const count = new Uint8Array(COUNT_BYTES);
  new DataView(count.buffer).setBigUint64(0, BigInt(3 * nx * ny * nz * real(frame)), true);
  return [
    { at: 0, bytes: head },
    ...Object.values(begin).map((at) => ({ at: at - COUNT_BYTES, bytes: count })),
    { at: size - tail.length, bytes: tail },
  ];
}

/** Where the values of a slab at instant m belong: one run for E and one for H. */
export function patches(
  image: ImageData,
  region: SnapshotRegion,
  frame: SnapshotFrame,
  slab: Slab,
  m: number,
): Patch[] {
  const [nx, ny] = region.counts;
  const { side, layer, row, rows, values } = slab;
  const { count } = frame.instants;
  const points = rows * nx;
  const width = real(frame);
  return FIELDS.map((field, f) => {
    const bytes = new Uint8Array(3 * points * width);
    const view = new DataView(bytes.buffer);
    for (let n = 0; n < 3 * points; n++) {
      const value = values[(Math.floor(n / 3) * 6 + 3 * f + (n % 3)) * count + m]!;
      if (width === 4) view.setFloat32(4 * n, value, true);
      else view.setFloat64(8 * n, value, true);
    }
    return { at: image.begin[`${side} ${field}`] + (layer * ny + row) * nx * 3 * width, bytes };
  });
}

/** The name of the file of instant m. */
export const imageName = (region: SnapshotRegion, m: number): string =>
  `${region.name}-${String(m + 1).padStart(4, '0')}.vti`;

/** A VTK collection: which file shows which instant. */
export function collection(region: SnapshotRegion, { instants }: SnapshotFrame): string {
  const files = Array.from(
    instants.E,
    (t, m) => `<DataSet timestep="${t}" group="" part="0" file="${imageName(region, m)}"/>`,
  );
  return `<?xml version="1.0"?>
<VTKFile type="Collection" version="0.1" byte_order="LittleEndian">
<Collection>
${files.join('\n')}
</Collection>
</VTKFile>
`;
}
