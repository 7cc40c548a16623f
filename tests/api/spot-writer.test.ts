import type { DataSource } from 'typeorm';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import type { SpotRecord } from '../../worker/spots/spot-record.ts';
import { writeSpots } from '../../worker/spots/spot-writer.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';
import { insertStation, type StationRows } from '../helpers/station-rows.ts';

let database: TestDatabase;
let dataSource: DataSource;
let station: StationRows;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});
beforeEach(async () => {
  station = await insertStation(dataSource);
});

const evening = Date.parse('2026-01-05T18:12:20Z');

function spot(change: Partial<SpotRecord> = {}): SpotRecord {
  return {
    heardAtMs: evening,
    receiverId: station.receiverId,
    call: 'EA8QSH',
    freq100Hz: 18245,
    bandMetres: 160,
    snrDb: 21,
    speedWpm: 22,
    mode: 'CW',
    uncertaintySeconds: 0,
    feedMinute: null,
    ...change,
  };
}

/** A spot heard live in the minute 18:12. */
const live = (change: Partial<SpotRecord> = {}) => spot({ feedMinute: 18 * 60 + 12, ...change });

const calls = ['EA8QSH', 'W1QRB', 'JA1QTC', 'VK6QUD', 'UA9QSE', 'PY2QRF', 'VE7QTG', 'ZS1QUH'];

/** Spots that differ from each other: one a second, calls and frequencies taking turns. */
const series = (count: number, from = evening): SpotRecord[] =>
  Array.from({ length: count }, (_, i) =>
    spot({
      heardAtMs: from + i * 1000,
      call: calls[i % calls.length]!,
      freq100Hz: 18100 + ((i * 7) % 200),
      snrDb: (i % 60) - 10,
    }),
  );

const write = (spots: SpotRecord[], importId = 1, stationId = station.stationId) =>
  writeSpots(dataSource, { stationId, importId, spots });

async function storedSpots(stationId = station.stationId): Promise<number> {
  const rows: { n: number }[] = await dataSource.query(
    'SELECT count(*) AS n FROM spot WHERE station_id = $1',
    [stationId],
  );
  return rows[0]!.n;
}

async function dirtyHours(): Promise<string[]> {
  const rows: { starts_at: Date }[] = await dataSource.query(
    'SELECT starts_at FROM dirty_block WHERE station_id = $1 ORDER BY starts_at',
    [station.stationId],
  );
  return rows.map(({ starts_at }) => starts_at.toISOString());
}

