import { describe, expect, test } from 'vitest';
import { withTables } from '../../src/files/tables.ts';

const scenario = (current: object) => ({ title: 'T', sources: [{ type: 'wire', current }] });
const read = (text: string) => (file: string, key: string) => {
  expect([file, key.endsWith('.file')]).toEqual(['pulse.csv', true]);
  return text;
};

describe('tables that a scenario names as files', () => {
  test('a waveform’s samples take the place of its file', () => {
    const given = scenario({ profile: 'uniform', waveform: { type: 'table', file: 'pulse.csv', delay: 1e-9 } });
    expect(withTables(given, read('t,I\n0,0\n1e-9,0.5\n2e-9,0\n'))).toEqual(
      scenario({
        profile: 'uniform',
        waveform: {
          type: 'table',
          delay: 1e-9,
          samples: [
            [0, 0],
            [1e-9, 0.5],
            [2e-9, 0],
          ],
        },
      }),
    );
  });

  test('a sampled current gets its arc lengths from the header', () => {
    const given = scenario({ profile: 'sampled', file: 'pulse.csv' });
    expect(withTables(given, read('t,0,0.05\r\n0,0,0\r\n1e-9,0.5,-1\r\n'))).toEqual(
      scenario({
        profile: 'sampled',
        positions: [0, 0.05],
        samples: [
          [0, 0, 0],
          [1e-9, 0.5, -1],
        ],
      }),
    );
  });

  test('a sampled current by frequency: two columns for each arc length', () => {
    const given = scenario({ profile: 'sampled', file: 'pulse.csv' });
    expect(withTables(given, read('f,0Re,0Im,0.05Re,0.05 Im\n1e9,1,2,3,4\n'))).toEqual(
      scenario({ profile: 'sampled', positions: [0, 0.05], phasors: [[1e9, 1, 2, 3, 4]] }),
    );
  });

  test('what is no scenario, names no file or has samples already is left as it is', () => {
    const never = () => {
      throw new Error('nothing is to be read');
    };
    for (const value of [
      null,
      3,
      [],
      {},
      { sources: 3 },
      { sources: [null, { current: 1 }] },
      scenario({ waveform: { type: 'gaussian', file: 'x' } }),
      scenario({ waveform: { type: 'table', file: 'x', samples: [] } }),
      scenario({ waveform: { type: 'table', file: 3 } }),
    ])
      expect(withTables(value, never)).toEqual(value);
  });

  const waveform = scenario({ waveform: { type: 'table', file: 'pulse.csv' } });
  const sampled = scenario({ profile: 'sampled', file: 'pulse.csv' });
  test.each([
    [waveform, '0,0\n1,1\n', 'begins with numbers; its first row must name the columns'],
    [waveform, 't,I\n0,0\n1e-9,x\n', 'pulse.csv, row 3: I is “x”; it must be a finite number, A'],
    [waveform, 't,I\n0,0\n1e-9\n', 'row 3: has 1 columns; the header has 2'],
    [waveform, 't,I,J\n0,0,0\n', 'has 3 columns; a table has two'],
    [sampled, 'f,0Re,0Im\n1e9,x,0\n', 'row 2: 0Re is “x”; it must be a finite number, A'],
    [sampled, 'f,0Re,0Im\nx,1,0\n', 'row 2: f is “x”; it must be a finite number, Hz'],
    [sampled, 'f,0Re,1Im\n1e9,1,0\n', 'a column “1Im” where the imaginary part at 0 m is due'],
    [sampled, 'f,0,0.05\n1e9,1,0\n', 'a column “0” where a real part is due'],
    [sampled, 'f,aRe,aIm\n1e9,1,0\n', 'a column “aRe”; each but the first is headed by its arc length in m'],
    [sampled, 'f,0Re,0Im,1Re\n1e9,1,0,1\n', 'ends with a real part; its imaginary part, 1Im, is missing'],
    [sampled, 't,a\n0,0\n', 'a column “a”; each but the first is headed by its arc length in m'],
  ])('a table that cannot be used is refused with its place: %#', (given, text, words) => {
    expect(() => withTables(given, read(text))).toThrow(words);
    expect(() => withTables(given, read(text))).toThrow(/^sources\.0\.current/);
  });
});
