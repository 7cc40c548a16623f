import { tasks, type TaskInput, type TaskName } from './tasks.ts';

/** The file that each thread of the pool runs; see `createThreadPool`. */
export default function runTask({ name, input }: { name: TaskName; input: TaskInput<TaskName> }): unknown {
  const task = tasks[name] as (given: unknown) => unknown;
  return task(input);
}
