/** Packs the fields of the planes into files for other programs, off the page's own thread. */
import { type Zippable, zipSync } from 'fflate';
import { SnapshotFile } from '../files/hdf5.ts';
import { collection, framing, imageData, imageName, patches } from '../files/vti.ts';
import { CHANNELS } from '../run/planes.ts';
import { VERSION } from '../run/version.ts';
import { SIDES, type Side, type Slab, type SnapshotFrame, type SnapshotRegion } from '../trace/snapshots.ts';

/** A plane's film: data[(frame·CHANNELS + channel)·cells + cell], and where there is no exact field to give. */
export interface PackedFilm {
  readonly region: SnapshotRegion;
  readonly grid: Float32Array;
  readonly exact: Float32Array;
  readonly blank: Uint8Array;
}

export interface PackRequest {
  readonly format: 'vti' | 'hdf5';
  readonly title: string;
  readonly frame: SnapshotFrame;
  readonly films: readonly PackedFilm[];
}

export type PackAnswer =
  | { readonly bytes: Uint8Array<ArrayBuffer> }
  /** why there are none */
  | { readonly failed: string };

addEventListener('message', async ({ data }: MessageEvent<PackRequest>) => {
  try {
    const bytes = data.format === 'vti' ? images(data) : await hdf5(data);
    postMessage({ bytes } satisfies PackAnswer, { transfer: [bytes.buffer] });
  } catch (error) {
    postMessage({ failed: (error as Error)?.message ?? String(error) } satisfies PackAnswer);
  }
});

/** A layer of a film as a slab. */
function slabOf(film: PackedFilm, frame: SnapshotFrame, side: Side, layer: number): Slab {
  const [nx, rows, nz] = film.region.counts;
  const { count } = frame.instants;
  const points = nx * rows;
  const values = new Float64Array(points * 6 * count);
  for (let p = 0; p < points; p++) {
    const cell = layer * points + p;
    const missing = side === 'exact' && film.blank[cell] === 1;
    for (let c = 0; c < 6; c++)
      for (let m = 0; m < count; m++)
        values[(p * 6 + c) * count + m] = missing ? Number.NaN : film[side][(m * CHANNELS + c) * points * nz + cell]!;
  }
  return { side, layer, row: 0, rows, values };
}

/** All slabs of a film, one at a time. */
function* slabsOf(film: PackedFilm, frame: SnapshotFrame): Generator<Slab> {
  for (const side of SIDES)
    for (let layer = 0; layer < film.region.counts[2]; layer++) yield slabOf(film, frame, side, layer);
}

/** An archive with an image a plane and instant, and a collection a plane. */
function images({ frame, films }: PackRequest): Uint8Array<ArrayBuffer> {
  const files: Zippable = {};
  for (const film of films) {
    const { region } = film;
    const all = Array.from(frame.instants.E, (_, m) => {
      const image = imageData(region, frame, m);
      return { image, bytes: new Uint8Array(image.size) };
    });
    for (const { image, bytes } of all)
      for (const { at, bytes: run } of framing(image, region, frame)) bytes.set(run, at);
    for (const slab of slabsOf(film, frame))
      all.forEach(({ image, bytes }, m) => {
        for (const { at, bytes: run } of patches(image, region, frame, slab, m)) bytes.set(run, at);
      });
    all.forEach(({ bytes }, m) => {
      files[imageName(region, m)] = [bytes, { level: 1 }];
    });
    files[`${region.name}.pvd`] = new TextEncoder().encode(collection(region, frame));
  }
  return zipSync(files) as Uint8Array<ArrayBuffer>;
}

async function hdf5({ title, frame, films }: PackRequest): Promise<Uint8Array<ArrayBuffer>> {
  const library = await import('h5wasm');
  await library.ready;
  const name = 'fields.h5';
  const file = new library.File(name, 'w');
  const regions = films.map(({ region }) => region);
  const content = new SnapshotFile(file, regions, frame, { title, program: `Fieldassay ${VERSION}` });
  films.forEach((film, n) => {
    for (const slab of slabsOf(film, frame)) content.write(n, slab);
  });
  file.close();
  return library.FS!.readFile(name) as Uint8Array<ArrayBuffer>;
}
