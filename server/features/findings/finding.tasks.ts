import { freezeAnswer } from './frozen.ts';
import { drawFinding } from './pdf/draw-finding.ts';
import { recomputeAnswer } from './recompute.ts';

/** The parts of findings that run in a thread of their own; see server/threads/tasks.ts. */
export const findingTasks = { freezeAnswer, recomputeAnswer, drawFinding };