describe('the spot writer', () => {
  it('stores every value as it came, before 2000 and to the millisecond too', async () => {
    const old = Date.parse('1999-12-31T23:59:59.999Z');
    const outcome = await write(
      [
        spot({ heardAtMs: evening + 7, snrDb: -3, mode: 'RTTY', uncertaintySeconds: 60 }),
        spot({ heardAtMs: old, speedWpm: null, call: 'VP8/EA8QSH/P', freq100Hz: 1_440_501, bandMetres: 6 }),
      ],
      42,
    );
    expect(outcome).toEqual({ stored: 2, doubled: 0 });
    const rows = await dataSource.query(
      `SELECT heard_at, heard_ms, receiver_id, call, freq_100hz, import_id, band_m, snr_db, speed_wpm, mode,
         uncertainty_s, feed_minute
       FROM spot JOIN call_sign ON call_sign.id = call_id WHERE station_id = $1 ORDER BY heard_at`,
      [station.stationId],
    );
    const same = { receiver_id: station.receiverId, import_id: 42, feed_minute: null };
    expect(rows).toEqual([
      {
        ...same,
        heard_at: new Date('1999-12-31T23:59:59Z'),
        heard_ms: 999,
        call: 'VP8/EA8QSH/P',
        freq_100hz: 1_440_501,
        band_m: 6,
        snr_db: 21,
        speed_wpm: null,
        mode: 1,
        uncertainty_s: 0,
      },
      {
        ...same,
        heard_at: new Date('2026-01-05T18:12:20Z'),
        heard_ms: 7,
        call: 'EA8QSH',
        freq_100hz: 18245,
        band_m: 160,
        snr_db: -3,
        speed_wpm: 22,
        mode: 2,
        uncertainty_s: 60,
      },
    ]);
  });

  it('keeps the first of spots equal in receiver, second, call and frequency, inside a batch and across', async () => {
    const outcome = await write([
      spot({ snrDb: 1 }),
      spot({ snrDb: 2, heardAtMs: evening + 999 }),
      spot({ snrDb: 3, freq100Hz: 18246 }),
      spot({ snrDb: 4, call: 'EA8QSI' }),
      spot({ snrDb: 5, heardAtMs: evening + 1000 }),
      spot({ snrDb: 6 }),
    ]);
    expect(outcome).toEqual({ stored: 4, doubled: 2 });
    expect(await write([spot({ snrDb: 7 }), spot({ snrDb: 8, heardAtMs: evening + 2000 })])).toEqual({
      stored: 1,
      doubled: 1,
    });
    const rows: { snr_db: number }[] = await dataSource.query(
      'SELECT snr_db FROM spot WHERE station_id = $1 ORDER BY snr_db',
      [station.stationId],
    );
    expect(rows.map(({ snr_db }) => snr_db)).toEqual([1, 3, 4, 5, 8]);
  });

  it('adds nothing when a file is read again in another order and in other batches', async () => {
    const spots = series(5000);
    expect(await write(spots)).toEqual({ stored: 5000, doubled: 0 });
    const again = spots.toReversed();
    for (let i = 0; i < again.length; i += 777) {
      const batch = again.slice(i, i + 777);
      expect(await write(batch, 2)).toEqual({ stored: 0, doubled: batch.length });
    }
    expect(await storedSpots()).toBe(5000);
  });

  it('stores what several writers write at once exactly once, and each counts what it stored', async () => {
    const spots = series(6000);
    const shares = Array.from({ length: 6 }, (_, k) =>
      // Every share overlaps the next by half; half of the writers go backwards.
      spots.slice(k * 1000, k * 1000 + 2000),
    ).map((share, k) => (k % 2 === 0 ? share : share.toReversed()));
    const outcomes = await Promise.all(shares.map((share, k) => write(share, k + 1)));
    expect(outcomes.reduce((sum, { stored }) => sum + stored, 0)).toBe(6000);
    for (const [k, { stored, doubled }] of outcomes.entries()) {
      expect(stored + doubled).toBe(shares[k]!.length);
      const rows: { n: number }[] = await dataSource.query(
        'SELECT count(*) AS n FROM spot WHERE station_id = $1 AND import_id = $2',
        [station.stationId, k + 1],
      );
      expect(rows[0]!.n).toBe(stored);
    }
    expect(await storedSpots()).toBe(6000);
  });

  it('lets writers that know none of the calls add them at the same time', async () => {
    const unheard = Array.from({ length: 500 }, (_, i) => `EA${i % 10}Q${'RSTU'[i % 4]}${i}Z`);
    const spots = unheard.map((call, i) => spot({ call, heardAtMs: evening + i * 1000 }));
    // Data sources of their own: each process has a dictionary of its own.
    const others = await Promise.all(
      [0, 1, 2, 3].map(() => connectDataSource(createDataSource({ url: database.url, poolSize: 2 }))),
    );
    const outcomes = await Promise.all(
      others.map((other, k) =>
        writeSpots(other, {
          stationId: station.stationId,
          importId: k + 1,
          spots: k % 2 === 0 ? spots : spots.toReversed(),
        }),
      ),
    );
    await Promise.all(others.map((other) => other.destroy()));
    expect(outcomes.reduce((sum, { stored }) => sum + stored, 0)).toBe(500);
    const rows: { n: number }[] = await dataSource.query(
      `SELECT count(DISTINCT call_id) AS n FROM spot WHERE station_id = $1`,
      [station.stationId],
    );
    expect(rows[0]!.n).toBe(500);
  });

  it('keeps two stations apart that hear the same', async () => {
    const other = await insertStation(dataSource);
    const spots = series(100);
    expect(await write(spots)).toEqual({ stored: 100, doubled: 0 });
    const theirs = spots.map((one) => ({ ...one, receiverId: other.receiverId }));
    expect(await write(theirs, 1, other.stationId)).toEqual({ stored: 100, doubled: 0 });
    expect(await storedSpots()).toBe(100);
    expect(await storedSpots(other.stationId)).toBe(100);
  });

  it('makes the months that a batch needs and none between', async () => {
    const outcome = await write([
      spot({ heardAtMs: Date.parse('2031-05-31T23:59:59Z') }),
      spot({ heardAtMs: Date.parse('2031-06-01T00:00:00Z') }),
      spot({ heardAtMs: Date.parse('2033-01-15T00:00:00Z') }),
    ]);
    expect(outcome.stored).toBe(3);
    const rows: { name: string }[] = await dataSource.query(
      `SELECT inhrelid::regclass::text AS name FROM pg_inherits
       WHERE inhparent = 'spot'::regclass AND inhrelid::regclass::text ~ 'spot_203[1-3]' ORDER BY name`,
    );
    expect(rows.map(({ name }) => name)).toEqual(['spot_2031_05', 'spot_2031_06', 'spot_2033_01']);
  });

  it('marks the hours whose units may change, the neighbour too when a match could cross over', async () => {
    const at = (time: string) => spot({ heardAtMs: Date.parse(`2026-01-05T${time}Z`) });
    await write([at('16:30:00'), at('18:59:30'), at('21:00:10'), at('23:10:00')]);
    expect(await dirtyHours()).toEqual(
      ['16', '18', '19', '20', '21', '23'].map((hour) => `2026-01-05T${hour}:00:00.000Z`),
    );
    await dataSource.query('DELETE FROM dirty_block');
    await write([at('16:30:00')]);
    expect(await dirtyHours()).toEqual([]);
  });

  it('stores all of a batch and its count, or nothing of either', async () => {
    const spots = series(10);
    const [{ id: importId }]: [{ id: number }] = await dataSource.query(
      `INSERT INTO import (station_id, kind, file_name, state) VALUES ($1, 'spots', 'night.csv', 'running')
       RETURNING id`,
      [station.stationId],
    );
    const count = (fail: boolean) =>
      writeSpots(dataSource, {
        stationId: station.stationId,
        importId,
        spots,
        alongside: async (manager, outcome) => {
          await manager.query(
            'UPDATE import SET rows_stored = rows_stored + $3 WHERE station_id = $1 AND id = $2',
            [station.stationId, importId, outcome.stored],
          );
          if (fail) throw new Error('the counter broke');
        },
      });
    const counted = async (): Promise<number> => {
      const rows: { n: number }[] = await dataSource.query(
        'SELECT rows_stored AS n FROM import WHERE station_id = $1 AND id = $2',
        [station.stationId, importId],
      );
      return rows[0]!.n;
    };
    await expect(count(true)).rejects.toThrow('the counter broke');
    expect([await storedSpots(), await counted()]).toEqual([0, 0]);
    expect(await dirtyHours()).toEqual([]);
    expect(await count(false)).toEqual({ stored: 10, doubled: 0 });
    expect([await storedSpots(), await counted()]).toEqual([10, 10]);
  });

  it('refuses a number that does not fit and stores nothing of its batch', async () => {
    await expect(write([spot(), spot({ call: 'EA8QSI', snrDb: 40_000 })])).rejects.toThrow(RangeError);
    expect(await storedSpots()).toBe(0);
    expect(await write([spot()])).toEqual({ stored: 1, doubled: 0 });
  });

  it('works out the bearing of each call that the station hears for the first time', async () => {
    await write([spot(), spot({ call: 'W1QRB/MM' })]);
    const rows: { call: string; source: string; azimuth_deg: number | null }[] = await dataSource.query(
      `SELECT call, source, azimuth_deg FROM call_bearing
       JOIN call_sign ON id = call_id WHERE station_id = $1 ORDER BY call`,
      [station.stationId],
    );
    expect(rows).toMatchObject([
      { call: 'EA8QSH', source: 'call area' },
      { call: 'W1QRB/MM', source: 'none', azimuth_deg: null },
    ]);
    // By spherical trigonometry from 53.5 N 9 W to the Canaries, about 28.3 N 15.8 W: 194 degrees.
    expect(Math.abs(rows[0]!.azimuth_deg! - 194)).toBeLessThan(2);
  });

  it('writes an empty batch as nothing', async () => {
    expect(await write([])).toEqual({ stored: 0, doubled: 0 });
    expect(await dirtyHours()).toEqual([]);
  });
});

