import { boundaryText } from '../compare/boundaryWords.ts';
import { decibels } from '../elementary/elementary.ts';
import { formatDecibels, formatQuantity } from '../elementary/quantity.ts';
import { FACES, type Scenario } from '../scenario/model.ts';
import type { Answers } from './answers.ts';
import type { FreeSpacePlan } from './freeSpace.ts';
import type { Places } from './places.ts';
import type { Question } from './question.ts';

/** The walls in a few words: "CPML, 10 layers", or face by face where they differ. */
export function describeBoundary({ grid }: Scenario): string {
  const walls = FACES.map((face) => boundaryText(grid.boundary[face]));
  if (walls.every((wall) => wall === walls[0])) return walls[0]!;
  return FACES.map((face, f) => `${face} ${walls[f]}`).join('; ');
}

/** What should be known of a comparison though nothing was refused. */
export function notesOf(question: Question, places: Places, free: FreeSpacePlan | null, answers: Answers): string[] {
  const { scenario, steps } = question;
  const notes = [...scenario.notes];
  notes.push(
    free
      ? `Free space is ${free.description}; what it leaves of reflections is below ` +
          `${formatDecibels(decibels(free.floor))} of the exact field.`
      : 'The free-space run does not fit into memory: boundary and lattice are known by their sum alone.',
  );
  if (answers.free?.outcome === 'still')
    notes.push(
      `The grid without walls was still after ${answers.free.stepsMarched} of ${steps} steps; its last values were held.`,
    );
  if (places.inside.length === 0)
    notes.push(
      `There is no observer inside the box: the budget is pooled over ${places.budgetCells.length / 3} samples of the volume.`,
    );
  const thin = places.volume.underfilled.filter(
    ({ of, from }) => of === 'distance to the source' && from >= scenario.grid.mask,
  );
  if (thin.length > 0)
    notes.push(
      `Too few cells to be judged lie ${thin.map(({ from, to }) => `${formatQuantity(from, 'm')} to ${formatQuantity(to, 'm')}`).join(', ')} from the source.`,
    );
  for (const { name, waveform } of scenario.sources)
    if (waveform.expectedOrder.order < 2)
      notes.push(
        `${name}: ${waveform.expectedOrder.reason}; expect order ${waveform.expectedOrder.order} of the grid, not 2.`,
      );
  return notes;
}
