/** Predicts off the page's own thread: nothing is run. */
import { z } from 'zod';
import { type Foresight, foresee } from '../run/foresee.ts';
import { loadScenario } from '../scenario/load.ts';
import { heed } from './heed.ts';

const requestSchema = z.object({ scenario: z.unknown() });
export type Foretell = z.infer<typeof requestSchema>;

export type Foretold = Foresight | { readonly failed: string };

const tell = (what: Foretold) => postMessage(what);

heed(
  requestSchema,
  ({ scenario }) => {
    const loaded = loadScenario(scenario);
    tell('scenario' in loaded ? foresee(loaded.scenario) : { failed: loaded.problems[0]!.message });
  },
  ({ message }) => tell({ failed: message }),
);
