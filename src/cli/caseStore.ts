import { mkdirSync, readdirSync, readFileSync, rmSync, statSync } from 'node:fs';
import { join } from 'node:path';
import type { CaseStore } from '../run/survey.ts';
import { writeWhole } from './output.ts';

/** Finished cases as files of a folder, which is made when the first is kept. */
export function folderStore(folder: string): CaseStore {
  const path = (hash: string) => join(folder, `${hash}.json`);
  return {
    load(hash) {
      try {
        return readFileSync(path(hash), 'utf8');
      } catch {
        // Not there, or not to be read: it is run, and where it cannot be kept either the case fails.
        return null;
      }
    },
    save(hash, text) {
      mkdirSync(folder, { recursive: true });
      writeWhole(path(hash), text);
    },
  };
}

/** A file that has been written for so long, milliseconds, is not being written any more. */
const ABANDONED = 60_000;

/** Removes what processes that were killed had begun to write; what others are writing into the folder now stays. */
export function sweepStore(folder: string): void {
  let names: string[] = [];
  try {
    names = readdirSync(folder);
  } catch {
    // A folder that is not there holds no remains.
  }
  for (const name of names)
    if (/^\.[0-9a-f]+\.json\.\d+\.part$/.test(name)) {
      const path = join(folder, name);
      const written = statSync(path, { throwIfNoEntry: false })?.mtimeMs ?? 0;
      if (Date.now() - written > ABANDONED) rmSync(path, { force: true });
    }
}
