import { closeSync, ftruncateSync, mkdirSync, openSync, readdirSync, renameSync, rmSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import { getSystemErrorMap } from 'node:util';
import { SnapshotFile } from '../files/hdf5.ts';
import { collection, framing, type ImageData, imageData, imageName, type Patch, patches } from '../files/vti.ts';
import { fileWords } from '../files/words.ts';
import { Refusal } from '../run/compare.ts';
import type { Team } from '../run/pool.ts';
import type { Progress } from '../run/progress.ts';
import { questionOf } from '../run/question.ts';
import { boxRegion, frameOf, planeRegion, takeSnapshots } from '../run/snapshots.ts';
import { VERSION } from '../run/version.ts';
import { loadScenario } from '../scenario/load.ts';
import type { Scenario } from '../scenario/model.ts';
import { planesShown } from '../scene/slices.ts';
import type { Slab, SnapshotFrame, SnapshotRegion } from '../trace/snapshots.ts';
import { partOf, sweepParts, unwritable, writeWhole } from './output.ts';

export const SNAPSHOT_FORMATS = ['vti', 'hdf5'] as const;
export const SNAPSHOT_REGIONS = ['planes', 'box', 'all'] as const;

export interface SnapshotOptions {
  readonly format: (typeof SNAPSHOT_FORMATS)[number];
  /** the scenario's planes (or one through the middle of the box where it has none), the box, or both */
  readonly region: (typeof SNAPSHOT_REGIONS)[number];
  /** at most so many, evenly over the run */
  readonly instants: number;
  /** every n-th cell along each axis; absent: as many as make files of handy size */
  readonly stride?: number;
}

/**
 * Both solvers' fields over time into a folder: `fields/` with a VTK image a region and instant and a collection a region,
 * or `fields.h5`. Values are written where they belong as they come.
 * @param json a scenario, as JSON.parse gives it
 * @returns what was written, for a person
 * @throws Refusal naming every problem of the scenario; Error naming the file that cannot be written
 */
export async function writeSnapshots(
  folder: string,
  team: Team,
  json: unknown,
  { format, region, instants, stride }: SnapshotOptions,
  onProgress: (progress: Progress) => void,
): Promise<string> {
  const loaded = loadScenario(json);
  if ('problems' in loaded) throw new Refusal(loaded.problems);
  const { scenario } = loaded;
  const question = questionOf(scenario);
  const planes = region === 'box' ? [] : scenario.planes.length > 0 ? scenario.planes : planesShown(scenario);
  const all = [
    ...planes.map((plane) => planeRegion(scenario, plane, stride)),
    ...(region === 'planes' ? [] : [boxRegion(scenario, stride)]),
  ];
  const words = fileWords(all.map(({ name }) => name));
  const regions = all.map((each, n) => ({ ...each, name: words[n]! }));
  const frame = frameOf(question, instants);
  const sink =
    format === 'vti'
      ? imageSink(join(folder, 'fields'), regions, frame)
      : await hdf5Sink(folder, scenario, regions, frame);
  try {
    await takeSnapshots(team, question, json, regions, frame, sink.take, onProgress);
    return sink.finish();
  } catch (error) {
    sink.discard();
    throw error;
  }
}

/** Where slabs go. Until `finish` nothing stands under its own name. */
interface Sink {
  take(region: number, slab: Slab): void;
  finish(): string;
  discard(): void;
}

/** Writes runs of bytes into what is to be a file, which is made, or stretched, as needed. */
function writePatches(path: string, list: readonly Patch[], flag: 'w' | 'r+', size?: number): void {
  try {
    const file = openSync(partOf(path), flag);
    try {
      if (size !== undefined) ftruncateSync(file, size);
      for (const { at, bytes } of list)
        for (let done = 0; done < bytes.length; ) done += writeSync(file, bytes, done, bytes.length - done, at + done);
    } finally {
      closeSync(file);
    }
  } catch (error) {
    throw unwritable(path, error);
  }
}

function imageSink(folder: string, regions: readonly SnapshotRegion[], frame: SnapshotFrame): Sink {
  try {
    mkdirSync(folder, { recursive: true });
  } catch (error) {
    throw unwritable(folder, error);
  }
  const files = regions.map((region) =>
    Array.from(frame.instants.E, (_, m) => {
      return { path: join(folder, imageName(region, m)), image: imageData(region, frame, m) };
    }),
  );
  const discard = () => {
    for (const { path } of files.flat()) rmSync(partOf(path), { force: true });
  };
  try {
    regions.forEach((region, n) => {
      for (const { path, image } of files[n]!) writePatches(path, framing(image, region, frame), 'w', image.size);
    });
  } catch (error) {
    discard();
    throw error;
  }
  return {
    take(n, slab) {
      files[n]!.forEach(({ path, image }: { path: string; image: ImageData }, m) => {
        writePatches(path, patches(image, regions[n]!, frame, slab, m), 'r+');
      });
    },
    finish() {
      // Where there is no room for these, what was there before stays.
      for (const region of regions) writeWhole(join(folder, `${region.name}.pvd`), collection(region, frame));
      try {
        regions.forEach((region, n) => {
          const own = new RegExp(`^${region.name}-\\d+\\.vti$`);
          for (const name of readdirSync(folder)) if (own.test(name)) rmSync(join(folder, name));
          for (const { path } of files[n]!) renameSync(partOf(path), path);
        });
      } catch (error) {
        throw unwritable(folder, error);
      }
      sweepParts(folder);
      return `${files.flat().length} images and ${regions.map(({ name }) => `${name}.pvd`).join(', ')} in ${folder}`;
    },
    discard,
  };
}

/** The system's own words out of the HDF5 library's account of what failed, which is long; its first line where there are none. */
function plainReason(error: unknown): unknown {
  if (!(error instanceof Error) || 'code' in error) return error;
  const [, reason] = /error message = '([^']+)'/.exec(error.message) ?? [];
  if (reason === undefined) return new Error(error.message.split('\n')[0]);
  const [code] = [...getSystemErrorMap().values()].find(([, words]) => words === reason.toLowerCase()) ?? [];
  return Object.assign(new Error(reason), { code });
}

async function hdf5Sink(
  folder: string,
  { title }: Scenario,
  regions: readonly SnapshotRegion[],
  frame: SnapshotFrame,
): Promise<Sink> {
  const hdf5 = await import('h5wasm/node');
  const module = await hdf5.ready;
  // Else the library tells of what fails on standard error, at length, and goes on.
  module.activate_throwing_error_handler();
  const path = join(folder, 'fields.h5');
  const part = partOf(path);
  const guarded = <T>(act: () => T): T => {
    try {
      return act();
    } catch (error) {
      throw unwritable(path, plainReason(error));
    }
  };
  guarded(() => mkdirSync(folder, { recursive: true }));
  const file = guarded(() => new hdf5.File(part, 'w'));
  const discard = () => {
    try {
      file.close();
    } catch {
      // What could not be written cannot be closed in good order either; it goes in any case.
    }
    rmSync(part, { force: true });
  };
  try {
    const content = guarded(() => new SnapshotFile(file, regions, frame, { title, program: `Fieldassay ${VERSION}` }));
    return {
      take: (n, slab) => guarded(() => content.write(n, slab)),
      finish() {
        guarded(() => {
          file.close();
          renameSync(part, path);
        });
        return path;
      },
      discard,
    };
  } catch (error) {
    discard();
    throw error;
  }
}