describe('lines that a live feed sends again', () => {
  it('are doubles of the same minute at whatever second they come', async () => {
    expect(await write([live()], 0)).toEqual({ stored: 1, doubled: 0 });
    const replays = [live({ heardAtMs: evening + 31_000 }), live({ heardAtMs: evening + 60_000 })];
    expect(await write(replays, 0)).toEqual({ stored: 0, doubled: 2 });
  });

  it('are doubles when they come so late that the feed minute became their time', async () => {
    await write([live()], 0);
    const late = live({ heardAtMs: Date.parse('2026-01-05T18:12:00Z'), uncertaintySeconds: 60 });
    expect(await write([late], 0)).toEqual({ stored: 0, doubled: 1 });
  });

  it('are doubles inside one batch, of which the earliest is kept', async () => {
    const batch = [live({ heardAtMs: evening + 40_000 }), live(), live({ heardAtMs: evening + 9_000 })];
    expect(await write(batch, 0)).toEqual({ stored: 1, doubled: 2 });
    const rows: { heard_at: Date }[] = await dataSource.query(
      'SELECT heard_at FROM spot WHERE station_id = $1',
      [station.stationId],
    );
    expect(rows[0]!.heard_at.getTime()).toBe(evening);
  });

  it('are doubles across midnight and across the end of a month', async () => {
    const lastMinute = { feedMinute: 1439 };
    const before = live({ ...lastMinute, heardAtMs: Date.parse('2026-01-31T23:59:58Z') });
    const after = live({ ...lastMinute, heardAtMs: Date.parse('2026-02-01T00:00:04Z') });
    expect(await write([before], 0)).toEqual({ stored: 1, doubled: 0 });
    expect(await write([after], 0)).toEqual({ stored: 0, doubled: 1 });
  });

  it('are told from a new reception in the next minute, on another frequency, or on another day', async () => {
    await write([live()], 0);
    const news = [
      live({ heardAtMs: evening + 60_000, feedMinute: 18 * 60 + 13 }),
      live({ freq100Hz: 18246 }),
      live({ heardAtMs: evening + 86_400_000 }),
    ];
    expect(await write(news, 0)).toEqual({ stored: 3, doubled: 0 });
  });

  it('are stored once by two workers that get them at the same time', async () => {
    const lines = Array.from({ length: 300 }, (_, i) => live({ freq100Hz: 18100 + i }));
    const later = lines.map((line) => ({ ...line, heardAtMs: line.heardAtMs + 3_000 }));
    const outcomes = await Promise.all([write(lines, 0), write(later, 0), write(later.toReversed(), 0)]);
    expect(outcomes.map(({ stored }) => stored).sort((a, b) => b - a)).toEqual([300, 0, 0]);
    expect(await storedSpots()).toBe(300);
  });

  it('do not hide what a file says of the same minute', async () => {
    await write([live()], 0);
    expect(await write([spot({ heardAtMs: evening + 5000 })], 3)).toEqual({ stored: 1, doubled: 0 });
  });

  it('count for each receiver by itself', async () => {
    const second = await dataSource
      .getRepository(Receiver)
      .save({ stationId: station.stationId, callSign: 'EI7QSC', label: 'Hut' });
    await write([live()], 0);
    expect(await write([live({ receiverId: second.id })], 0)).toEqual({ stored: 1, doubled: 0 });
  });
});
