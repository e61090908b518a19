import { deflateRawSync } from 'node:zlib';
import { expect, test } from 'vitest';
import { scenarioOfLink, unpackedText } from '../../src/app/link.ts';
import { drawnInTurns } from '../hostile/drawn.ts';
import { fuzzLinks, fuzzRoundTrips } from './fuzzLinks.ts';

test('a text and the fields of a place come back from their address as they were', async () => {
  await drawnInTurns(fuzzRoundTrips(), 51, 300);
});

test('a short link that unpacks to more than any scenario is refused, not unpacked', async () => {
  const packed = (bytes: number) => deflateRawSync(Buffer.alloc(bytes, 'a')).toString('base64url');
  expect((await unpackedText(packed(7e6))).length).toBe(7e6);
  const bomb = packed(2e8);
  expect(bomb.length).toBeLessThan(1e6);
  await expect(unpackedText(bomb)).rejects.toThrow('longer than 8 MB');
  await expect(scenarioOfLink(`#scenario=${bomb}`)).rejects.toThrow('damaged');
});

test('any address holds a scenario, none, or is refused in words: 1000 drawn ones', async () => {
  const seen = { held: 0, none: 0, refused: 0 };
  await drawnInTurns(fuzzLinks(seen), 52, 1000);
  console.log(seen);
  expect(Math.min(seen.held, seen.none, seen.refused)).toBeGreaterThan(20);
});
