import { mkdirSync, readdirSync, readFileSync, rmSync } from 'node:fs';
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

/** Removes what processes that were killed had begun to write. */
export function sweepStore(folder: string): void {
  let names: string[] = [];
  try {
    names = readdirSync(folder);
  } catch {
    // A folder that is not there holds no remains.
  }
  for (const name of names)
    if (/^\.[0-9a-f]+\.json\.\d+\.part$/.test(name)) rmSync(join(folder, name), { force: true });
}
