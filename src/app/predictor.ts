/** Predicts off the page's own thread: nothing is run. */
import { type Foresight, foresee } from '../run/foresee.ts';
import { loadScenario } from '../scenario/load.ts';

export interface Foretell {
  readonly scenario: unknown;
}

export type Foretold = Foresight | { readonly failed: string };

addEventListener('message', ({ data }: MessageEvent<Foretell>) => {
  postMessage(foretell(data.scenario));
});

function foretell(json: unknown): Foretold {
  try {
    const loaded = loadScenario(json);
    return 'scenario' in loaded ? foresee(loaded.scenario) : { failed: loaded.problems[0]!.message };
  } catch (error) {
    return { failed: (error as Error).message };
  }
}
