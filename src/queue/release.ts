import { resultSchemaHash } from '../run/surveyCases.ts';
import { VERSION } from '../run/version.ts';

/** What has to be the same on both sides of a queue. */
export interface Release {
  readonly version: string;
  readonly resultSchema: string;
}

export const ownRelease = async (): Promise<Release> => ({ version: VERSION, resultSchema: await resultSchemaHash() });

export const releaseText = ({ version, resultSchema }: Release): string =>
  `Fieldassay ${version} (results ${resultSchema})`;
