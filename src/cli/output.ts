import {
  accessSync,
  constants,
  mkdirSync,
  readdirSync,
  realpathSync,
  renameSync,
  rmSync,
  statSync,
  writeFileSync,
} from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { formatQuantity } from '../elementary/quantity.ts';
import { Interrupted } from './interrupted.ts';

type Content = string | Uint8Array;

/**
 * Writes a file so that nobody ever reads half of it: under a temporary name beside its place, then renamed. A link stays
 * one: the file it leads to is replaced. What is no file of a disk (a device, a pipe) is written to as it is, since a
 * rename would put a file in its place.
 * @throws Error that names the file when the folder is missing, read-only or full
 */
export function writeWhole(path: string, content: Content): void {
  writeTogether([[path, content]]);
}

/** Writes several files: none is put into its place before all of them are on the disk, so that a full one changes nothing. */
function writeTogether(files: readonly (readonly [path: string, content: Content])[]): void {
  const staged: Staged[] = [];
  try {
    for (const [path, content] of files) staged.push(guarded(path, content, () => stage(path, content)));
    for (const { path, content, place } of staged) guarded(path, content, place);
  } catch (error) {
    for (const { discard } of staged) discard();
    throw error;
  }
}

/** A file that is on the disk, but not in its place yet. */
interface Staged {
  readonly path: string;
  readonly content: Content;
  place(): void;
  discard(): void;
}

function stage(path: string, content: Content): Staged {
  const there = statSync(path, { throwIfNoEntry: false });
  if (there?.isDirectory()) throw failure('EISDIR');
  if (there && !there.isFile()) return { path, content, place: () => writeFileSync(path, content), discard: () => {} };
  const target = there ? realpathSync(path) : path;
  const temporary = partOf(target);
  const discard = () => rmSync(temporary, { force: true });
  try {
    writeFileSync(temporary, content);
  } catch (error) {
    discard();
    throw error;
  }
  return { path, content, place: () => renameSync(temporary, target), discard };
}

/** The name under which a file is written before it is put into its place. */
export const partOf = (path: string): string => join(dirname(path), `.${basename(path)}.${process.pid}.part`);

/** A file that has been written for so long, milliseconds, is not being written any more. */
const ABANDONED = 60_000;

/** Removes what processes that were killed had begun to write in a folder; what others are writing there now stays. */
export function sweepParts(folder: string): void {
  let names: string[] = [];
  try {
    names = readdirSync(folder);
  } catch {
    // A folder that is not there holds no remains.
  }
  for (const name of names)
    if (/^\..+\.\d+\.part$/.test(name)) {
      const path = join(folder, name);
      const written = statSync(path, { throwIfNoEntry: false })?.mtimeMs ?? 0;
      if (Date.now() - written > ABANDONED) rmSync(path, { force: true });
    }
}

function guarded<T>(path: string, content: Content, act: () => T): T {
  try {
    return act();
  } catch (error) {
    throw unwritable(path, error, Buffer.byteLength(content));
  }
}

const failure = (code: string): Error => Object.assign(new Error(code), { code });

/** No room: it helps to know how much is asked for. */
const NO_ROOM = ['ENOSPC', 'EFBIG', 'EDQUOT'];

/** The error of a file that cannot be written, which it names. @param size bytes of the file, where they are known */
export function unwritable(path: string, error: unknown, size?: number): Error {
  const isSize = size !== undefined && NO_ROOM.includes((error as NodeJS.ErrnoException)?.code ?? '');
  const asked = isSize ? ` (it takes ${formatQuantity(size, 'B')})` : '';
  return new Error(`${path} could not be written: ${reasonOf(error)}${asked}; choose another place for it`);
}

const unmade = (folder: string, error: unknown): Error =>
  new Error(`the folder ${folder} could not be made: ${reasonOf(error)}; choose another place for it`);

/** Writes several files into a folder, which is made where it is missing: all of them or, where one cannot be written, none. */
export function writeFolder(folder: string, files: Readonly<Record<string, Content>>): void {
  try {
    mkdirSync(folder, { recursive: true });
  } catch (error) {
    throw unmade(folder, error);
  }
  writeTogether(Object.entries(files).map(([name, content]) => [join(folder, name), content]));
  sweepParts(folder);
}

/**
 * Looks whether files could be written, before a long run makes what is to be put there. A disk may still fill up meanwhile.
 * @param folders which are made where they are missing
 * @param files whose folders are not, unless they are among `folders`
 * @throws Error that names the first that could not be
 */
export function refuseUnwritable(
  folders: readonly (string | undefined)[],
  files: readonly (string | undefined)[],
): void {
  for (const folder of folders) if (folder !== undefined) refuseFolder(folder);
  const made = folders.flatMap((folder) => (folder === undefined ? [] : [resolve(folder)]));
  for (const file of files) if (file !== undefined && !made.includes(dirname(resolve(file)))) refuseFile(file);
}

const MAY_ADD = constants.W_OK | constants.X_OK;

function refuseFolder(folder: string): void {
  const there = (place: string) => statSync(place, { throwIfNoEntry: false });
  let place = resolve(folder);
  let isThere = false;
  try {
    isThere = there(place)?.isDirectory() === true;
    while (!there(place)) place = dirname(place);
    if (!there(place)?.isDirectory()) throw failure('EEXIST');
    accessSync(place, MAY_ADD);
  } catch (error) {
    throw isThere ? unwritable(folder, error) : unmade(folder, error);
  }
}

function refuseFile(path: string): void {
  try {
    const there = statSync(path, { throwIfNoEntry: false });
    if (there?.isDirectory()) throw failure('EISDIR');
    if (there && !there.isFile()) accessSync(path, constants.W_OK);
    else accessSync(dirname(there ? realpathSync(path) : path), MAY_ADD);
  } catch (error) {
    throw unwritable(path, error);
  }
}

/**
 * Keeps what was found and tells of it; also where it cannot be kept, since finding it may have taken long.
 * @param keep adds to `written` what was written, as it is done
 * @throws what `keep` throws, once it is told what was found
 */
export async function keepAndTell(
  keep: (written: string[]) => void | Promise<void>,
  tell: (written: readonly string[]) => string,
): Promise<void> {
  const written: string[] = [];
  try {
    await keep(written);
  } catch (error) {
    throw error instanceof Interrupted && written.length > 0
      ? new Interrupted('stopped; what was written by then is whole')
      : error;
  } finally {
    process.stdout.write(tell(written));
  }
}

const REASONS: Readonly<Record<string, string>> = {
  ENOENT: 'there is no such file or folder',
  EACCES: 'permission denied',
  EPERM: 'permission denied',
  EROFS: 'the file system is read-only',
  ENOSPC: 'the disk is full',
  EISDIR: 'it is a folder',
  EFBIG: 'it is larger than a file may be here',
  EDQUOT: 'the quota is used up',
  ENOTDIR: 'a part of the path is not a folder',
  EEXIST: 'a file of that name is in the way',
};

/** What went wrong, in words. */
export function reasonOf(error: unknown): string {
  const code = (error as NodeJS.ErrnoException)?.code;
  return (code && REASONS[code]) ?? (error instanceof Error ? error.message : String(error));
}
