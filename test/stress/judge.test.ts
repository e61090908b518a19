import { test } from 'vitest';
import { judgeCopies } from '../verify/judging.ts';

test('the right cause is named first in at least 90 % of all seeded corrupted copies', () => judgeCopies(1));
