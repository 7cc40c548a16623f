import type { DataSource } from 'typeorm';
import { inTransaction } from '../../server/database/transaction.ts';
import type { Logger } from '../../server/platform/logger.ts';
import { publish, wakeWorkers } from '../../server/platform/notify.ts';
import { followSwitchLog } from './demo-antennas.ts';
import { nextChangeMs, postPlan } from './demo-switch-log.ts';
import type { DemoWorld } from './demo-world.ts';
import type { AntennaLookup } from './simulator.ts';

export interface LiveStation {
  antennaAt: AntennaLookup;
  /** One round: logs the switches that fell due and reads what people logged. Never throws. */
  work(nowMs: number): Promise<void>;
}

/** A call is measured up to this long before it is reported, and a round may be late. */
const lookBackMs = 120_000;
const dayMs = 86_400_000;

/**
 * The switch of the live demo. A round that fails (the database is being restarted) is made up for by the
 * next: it posts from where the last successful one ended.
 *
 * @param fromMs where the loading of past nights ended, or a little earlier: posting twice adds nothing
 */
export function createLiveStation(
  dataSource: DataSource,
  world: DemoWorld,
  fromMs: number,
  logger: Logger,
): LiveStation {
  const antennas = followSwitchLog(world);
  let postedMs = fromMs;
  let dueMs = fromMs;
  let failing = false;

  /** When the plan switches next; a day on at the latest, which costs nothing. */
  function nextDueMs(afterMs: number): number {
    const untilMs = afterMs + dayMs;
    const planned = world.simulator.dwells(afterMs - 2 * dayMs, untilMs);
    return [...world.receiverIds.keys()].reduce(
      (next, receiver) => Math.min(next, nextChangeMs(planned, receiver, afterMs) ?? untilMs),
      untilMs,
    );
  }

  async function round(nowMs: number): Promise<void> {
    // What people logged comes first: a dwell of theirs that the plan is about to close still counts.
    await antennas.refresh(dataSource.manager, nowMs - lookBackMs);
    if (nowMs < dueMs) return;
    const { added, inTheWay } = await postPlan(dataSource, world, postedMs, nowMs);
    postedMs = nowMs + 1;
    dueMs = nextDueMs(nowMs);
    if (added > 0) logger.info({ dwells: added }, 'switched as planned');
    for (const { receiver, antenna, startMs } of inTheWay) {
      logger.info(
        { receiver, antenna, at: new Date(startMs).toISOString() },
        'the switch log says otherwise; the planned switch is left out',
      );
    }
  }

  return {
    antennaAt: antennas.antennaAt,
    async work(nowMs) {
      try {
        await round(nowMs);
        if (failing) logger.info('the switch log can be written again');
        failing = false;
      } catch (error) {
        if (!failing)
          logger.warn({ err: error }, 'the switch log cannot be written; trying again each second');
        failing = true;
      }
    },
  };
}

/** Points the demo's feed to where this process really listens: the port is another one at each start. */
export async function announceFeed(
  dataSource: DataSource,
  world: DemoWorld,
  host: string,
  port: number,
): Promise<void> {
  await inTransaction(dataSource, async (manager) => {
    const changed: unknown[] = await manager.query(
      `WITH changed AS (
         UPDATE feed SET host = $3, port = $4
         WHERE station_id = $1 AND id = $2 AND (host, port) IS DISTINCT FROM ($3, $4) RETURNING 1)
       SELECT * FROM changed`,
      [world.stationId, world.feedId, host, port],
    );
    if (changed.length === 0) return;
    await wakeWorkers(manager);
    await publish(manager, world.stationId, { type: 'feed', feedId: world.feedId });
  });
}
