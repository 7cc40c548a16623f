import type { EntityManager } from 'typeorm';
import { Antenna } from '../../database/entities/antenna.ts';
import { Receiver } from '../../database/entities/receiver.ts';
import { Conflict } from '../../platform/errors.ts';
import { isExclusionViolation } from '../../database/transaction.ts';
import { dwellColumnNames, isoOf, recordOf, snapshotOf } from './dwell-record.ts';
import type { DwellRecord, DwellRow, DwellSnapshot, DwellStep } from './dwell-record.ts';

export interface StoredChange {
  dwellId: number;
  action: DwellStep['action'];
  before: DwellSnapshot | null;
  after: DwellSnapshot | null;
}

export const dwellRepository = {
  /**
   * Makes everybody else who changes the log of these receivers wait until this transaction ends, in one
   * order for all. FOR UPDATE also holds back the foreign key's lock that any insert of a dwell takes.
   */
  async lockReceivers(
    manager: EntityManager,
    stationId: number,
    receiverIds: readonly number[],
  ): Promise<void> {
    await manager.query(
      'SELECT id FROM receiver WHERE station_id = $1 AND id = ANY($2::int[]) ORDER BY id FOR UPDATE',
      [stationId, receiverIds],
    );
  },

  receivers(manager: EntityManager, stationId: number): Promise<Receiver[]> {
    return manager.findBy(Receiver, { stationId });
  },
  antennas(manager: EntityManager, stationId: number): Promise<Antenna[]> {
    return manager.findBy(Antenna, { stationId });
  },

  async byIds(
    manager: EntityManager,
    stationId: number,
    ids: readonly number[],
  ): Promise<Map<number, DwellRecord>> {
    const rows: DwellRow[] = await manager.query(
      `SELECT ${dwellColumnNames} FROM dwell WHERE station_id = $1 AND id = ANY($2::bigint[])`,
      [stationId, ids],
    );
    return new Map(rows.map((row) => [row.id, recordOf(row)]));
  },

  /** The latest dwell of a receiver by start; as they cannot overlap, also the latest by end. */
  async newest(manager: EntityManager, stationId: number, receiverId: number): Promise<DwellRecord | null> {
    const rows: DwellRow[] = await manager.query(
      `SELECT ${dwellColumnNames} FROM dwell WHERE station_id = $1 AND receiver_id = $2
       ORDER BY starts_at DESC LIMIT 1`,
      [stationId, receiverId],
    );
    return rows[0] ? recordOf(rows[0]) : null;
  },

  /** The first stored dwell, outside of those that the steps are about, that their outcome overlaps. */
  async overlapped(
    manager: EntityManager,
    stationId: number,
    steps: readonly DwellStep[],
  ): Promise<{ step: DwellStep; inTheWay: DwellRecord } | null> {
    const outcome = steps.filter((step) => step.after !== null);
    const rows: (DwellRow & { place: number })[] = await manager.query(
      `SELECT place, ${dwellColumnNames}
       FROM unnest($2::int[], $3::timestamptz[], $4::timestamptz[]) WITH ORDINALITY AS t (receiver, f, u, place)
       JOIN dwell ON station_id = $1 AND receiver_id = receiver AND during && tstzrange(f, u)
       WHERE id <> ALL($5::bigint[])
       ORDER BY place, starts_at LIMIT 1`,
      [
        stationId,
        outcome.map((step) => step.after!.receiverId),
        outcome.map((step) => isoOf(step.after!.startMs)),
        outcome.map((step) => isoOrNull(step.after!.endMs)),
        steps.flatMap((step) => (step.before ? [step.before.id] : [])),
      ],
    );
    const found = rows[0];
    return found ? { step: outcome[found.place - 1]!, inTheWay: recordOf(found) } : null;
  },

  /**
   * Stores the outcome of the steps: the dwells they are about go, those they leave come back under their
   * ids. Updating them one by one would meet the ban on overlaps half-way, when two dwells trade places.
   * Fills in the ids of added dwells.
   */
  async replace(manager: EntityManager, stationId: number, steps: readonly DwellStep[]): Promise<void> {
    await manager.query('DELETE FROM dwell WHERE station_id = $1 AND id = ANY($2::bigint[])', [
      stationId,
      steps.flatMap((step) => (step.before ? [step.before.id] : [])),
    ]);
    const outcome = steps.flatMap((step) => (step.after ? [step.after] : []));
    const fresh = outcome.filter((dwell) => dwell.id === 0);
    const ids: { id: number }[] = await manager.query(
      `SELECT nextval(pg_get_serial_sequence('dwell', 'id')) AS id FROM generate_series(1, $1)`,
      [fresh.length],
    );
    fresh.forEach((dwell, i) => (dwell.id = ids[i]!.id));
    try {
      await manager.query(
        `INSERT INTO dwell (station_id, id, receiver_id, antenna_id, starts_at, ends_at, source, note, import_id, created_by, created_at)
         OVERRIDING SYSTEM VALUE
         SELECT $1, t.id, receiver, antenna, f, u, source, note, import, app_user.id, made
         FROM unnest($2::bigint[], $3::int[], $4::int[], $5::timestamptz[], $6::timestamptz[], $7::text[],
           $8::text[], $9::int[], $10::uuid[], $11::timestamptz[])
           AS t (id, receiver, antenna, f, u, source, note, import, author, made)
         -- Whoever made the dwell may have left since.
         LEFT JOIN app_user ON app_user.id = t.author`,
        [
          stationId,
          outcome.map((d) => d.id),
          outcome.map((d) => d.receiverId),
          outcome.map((d) => d.antennaId),
          outcome.map((d) => isoOf(d.startMs)),
          outcome.map((d) => isoOrNull(d.endMs)),
          outcome.map((d) => d.source),
          outcome.map((d) => d.note),
          outcome.map((d) => d.importId),
          outcome.map((d) => d.createdBy),
          outcome.map((d) => isoOf(d.createdMs)),
        ],
      );
    } catch (error) {
      // The receivers are locked and overlaps were looked for: only a writer that locks nothing gets here.
      if (!isExclusionViolation(error, 'dwell_no_overlap')) throw error;
      throw new Conflict(
        'The switch log was changed at the same moment. Look at it again, then repeat this.',
      );
    }
  },

  async record(
    manager: EntityManager,
    stationId: number,
    batchId: string,
    steps: readonly DwellStep[],
    actor: { userId: string | null; tokenId: string | null },
  ): Promise<void> {
    const json = (dwell: DwellRecord | null) => (dwell ? JSON.stringify(snapshotOf(dwell)) : null);
    await manager.query(
      `INSERT INTO dwell_change (station_id, batch_id, dwell_id, action, before, after, user_id, token_id)
       SELECT $1, $2, dwell, action, before, after, $3, $4
       FROM unnest($5::bigint[], $6::text[], $7::jsonb[], $8::jsonb[]) AS t (dwell, action, before, after)`,
      [
        stationId,
        batchId,
        actor.userId,
        actor.tokenId,
        steps.map((step) => (step.before ?? step.after)!.id),
        steps.map((step) => step.action),
        steps.map((step) => json(step.before)),
        steps.map((step) => json(step.after)),
      ],
    );
  },

  async batch(manager: EntityManager, stationId: number, batchId: string): Promise<StoredChange[]> {
    return manager.query(
      `SELECT dwell_id AS "dwellId", action, before, after FROM dwell_change
       WHERE station_id = $1 AND batch_id = $2 ORDER BY id`,
      [stationId, batchId],
    );
  },
};

function isoOrNull(timeMs: number | null): string | null {
  return timeMs === null ? null : isoOf(timeMs);
}
