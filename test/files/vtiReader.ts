import { XMLParser } from 'fast-xml-parser';

/** What a `.vti` file holds, read by the description of the format: XML, and blocks of appended data, each after its size. */
export interface Image {
  readonly extent: number[];
  readonly origin: number[];
  readonly spacing: number[];
  readonly fieldData: Map<string, number[]>;
  readonly pointData: Map<string, { readonly components: string[]; readonly values: Float64Array }>;
}

export function readImage(bytes: Uint8Array): Image {
  const text = Buffer.from(bytes).toString('latin1');
  const open = '<AppendedData encoding="raw">';
  const start = text.indexOf('_', text.indexOf(open) + open.length) + 1;
  const end = text.lastIndexOf('</AppendedData>');
  const head = Buffer.from(bytes.subarray(0, start - 1)).toString('utf8');
  const parser = new XMLParser({
    ignoreAttributes: false,
    attributeNamePrefix: '',
    isArray: (name) => name === 'DataArray',
  });
  const { VTKFile: file } = parser.parse(`${head}</AppendedData></VTKFile>`, true);
  const { type, version, byte_order, header_type, ImageData: image } = file;
  if (type !== 'ImageData' || version !== '1.0' || byte_order !== 'LittleEndian' || header_type !== 'UInt64')
    throw new Error(`not such a file: ${type} ${version} ${byte_order} ${header_type}`);
  const list = (value: unknown) => String(value).trim().split(/\s+/).map(Number);
  const extent = list(image.WholeExtent);
  if (image.Piece.Extent !== image.WholeExtent) throw new Error('the piece is not the whole');
  const points = [0, 2, 4].reduce((product, a) => product * (extent[a + 1]! - extent[a]! + 1), 1);
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  let used = 0;
  const pointData = new Map<string, { components: string[]; values: Float64Array }>();
  for (const array of image.Piece.PointData.DataArray) {
    const width = { Float32: 4, Float64: 8 }[array.type as 'Float32' | 'Float64'];
    const at = start + Number(array.offset);
    const count = Number(array.NumberOfComponents) * points;
    if (Number(view.getBigUint64(at, true)) !== count * width) throw new Error(`${array.Name}: wrong number of bytes`);
    used += 8 + count * width;
    const values = Float64Array.from({ length: count }, (_, n) =>
      width === 4 ? view.getFloat32(at + 8 + 4 * n, true) : view.getFloat64(at + 8 + 8 * n, true),
    );
    pointData.set(array.Name, { components: [0, 1, 2].map((c) => array[`ComponentName${c}`]), values });
  }
  // Blocks stand one after the other, and nothing between them and the end but a line break.
  if (start + used + 1 !== end) throw new Error(`${end - start} bytes are appended; the arrays take ${used}`);
  return {
    extent,
    origin: list(image.Origin),
    spacing: list(image.Spacing),
    fieldData: new Map(image.FieldData.DataArray.map((a: Record<string, unknown>) => [a.Name, list(a['#text'])])),
    pointData,
  };
}
