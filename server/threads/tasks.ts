import { answerComparison, ruleVariant, unitVariants } from '../../shared/comparison/index.ts';
import { answerLadder } from '../../shared/ladder/index.ts';
import { findingTasks } from '../features/findings/finding.tasks.ts';

/**
 * What runs in a thread of its own, because it would hold up every other request: pure functions of data that
 * can be copied from one thread to another. Adding one here is all there is to it.
 */
export const tasks = { answerComparison, ruleVariant, unitVariants, answerLadder, ...findingTasks };

export type TaskName = keyof typeof tasks;
export type TaskInput<Name extends TaskName> = Parameters<(typeof tasks)[Name]>[0];
export type TaskOutput<Name extends TaskName> = Awaited<ReturnType<(typeof tasks)[Name]>>;
