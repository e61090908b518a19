import { expect, test } from 'vitest';
import { drawn } from '../hostile/drawn.ts';
import { fuzzBaselines, fuzzMaps, fuzzPoints, fuzzTables, type Seen } from './fuzzTables.ts';

const counted = (run: (seen: Seen) => void) => {
  const seen = { taken: 0, refused: 0 };
  run(seen);
  console.log(seen);
  expect(Math.min(seen.taken, seen.refused)).toBeGreaterThan(20);
};

test('tables of currents are taken or refused in words: 1000 drawn ones', () => {
  counted((seen) => drawn(fuzzTables(seen), 71, 1000));
});

test('points are read or refused in words: 1000 drawn files', () => {
  counted((seen) => {
    const { property, end } = fuzzPoints(seen);
    try {
      drawn(property, 72, 1000);
    } finally {
      end();
    }
  });
});

test('earlier results are held against or refused: 1000 drawn ones', () => {
  counted((seen) => drawn(fuzzBaselines(seen), 73, 1000));
});

test('maps of traces are taken or refused in words: 1000 drawn ones', () => {
  counted((seen) => drawn(fuzzMaps(seen), 74, 1000));
});
