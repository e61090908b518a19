import { mkdirSync, readFileSync } from 'node:fs';
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
