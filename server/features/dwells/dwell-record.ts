import type { Dwell as DwellReply } from '../../../shared/contracts/dwell.ts';
import type { DwellAction } from '../../database/entities/dwell-change.ts';
import type { DwellSource } from '../../database/entities/dwell.ts';

/** A dwell `[startMs, endMs)` as the rules of the switch log work on it; `endMs` null: still on. */
export interface DwellRecord {
  /** 0 until it is stored. */
  id: number;
  receiverId: number;
  antennaId: number;
  startMs: number;
  endMs: number | null;
  source: DwellSource;
  note: string;
  importId: number | null;
  createdBy: string | null;
  createdMs: number;
}

/** What happens to one dwell: `before` null = added, `after` null = deleted. */
export interface DwellStep {
  action: DwellAction;
  before: DwellRecord | null;
  after: DwellRecord | null;
  /** Place in the caller's list of changes, for sentences about it; null where there is no such list. */
  changeIndex: number | null;
}

export interface DwellRow {
  id: number;
  receiver_id: number;
  antenna_id: number;
  starts_at: Date;
  ends_at: Date | null;
  source: DwellSource;
  note: string;
  import_id: number | null;
  created_by: string | null;
  created_at: Date;
}
export const dwellColumnNames =
  'id, receiver_id, antenna_id, starts_at, ends_at, source, note, import_id, created_by, created_at';

export function recordOf(row: DwellRow): DwellRecord {
  return {
    id: row.id,
    receiverId: row.receiver_id,
    antennaId: row.antenna_id,
    startMs: row.starts_at.getTime(),
    endMs: row.ends_at?.getTime() ?? null,
    source: row.source,
    note: row.note,
    importId: row.import_id,
    createdBy: row.created_by,
    createdMs: row.created_at.getTime(),
  };
}

export function presentDwell(dwell: DwellRecord): DwellReply {
  const { id, receiverId, antennaId, source, note } = dwell;
  return {
    ...{ id, receiverId, antennaId, source, note },
    startsAt: isoOf(dwell.startMs),
    endsAt: dwell.endMs === null ? null : isoOf(dwell.endMs),
  };
}

/** How a dwell is kept in `dwell_change`: whatever undo needs to put it back. */
export interface DwellSnapshot {
  receiverId: number;
  antennaId: number;
  startsAt: string;
  endsAt: string | null;
  source: DwellSource;
  note: string;
  importId: number | null;
  createdBy: string | null;
  createdAt: string;
}

export function snapshotOf(dwell: DwellRecord): DwellSnapshot {
  const { receiverId, antennaId, source, note, importId, createdBy } = dwell;
  return {
    ...{ receiverId, antennaId, source, note, importId, createdBy },
    startsAt: isoOf(dwell.startMs),
    endsAt: dwell.endMs === null ? null : isoOf(dwell.endMs),
    createdAt: isoOf(dwell.createdMs),
  };
}

export function recordFromSnapshot(id: number, snapshot: DwellSnapshot): DwellRecord {
  const { receiverId, antennaId, source, note, importId, createdBy } = snapshot;
  return {
    ...{ id, receiverId, antennaId, source, note, importId, createdBy },
    startMs: Date.parse(snapshot.startsAt),
    endMs: snapshot.endsAt === null ? null : Date.parse(snapshot.endsAt),
    createdMs: Date.parse(snapshot.createdAt),
  };
}

/** Whether two versions of a dwell say the same: who stored it, and when, is not part of what it says. */
export function saysTheSame(a: DwellRecord, b: DwellRecord): boolean {
  return (
    a.receiverId === b.receiverId &&
    a.antennaId === b.antennaId &&
    a.startMs === b.startMs &&
    a.endMs === b.endMs &&
    a.note === b.note
  );
}

export function isoOf(timeMs: number): string {
  return new Date(timeMs).toISOString();
}
