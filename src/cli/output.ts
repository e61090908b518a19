import { mkdirSync, realpathSync, renameSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';

/**
 * Writes a file so that nobody ever reads half of it: under a temporary name beside its place, then renamed. A link stays
 * one: the file it leads to is replaced. What is no file of a disk (a device, a pipe) is written to as it is, since a
 * rename would put a file in its place.
 * @throws Error that names the file when the folder is missing, read-only or full
 */
export function writeWhole(path: string, content: string | Uint8Array): void {
  try {
    const there = statSync(path, { throwIfNoEntry: false });
    if (there && !there.isFile()) writeFileSync(path, content);
    else replaceFile(there ? realpathSync(path) : path, content);
  } catch (error) {
    throw unwritable(path, error);
  }
}

function replaceFile(path: string, content: string | Uint8Array): void {
  const temporary = join(dirname(path), `.${basename(path)}.${process.pid}.part`);
  try {
    writeFileSync(temporary, content);
    renameSync(temporary, path);
  } catch (error) {
    rmSync(temporary, { force: true });
    throw error;
  }
}

/** The error of a file that cannot be written, which it names. */
export const unwritable = (path: string, error: unknown): Error =>
  new Error(`${path} could not be written: ${reasonOf(error)}; choose another place for it`);

/** Writes several files into a folder, which is made where it is missing. */
export function writeFolder(folder: string, files: Readonly<Record<string, string | Uint8Array>>): void {
  try {
    mkdirSync(folder, { recursive: true });
  } catch (error) {
    throw new Error(`the folder ${folder} could not be made: ${reasonOf(error)}; choose another place for it`);
  }
  for (const [name, content] of Object.entries(files)) writeWhole(join(folder, name), content);
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

/** A word of a command line as one would type it. */
export const quoted = (word: string): string => (/^[\w./-]+$/.test(word) ? word : JSON.stringify(word));
