import type { EntityManager } from 'typeorm';
import { markDirty } from '../../server/database/dirty-blocks.ts';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';

export interface StoredDwell {
  receiverId: number;
  antennaId: number;
  startMs: number;
  endMs: number | null;
  note: string;
}

/** Whoever else changes the switch log of the station waits until this transaction ends. */
export async function lockReceivers(manager: EntityManager, stationId: number): Promise<void> {
  await manager.query('SELECT id FROM receiver WHERE station_id = $1 ORDER BY id FOR UPDATE', [stationId]);
}

/** Makes receivers and antennas; gives their ids by name in small letters. */
export async function makeNames(
  manager: EntityManager,
  stationId: number,
  receivers: readonly string[],
  antennas: readonly string[],
): Promise<{ receivers: Map<string, number>; antennas: Map<string, number> }> {
  const madeReceivers = await manager.save(
    receivers.map((call) => manager.create(Receiver, { stationId, callSign: call, label: call })),
  );
  const existing = await manager.find(Antenna, { where: { stationId }, select: { marker: true } });
  const taken = new Set(existing.map(({ marker }) => marker));
  const madeAntennas = await manager.save(
    antennas.map((name) =>
      manager.create(Antenna, { stationId, name, marker: freeMarker(name, taken), kind: 'other' }),
    ),
  );
  return {
    receivers: new Map(madeReceivers.map(({ id, callSign }) => [callSign.toLowerCase(), id])),
    antennas: new Map(madeAntennas.map(({ id, name }) => [name.toLowerCase(), id])),
  };
}

/** A letter of the name, else of the alphabet, that no antenna has yet; past 26 antennas one comes again. */
function freeMarker(name: string, taken: Set<string>): string {
  const letters = [...name.toUpperCase(), ...'ABCDEFGHIJKLMNOPQRSTUVWXYZ'].filter((letter) =>
    /^[A-Z]$/.test(letter),
  );
  const marker = letters.find((letter) => !taken.has(letter)) ?? letters[0]!;
  taken.add(marker);
  return marker;
}

const rowsAtOnce = 10_000;

/** Stores dwells and their history, one batch of changes. */
export async function insertDwells(
  manager: EntityManager,
  from: { stationId: number; importId: number; createdBy: string | null },
  batchId: string,
  dwells: readonly StoredDwell[],
): Promise<void> {
  for (let at = 0; at < dwells.length; at += rowsAtOnce) {
    const part = dwells.slice(at, at + rowsAtOnce);
    await manager.query(
      `WITH author AS (SELECT (SELECT id FROM app_user WHERE id = $4) AS id), added AS (
         INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source, note, import_id, created_by)
         SELECT $1, receiver, antenna, f, u, 'import', note, $2, author.id
         FROM author, unnest($5::int[], $6::int[], $7::timestamptz[], $8::timestamptz[], $9::text[])
           WITH ORDINALITY AS t (receiver, antenna, f, u, note, place)
         ORDER BY place
         RETURNING *)
       INSERT INTO dwell_change (station_id, batch_id, dwell_id, action, before, after, user_id)
       SELECT $1, $3, added.id, 'import', NULL, ${snapshot('added')}, author.id FROM added, author ORDER BY added.id`,
      [
        from.stationId,
        from.importId,
        batchId,
        from.createdBy,
        part.map((d) => d.receiverId),
        part.map((d) => d.antennaId),
        part.map((d) => new Date(d.startMs)),
        part.map((d) => (d.endMs === null ? null : new Date(d.endMs))),
        part.map((d) => d.note),
      ],
    );
  }
}

/** Removes an import's dwells and says so in their history. Returns what was removed. */
export async function removeDwells(
  manager: EntityManager,
  stationId: number,
  importId: number,
  batchId: string,
  userId: string | null,
): Promise<StoredDwell[]> {
  const rows: {
    receiver_id: number;
    antenna_id: number;
    starts_at: Date;
    ends_at: Date | null;
    note: string;
  }[] = await manager.query(
    `WITH author AS (SELECT (SELECT id FROM app_user WHERE id = $4) AS id), gone AS (
         DELETE FROM dwell WHERE station_id = $1 AND import_id = $2 RETURNING *), noted AS (
         INSERT INTO dwell_change (station_id, batch_id, dwell_id, action, before, after, user_id)
         SELECT $1, $3, gone.id, 'undo', ${snapshot('gone')}, NULL, author.id FROM gone, author ORDER BY gone.id)
       SELECT receiver_id, antenna_id, starts_at, ends_at, note FROM gone`,
    [stationId, importId, batchId, userId],
  );
  return rows.map((row) => ({
    receiverId: row.receiver_id,
    antennaId: row.antenna_id,
    startMs: row.starts_at.getTime(),
    endMs: row.ends_at?.getTime() ?? null,
    note: row.note,
  }));
}

/** A dwell as the switch log's history keeps it, in the same form as the server writes it. */
function snapshot(row: string): string {
  const iso = (column: string) =>
    `to_char(${row}.${column} AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')`;
  return `jsonb_build_object('receiverId', ${row}.receiver_id, 'antennaId', ${row}.antenna_id,
    'startsAt', ${iso('starts_at')}, 'endsAt', ${iso('ends_at')}, 'source', ${row}.source, 'note', ${row}.note,
    'importId', ${row}.import_id, 'createdBy', ${row}.created_by, 'createdAt', ${iso('created_at')})`;
}

/** Longest guard, and how far a match of spots can reach: what a dwell decides beyond its ends. */
const reachMs = 900_000;
const mostStretches = 500;

/** Marks the hours in which dwells decide over spots. */
export async function markStretchesDirty(
  manager: EntityManager,
  stationId: number,
  dwells: readonly StoredDwell[],
): Promise<void> {
  const sorted = [...dwells].sort((a, b) => a.startMs - b.startMs);
  const stretches: { fromMs: number; toMs: number }[] = [];
  for (const { startMs, endMs } of sorted) {
    const stretch = { fromMs: startMs - reachMs, toMs: (endMs ?? Infinity) + reachMs };
    const last = stretches.at(-1);
    if (last !== undefined && (stretch.fromMs <= last.toMs || stretches.length >= mostStretches)) {
      last.toMs = Math.max(last.toMs, stretch.toMs);
    } else stretches.push(stretch);
  }
  for (const { fromMs, toMs } of stretches) {
    await markDirty(manager, stationId, new Date(fromMs), toMs === Infinity ? null : new Date(toMs));
  }
}
