import { readForeignTraces } from '../../files/foreignTraces.ts';
import { judgeTraces } from '../../run/judge/judgeTraces.ts';
import { judgeQuestion } from '../../run/judge.ts';
import { Refusal } from '../../run/refusal.ts';
import type { JudgeReport, JudgeRequest } from './messages.ts';

/** The worker that judges a file: it reads and computes with the very code of the command line. */
const tell = (report: JudgeReport) => postMessage(report);

addEventListener('message', ({ data }: MessageEvent<JudgeRequest>) => {
  const { scenario: input, name, bytes, map, cellSize } = data;
  try {
    const { scenario, json, places } = judgeQuestion(input, cellSize);
    const { traces, notes } = readForeignTraces(name, bytes, map, places);
    const judged = judgeTraces(scenario, json, traces, name, notes, (stage, fraction) =>
      tell({ kind: 'progress', stage, fraction }),
    );
    tell({ kind: 'judged', judged });
  } catch (error) {
    if (!(error instanceof Refusal || error instanceof RangeError)) throw error;
    tell({ kind: 'refused', message: error.message });
  }
});
