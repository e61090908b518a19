import { packProblem } from '../fdtd/pack.ts';
import type { GridProblem } from '../fdtd/problem.ts';
import { callOff, type GridResult, type GridSetup, prepareGridRun } from '../fdtd/run.ts';
import type { Team } from './pool.ts';

/**
 * Marches a grid problem with several threads of a team, one of which leads. Runs of several threads must not be started
 * beside each other: their leaders could fill the team and wait for each other's followers.
 * @param stillLevel end the run when no sample moves more than this fraction of its peak any longer; null: never
 * @throws RangeError where the problem cannot be run; OutOfMemory; WorkerDied
 */
export async function runGrid(
  team: Team,
  problem: GridProblem,
  stillLevel: number | null,
  onSteps: (steps: number) => void,
  threads = team.threads,
): Promise<GridResult> {
  const onEvent = (steps: unknown) => onSteps(steps as number);
  // A memory of one thread need not be shared, which a page that is not isolated could not.
  if (threads === 1) return await team.run('marchGrid', [packProblem(problem), stillLevel], onEvent);
  const {
    problem: _,
    region: __,
    ...prepared
  } = prepareGridRun(problem, { threads, ...(team.gridMemory ? { memory: team.gridMemory } : {}) });
  team.gridMemory = prepared.setup.memory;
  const leader = team.run('leadGrid', [packProblem(problem), prepared, stillLevel], onEvent);
  return await withFollowers(team, prepared.setup, leader);
}

/**
 * Gives a leader its followers. Where one of them is lost, the others are called off, and have left when this rejects: a
 * thread that went on waiting would be missing in the run after it.
 * @throws WorkerDied
 */
export async function withFollowers<T>(team: Team, setup: GridSetup, leader: Promise<T>): Promise<T> {
  const followers = Array.from({ length: setup.threads - 1 }, () => team.run('followGrid', [setup]));
  const all = [leader, ...followers] as const;
  for (const one of all) one.catch(() => callOff(setup));
  await Promise.allSettled(all);
  await Promise.all(followers);
  return await leader;
}
