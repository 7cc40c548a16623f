import type { DataSource, EntityManager } from 'typeorm';
import type { Dwell } from '../../../shared/contracts/dwell.ts';
import { Receiver } from '../../database/entities/receiver.ts';
import { InvalidRequest, NotFound } from '../../platform/errors.ts';
import { dwellColumnNames, presentDwell, recordOf } from './dwell-record.ts';
import type { DwellRow } from './dwell-record.ts';

/** More than a screen can show; a longer stretch is read in parts. */
const listLimit = 5000;

/** Dwells that touch `[from, to)`, oldest first. Throws NotFound for a receiver of another station. */
export async function listDwells(
  manager: EntityManager,
  stationId: number,
  range: { from: string; to: string; receiverId?: number | undefined },
): Promise<{ items: Dwell[]; truncated: boolean }> {
  refuseTurnedRange(range.from, range.to);
  const { receiverId = null } = range;
  if (receiverId !== null && !(await manager.existsBy(Receiver, { stationId, id: receiverId }))) {
    throw new NotFound('This receiver');
  }
  const rows: DwellRow[] = await manager.query(
    `SELECT ${dwellColumnNames} FROM dwell
     WHERE station_id = $1 AND during && tstzrange($2, $3) AND ($4::int IS NULL OR receiver_id = $4)
     ORDER BY starts_at, id LIMIT $5`,
    [stationId, range.from, range.to, receiverId, listLimit + 1],
  );
  return {
    items: rows.slice(0, listLimit).map((row) => presentDwell(recordOf(row))),
    truncated: rows.length > listLimit,
  };
}

/** Of each receiver in use, and of a retired one that was left open, the dwell at a moment. */
export async function listNowOn(
  manager: EntityManager,
  stationId: number,
  nowMs: number,
): Promise<{ receiverId: number; dwell: Dwell | null }[]> {
  const rows: (Omit<DwellRow, 'id' | 'receiver_id'> & { receiver: number; id: number | null })[] =
    await manager.query(
      `SELECT r.id AS receiver, d.* FROM receiver r
       LEFT JOIN LATERAL (
         SELECT ${dwellColumnNames} FROM dwell
         WHERE station_id = r.station_id AND receiver_id = r.id AND during @> $2::timestamptz) AS d ON true
       WHERE r.station_id = $1 AND (r.retired_at IS NULL OR d.id IS NOT NULL)
       ORDER BY r.id`,
      [stationId, new Date(nowMs)],
    );
  return rows.map(({ receiver, id, ...rest }) => ({
    receiverId: receiver,
    dwell: id === null ? null : presentDwell(recordOf({ id, receiver_id: receiver, ...rest })),
  }));
}

interface CsvRange {
  from?: string | undefined;
  to?: string | undefined;
}
type CsvCells = [receiver: string, antenna: string, startsAt: string, endsAt: string | null, note: string];
export const dwellCsvHeader = ['receiver', 'antenna', 'starts_at', 'ends_at', 'note'];
const rowsAtOnce = 5000;

/**
 * The switch log line by line, oldest first, from one snapshot: an edit meanwhile could otherwise make two
 * lines overlap that never did, and the file would be refused when it is read again.
 */
export function dwellCsvRows(
  dataSource: DataSource,
  stationId: number,
  range: CsvRange,
): AsyncGenerator<CsvCells> {
  // Here and not in the generator: once lines are being sent it is too late for a sentence.
  if (range.from !== undefined && range.to !== undefined) refuseTurnedRange(range.from, range.to);
  return readCsvRows(dataSource, stationId, range);
}

async function* readCsvRows(
  dataSource: DataSource,
  stationId: number,
  range: CsvRange,
): AsyncGenerator<CsvCells> {
  const runner = dataSource.createQueryRunner();
  try {
    await runner.startTransaction('REPEATABLE READ');
    let after: { starts_at: Date; id: number } | null = null;
    for (;;) {
      const rows: (DwellRow & { receiver: string; antenna: string })[] = await runner.query(
        `SELECT d.id, d.starts_at, d.ends_at, d.note, r.call_sign AS receiver, a.name AS antenna
         FROM dwell d
         JOIN receiver r ON r.station_id = d.station_id AND r.id = d.receiver_id
         JOIN antenna a ON a.station_id = d.station_id AND a.id = d.antenna_id
         WHERE d.station_id = $1 AND d.during && tstzrange($2, $3)
           AND ($4::timestamptz IS NULL OR (d.starts_at, d.id) > ($4, $5::bigint))
         ORDER BY d.starts_at, d.id LIMIT $6`,
        [
          ...[stationId, range.from ?? null, range.to ?? null],
          ...[after?.starts_at ?? null, after?.id ?? null, rowsAtOnce],
        ],
      );
      for (const row of rows) {
        const [start, end] = [row.starts_at.toISOString(), row.ends_at?.toISOString() ?? null];
        yield [row.receiver, row.antenna, start, end, row.note];
      }
      if (rows.length < rowsAtOnce) return;
      after = rows.at(-1)!;
    }
  } finally {
    if (runner.isTransactionActive) await runner.rollbackTransaction();
    await runner.release();
  }
}

function refuseTurnedRange(from: string, to: string): void {
  if (Date.parse(from) < Date.parse(to)) return;
  const message = 'The end of the range must come after its start.';
  throw new InvalidRequest(message, [{ path: 'query.to', message }]);
}
