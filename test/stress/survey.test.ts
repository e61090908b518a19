import { expect, test } from 'vitest';
import { KILLED, killAndResume, moments, SurveyFolder } from '../run/surveyFolder.ts';

test('killed at fifty moments, a survey goes on: the same table bit for bit, nothing run twice', async () => {
  const folder = new SurveyFolder();
  try {
    const survey = folder.write('killed.json', KILLED);
    const found = await killAndResume(folder, survey, (whole) => moments(50, 50_000_001, whole));
    const counts = [0, 1, 2, 3, 4, 5, 6].map((n) => found.filter(({ finished }) => finished === n).length);
    console.log(`finished cases when killed, 0 to 6: ${counts.join(', ')} times`);
    // Moments are drawn over the whole run: not all fall before its first case or after its last.
    expect(counts.slice(1).some((n) => n > 0)).toBe(true);
    for (const { repeated, same } of found) {
      expect(repeated).toEqual([]);
      expect(same).toBe(true);
    }
  } finally {
    folder.remove();
  }
}, 3_600_000);
