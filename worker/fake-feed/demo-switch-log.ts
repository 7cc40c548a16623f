import type { DataSource, EntityManager } from 'typeorm';
import { markDirty } from '../../server/database/dirty-blocks.ts';
import { inTransaction, isExclusionViolation } from '../../server/database/transaction.ts';
import { publish } from '../../server/platform/notify.ts';
import type { DemoWorld } from './demo-world.ts';
import type { PlannedDwell } from './switching-plan.ts';

/** A switch of the plan for which the log has no room: it says already what the receiver was on then. */
export interface InTheWay {
  receiver: string;
  antenna: string;
  startMs: number;
}

export interface PlanOutcome {
  /** Dwells added to the log. */
  added: number;
  inTheWay: InTheWay[];
}

interface LogRow {
  id: number;
  receiver_id: number;
  antenna_id: number;
  starts_at: Date;
  ends_at: Date | null;
}

/**
 * Writes the switches of the plan that fall into [fromMs, nowMs] into the switch log, as a switch does
 * that works by itself: what is open is closed when the plan switches next, and the new dwell begins
 * there. What people wrote stands: a planned dwell that would overlap a logged one is left out. Posting a
 * stretch again adds nothing.
 *
 * @param afterGap nobody switched before `fromMs`: what the plan was on by then begins there
 */
export async function postPlan(
  dataSource: DataSource,
  world: DemoWorld,
  fromMs: number,
  nowMs: number,
  afterGap = false,
): Promise<PlanOutcome> {
  const planned = world.simulator
    .dwells(world.simulator.startMs, nowMs + 1)
    .map((dwell) =>
      afterGap && dwell.startMs < fromMs && (dwell.endMs ?? Infinity) > fromMs
        ? { ...dwell, startMs: fromMs }
        : dwell,
    );
  const write = () =>
    inTransaction(dataSource, (manager) => writePlan(manager, world, planned, fromMs, nowMs));
  try {
    return await write();
  } catch (error) {
    // Somebody logged a dwell between our look and our insert; the second look sees it.
    if (!isExclusionViolation(error)) throw error;
    return write();
  }
}

async function writePlan(
  manager: EntityManager,
  world: DemoWorld,
  planned: readonly PlannedDwell[],
  fromMs: number,
  nowMs: number,
): Promise<PlanOutcome> {
  const { stationId } = world;
  const closed = await closeOpenDwells(manager, world, planned, nowMs);
  const due = planned.flatMap((dwell) => {
    const receiverId = world.receiverIds.get(dwell.receiver);
    const antennaId = world.antennaIds.get(dwell.antenna);
    if (dwell.startMs < fromMs || receiverId === undefined || antennaId === undefined) return [];
    const endMs = dwell.endMs !== null && dwell.endMs <= nowMs ? dwell.endMs : null;
    return [{ ...dwell, endMs, receiverId, antennaId }];
  });
  const logged: LogRow[] = await manager.query(
    `SELECT id, receiver_id, antenna_id, starts_at, ends_at FROM dwell
     WHERE station_id = $1 AND during && tstzrange($2, NULL) ORDER BY starts_at`,
    [stationId, new Date(fromMs)],
  );
  const inTheWay: InTheWay[] = [];
  const free = due.filter((dwell) => {
    const rival = logged.find((row) => row.receiver_id === dwell.receiverId && overlaps(row, dwell));
    if (rival === undefined) return true;
    const same = rival.antenna_id === dwell.antennaId && rival.starts_at.getTime() === dwell.startMs;
    const { receiver, antenna, startMs } = dwell;
    if (!same) inTheWay.push({ receiver, antenna, startMs });
    return false;
  });
  const added: unknown[] = await manager.query(
    // Joined, so that an antenna or receiver that people removed since is passed over.
    `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source)
     SELECT $1, r.id, a.id, p.starts_at, p.ends_at, 'plan'
     FROM unnest($2::integer[], $3::integer[], $4::timestamptz[], $5::timestamptz[])
       AS p (receiver_id, antenna_id, starts_at, ends_at)
     JOIN receiver r ON r.station_id = $1 AND r.id = p.receiver_id
     JOIN antenna a ON a.station_id = $1 AND a.id = p.antenna_id
     ORDER BY p.starts_at, r.id
     RETURNING 1`,
    [
      stationId,
      free.map(({ receiverId }) => receiverId),
      free.map(({ antennaId }) => antennaId),
      free.map(({ startMs }) => new Date(startMs)),
      free.map(({ endMs }) => endMs && new Date(endMs)),
    ],
  );
  const touched = [...closed, ...free.map(({ startMs, receiverId }) => ({ atMs: startMs, receiverId }))];
  if (touched.length > 0) {
    const firstMs = touched.reduce((first, { atMs }) => Math.min(first, atMs), nowMs);
    await markDirty(manager, stationId, new Date(firstMs), new Date(nowMs));
    const receiverIds = [...new Set(touched.map(({ receiverId }) => receiverId))];
    await publish(manager, stationId, { type: 'switch', receiverIds });
  }
  return { added: added.length, inTheWay };
}

function overlaps(row: LogRow, dwell: { startMs: number; endMs: number | null }): boolean {
  return (
    row.starts_at.getTime() < (dwell.endMs ?? Infinity) &&
    dwell.startMs < (row.ends_at?.getTime() ?? Infinity)
  );
}

async function closeOpenDwells(
  manager: EntityManager,
  { stationId, receiverIds }: DemoWorld,
  planned: readonly PlannedDwell[],
  nowMs: number,
): Promise<{ atMs: number; receiverId: number }[]> {
  // Locked, so that a person who is closing one of them comes before or after, not between.
  const open: LogRow[] = await manager.query(
    `SELECT id, receiver_id, antenna_id, starts_at, ends_at FROM dwell
     WHERE station_id = $1 AND ends_at IS NULL ORDER BY id FOR UPDATE`,
    [stationId],
  );
  const closed: { atMs: number; receiverId: number }[] = [];
  for (const [receiver, receiverId] of receiverIds) {
    const dwell = open.find((row) => row.receiver_id === receiverId);
    if (dwell === undefined) continue;
    const atMs = nextChangeMs(planned, receiver, dwell.starts_at.getTime());
    if (atMs === null || atMs > nowMs) continue;
    await manager.query('UPDATE dwell SET ends_at = $3 WHERE station_id = $1 AND id = $2', [
      stationId,
      dwell.id,
      new Date(atMs),
    ]);
    closed.push({ atMs, receiverId });
  }
  return closed;
}

/** The first moment after `afterMs` at which the plan changes what the receiver is on; null: none known. */
export function nextChangeMs(
  planned: readonly PlannedDwell[],
  receiver: string,
  afterMs: number,
): number | null {
  let nextMs = Infinity;
  for (const dwell of planned) {
    if (dwell.receiver !== receiver) continue;
    if (dwell.startMs > afterMs) nextMs = Math.min(nextMs, dwell.startMs);
    else if (dwell.endMs !== null && dwell.endMs > afterMs) nextMs = Math.min(nextMs, dwell.endMs);
  }
  return nextMs === Infinity ? null : nextMs;
}
