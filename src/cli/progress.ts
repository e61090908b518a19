import cliProgress from 'cli-progress';
import type { Progress } from '../run/progress.ts';

/** A progress line on standard error: a moving bar on a terminal, one line a stage elsewhere; none when quiet. */
export function progressLine(quiet: boolean): { show: (progress: Progress) => void; end: () => void } {
  if (quiet) return { show: () => {}, end: () => {} };
  if (!process.stderr.isTTY) {
    let last = '';
    return {
      show: ({ stage, secondsLeft }) => {
        if (stage !== last) process.stderr.write(`${stage}${leftText(secondsLeft)} …\n`);
        last = stage;
      },
      end: () => {},
    };
  }
  const bar = new cliProgress.SingleBar({
    format: '{bar} {percentage} %  {stage}{left}',
    barCompleteChar: '━',
    barIncompleteChar: '─',
    barsize: 24,
    hideCursor: true,
    clearOnComplete: true,
    stream: process.stderr,
  });
  bar.start(1, 0, { stage: '', left: '' });
  return {
    show: ({ stage, fraction, secondsLeft }) =>
      bar.update(fraction, {
        stage,
        left: leftText(secondsLeft),
      }),
    end: () => bar.stop(),
  };
}

const leftText = (seconds: number | undefined): string =>
  seconds === undefined ? '' : `, ${Math.max(1, Math.round(seconds))} s left`;
