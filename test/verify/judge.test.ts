import { test } from 'vitest';
import { judgeCopies } from './judging.ts';

test('the right cause is named first in at least 90 % of seeded corrupted copies, one of each', () => judgeCopies(7));
