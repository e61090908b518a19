import type { z } from 'zod';
import type { sourceSchema } from '../schema.ts';

/** What a scenario is read for. */
export type Asked = 'time' | 'frequency';

/** A source as the schema lets it through: in SI units, without its defaults. */
export type GivenSource = z.output<typeof sourceSchema>;
export type GivenWire = Extract<GivenSource, { type: 'wire' }>;
export type GivenWaveform = NonNullable<GivenSource['current']['waveform']>;

/** What currents are held against. */
export interface CurrentRules {
  readonly allowJump: boolean;
  /** s; undefined where the file's own is refused */
  readonly duration: number | undefined;
  readonly asked: Asked;
  readonly notes: string[];
}
