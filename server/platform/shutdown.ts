import type { Logger } from './logger.ts';

type Step = { name: string; run: () => Promise<unknown> | unknown };

/**
 * Ends a process in order: the last registered step runs first. A process that has not drained within
 * `limitMs` is ended all the same, because a supervisor would otherwise kill it at a worse moment.
 */
export function createShutdown(logger: Logger, limitMs = 10_000) {
  const steps: Step[] = [];
  let running: Promise<void> | null = null;

  async function run(reason: string): Promise<void> {
    logger.info({ reason }, 'stopping');
    for (const step of steps.reverse()) {
      try {
        await step.run();
      } catch (error) {
        logger.error({ err: error, step: step.name }, 'a step of the shutdown failed');
      }
    }
  }

  function stop(reason: string): Promise<void> {
    running ??= run(reason);
    return running;
  }

  return {
    onStop(name: string, step: Step['run']): void {
      steps.push({ name, run: step });
    },
    stop,
    listenForSignals(): void {
      for (const signal of ['SIGINT', 'SIGTERM'] as const) {
        process.once(signal, () => {
          const limit = setTimeout(() => {
            logger.fatal('did not drain in time');
            process.exit(1);
          }, limitMs);
          limit.unref();
          void stop(signal).then(() => process.exit(0));
        });
      }
    },
  };
}

export type Shutdown = ReturnType<typeof createShutdown>;
