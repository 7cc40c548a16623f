import type { DataSource } from 'typeorm';
import type { Logger } from '../../server/platform/logger.ts';
import { makeOldestDirtyNight, stationsWithDirtyBlocks } from './dirty-nights.ts';

/** Live spots mark their hour dirty every second; the night of the present is made anew this often. */
const idleMs = 15_000;

/**
 * Keeps the units of the standing rules up to date for as long as the worker lives. Corrections of the
 * switch log and imports wake it at once; live spots are followed at the idle pace.
 */
export function createUnitMaker(options: { dataSource: DataSource; logger: Logger }) {
  const { dataSource, logger } = options;
  let stopped = false;
  let wake: (() => void) | null = null;
  let woken = false;
  let loop: Promise<void> = Promise.resolve();

  async function round(): Promise<void> {
    for (const stationId of await stationsWithDirtyBlocks(dataSource)) {
      for (;;) {
        if (stopped) return;
        const startedMs = performance.now();
        const nights = await makeOldestDirtyNight(dataSource, stationId, Date.now());
        if (nights.length === 0) break;
        logger.debug({ stationId, nights, ms: Math.round(performance.now() - startedMs) }, 'made units');
      }
    }
  }

  function pause(): Promise<void> {
    if (woken || stopped) {
      woken = false;
      return Promise.resolve();
    }
    return new Promise((resolve) => {
      const timer = setTimeout(resolve, idleMs);
      wake = () => {
        clearTimeout(timer);
        resolve();
      };
    });
  }

  return {
    start(): void {
      loop = (async () => {
        while (!stopped) {
          await round().catch((error: unknown) =>
            logger.error({ err: error }, 'units could not be made; trying again'),
          );
          await pause();
          wake = null;
        }
      })();
    },
    /** Something was marked dirty by a person or an import: do not wait for the next round. */
    wake(): void {
      if (wake) wake();
      else woken = true;
    },
    async stop(): Promise<void> {
      stopped = true;
      wake?.();
      await loop;
    },
  };
}
