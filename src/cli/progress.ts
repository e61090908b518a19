import cliProgress from 'cli-progress';
import type { Progress } from '../run/progress.ts';
import { printable } from '../scenario/text.ts';

export interface ProgressLine {
  show(progress: Progress): void;
  /** writes a line of its own, above the bar where there is one */
  say(text: string): void;
  end(): void;
}

/** A progress line on standard error; what is said is made printable: a moving bar on a terminal, one line a stage elsewhere; none when quiet. */
export function progressLine(quiet: boolean): ProgressLine {
  if (quiet) return { show: () => {}, say: () => {}, end: () => {} };
  if (!process.stderr.isTTY) {
    let last = '';
    return {
      show: ({ stage, secondsLeft }) => {
        if (stage !== last) process.stderr.write(`${printable(stage)}${leftText(secondsLeft)} …\n`);
        last = stage;
      },
      say: (text) => process.stderr.write(`${printable(text)}\n`),
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
        stage: printable(stage),
        left: leftText(secondsLeft),
      }),
    say: (text) => process.stderr.write(`\r\x1b[K${printable(text)}\n`),
    end: () => bar.stop(),
  };
}

const leftText = (seconds: number | undefined): string =>
  seconds === undefined ? '' : `, ${Math.max(1, Math.round(seconds))} s left`;
