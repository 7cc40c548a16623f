import { Foundation1764547200000 } from './1764547200000-foundation.ts';
import { CountLevels1764600000000 } from './1764600000000-count-levels.ts';
import { Findings1764633600000 } from './1764633600000-findings.ts';

/** Listed by hand: what runs, and in which order, is code, not a file pattern. */
export const migrations = [Foundation1764547200000, CountLevels1764600000000, Findings1764633600000];
