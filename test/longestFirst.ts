import type { TestSpecification } from 'vitest/node';

/**
 * Seconds of the files that take longest, measured; whoever is not here takes less than any of them. They say in which
 * order files start and nothing else, so they need not be exact.
 */
const SECONDS: Readonly<Record<string, number>> = {
  'page/page': 150,
  'queue/queue': 100,
  'cli/survey': 50,
  'verify/lattice': 48,
  'page/places': 40,
  'cli/cli': 43,
  'library/package': 40,
  'cli/help': 30,
  'verify/trust': 29,
  'verify/errorLevels': 24,
  'cli/failures': 24,
  'cli/judge': 23,
  'verify/radiation': 21,
  'verify/plan': 21,
  'verify/nearToFar': 18,
  'verify/judge': 17,
  'verify/remedy': 17,
  'verify/freeSpace': 17,
  'verify/wallLevels': 17,
  'verify/retarded': 15,
  'cli/outputs': 14,
  'page/judge': 12,
  'fdtd/identity': 11,
  'verify/budget': 10,
  'verify/ladder': 10,
  'cli/shards': 10,
  'fdtd/threads': 10,
  'retarded/history': 9,
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
