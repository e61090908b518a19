/** Plans off the page's own thread. Predictions are kept, so that another tolerance is planned from what is known. */
import { threadsAvailable } from '#platform';
import { withTeam } from '../../run/compare.ts';
import { type Given, given } from '../../run/given.ts';
import { cellRate, type PreparedGoal, planOf, prepareGoal } from '../../run/plan.ts';
import { knownSetups, PlanMemory, searchPlan, WALLS } from '../../run/planSearch.ts';
import { heed } from '../heed.ts';
import { aboutOf, type Report, type Request, requestSchema } from './messages.ts';

const tell = (report: Report) => postMessage(report);

/** Tolerances that are planned for unasked once there is time, so that what is asked next is known. */
const AHEAD = [0.1, 0.05, 0.02, 0.01, 0.005];

let memory = new PlanMemory();
let about = '';
let newest: Request | undefined;
let busy = false;
let speed: Promise<number> | undefined;

heed(
  requestSchema,
  async (request) => {
    newest = request;
    if (!busy) await work();
  },
  ({ message }, data) => tell({ kind: 'refused', id: Number((data as Partial<Request> | null)?.id), message }),
);

/** Lets newer messages be heard: a search is long and unbroken. */
const breathe = () => new Promise((next) => setTimeout(next));

async function work(): Promise<void> {
  busy = true;
  for (let request = newest; request !== undefined; request = newest === request ? undefined : newest) {
    await answer(request);
    await breathe();
  }
  busy = false;
}

async function answer(request: NonNullable<typeof newest>): Promise<void> {
  const { id, wanted } = request;
  try {
    const asked = given(wanted.scenario);
    const prepared = prepareGoal(asked, {
      tolerance: wanted.tolerance,
      ...(wanted.at === undefined ? {} : { at: wanted.at }),
      ...(wanted.distance === undefined ? {} : { distance: wanted.distance }),
      ...(wanted.band === undefined ? {} : { band: wanted.band }),
    });
    if (aboutOf(wanted) !== about) {
      memory = new PlanMemory();
      about = aboutOf(wanted);
    }
    const { scenario } = given(prepared.base);
    const started = performance.now();
    const found = searchPlan(scenario, prepared.goal, { ...prepared.frame, walls: wanted.walls }, memory);
    const searchSeconds = (performance.now() - started) / 1000;
    speed ??= withTeam(threadsAvailable(), undefined, (team) => cellRate(team, asked.scenario));
    const cellsPerSecond = await speed;
    tell({
      kind: 'plan',
      id,
      plan: planOf(asked, prepared, found, { cellsPerSecond, ownRate: wanted.ownRate, searchSeconds }),
    });
    tellKnown(scenario, prepared);
    await lookAhead(request, asked, prepared);
  } catch (error) {
    tell({ kind: 'refused', id, message: (error as Error).message });
  }
}

function tellKnown(scenario: Given['scenario'], { goal, frame }: PreparedGoal): void {
  tell({ kind: 'known', about, setups: knownSetups(scenario, goal, { ...frame, walls: WALLS }, memory) });
}

/** Plans for other tolerances while nothing else is asked. */
async function lookAhead(request: typeof newest, { scenario }: Given, prepared: PreparedGoal): Promise<void> {
  for (const tolerance of AHEAD) {
    await breathe();
    if (newest !== request) return;
    const before = memory.walls.size;
    searchPlan(scenario, { ...prepared.goal, tolerance }, prepared.frame, memory);
    if (memory.walls.size > before) tellKnown(scenario, prepared);
  }
}
