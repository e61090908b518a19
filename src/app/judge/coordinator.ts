import { readForeignTraces } from '../../files/foreignTraces.ts';
import { judgeTraces } from '../../run/judge/judgeTraces.ts';
import { judgeQuestion } from '../../run/judge.ts';
import { heed } from '../heed.ts';
import { type JudgeReport, requestSchema } from './messages.ts';

/** The worker that judges a file: it reads and computes with the very code of the command line. */
const tell = (report: JudgeReport) => postMessage(report);

heed(
  requestSchema,
  ({ scenario: input, name, bytes, map, cellSize }) => {
    const { scenario, json, places } = judgeQuestion(input, cellSize);
    const { traces, notes } = readForeignTraces(name, bytes, map, places);
    const judged = judgeTraces(scenario, json, traces, name, notes, (stage, fraction) =>
      tell({ kind: 'progress', stage, fraction }),
    );
    tell({ kind: 'judged', judged });
  },
  ({ message }) => tell({ kind: 'refused', message }),
);
