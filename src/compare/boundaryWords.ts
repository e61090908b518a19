import { z } from 'zod';

/** Outer boundaries by their names in a scenario, in the words of a report. */
const WORDS = {
  pec: 'perfect conductor',
  pmc: 'perfect magnetic conductor',
  mur1: 'Mur, first order',
  mur2: 'Mur, second order',
  higdon2: 'Higdon, second order',
  liao: 'Liao, second order',
  cpml: 'CPML',
  splitPml: 'split-field PML',
} as const;
type BoundaryType = keyof typeof WORDS;

/** A boundary in a result: of its parameters only the layers, where it has some. */
export const boundarySchema = z
  .object({ type: z.enum(Object.keys(WORDS) as [BoundaryType, ...BoundaryType[]]), layers: z.int().optional() })
  .describe('as in a scenario file');

/** A boundary in a few words: "CPML, 8 layers". */
export function boundaryText({ type, layers }: z.infer<typeof boundarySchema>): string {
  return layers === undefined ? WORDS[type] : `${WORDS[type]}, ${layers} layer${layers === 1 ? '' : 's'}`;
}
