import type { TestSpecification } from 'vitest/node';

/**
 * Seconds of the files that take longest, measured; whoever is not here takes less than any of them. They say in which
 * order files start and nothing else, so they need not be exact.
 */
const SECONDS: Readonly<Record<string, number>> = {
  'queue/queue': 125,
  'page/page': 113,
  'library/package': 63,
  'page/places': 46,
  'verify/lattice': 44,
  'cli/cli': 41,
  'cli/survey': 38,
  'verify/everySource': 36,
  'cli/help': 34,
  'cli/failures': 31,
  'cli/judge': 20,
  'verify/trust': 19,
  'verify/plan': 18,
  'verify/radiation': 18,
  'verify/freeSpace': 17,
  'page/judge': 16,
  'verify/judge': 16,
  'page/hostile': 15,
  'cli/outputs': 14,
  'verify/remedy': 13,
  'fdtd/identity': 12,
  'scenario/waveforms': 11,
  'cli/shards': 10,
  'verify/errorLevels': 10,
  'verify/nearToFar': 10,
  'cli/plan': 8,
  'verify/budget': 8,
  'verify/walls': 8,
  'fdtd/threads': 8,
  'verify/ladder': 7,
};

/**
 * Files in the order in which workers take them: the longest first, so that none of them starts when the others are done
 * and leaves all processors but one idle. A fresh clone has no times of an earlier run to go by. Graham 1969: at worst a
 * third longer than the best order.
 */
export class LongestFirst {
  async sort(files: TestSpecification[]): Promise<TestSpecification[]> {
    const seconds = ({ moduleId }: TestSpecification) =>
      SECONDS[/([^/]+\/[^/]+)\.test\.ts$/.exec(moduleId)?.[1] ?? ''] ?? 0;
    return [...files].sort((one, other) => seconds(other) - seconds(one));
  }

  async shard(): Promise<TestSpecification[]> {
    throw new Error('--shard is not supported: files are put in order, not dealt out to machines');
  }
}
