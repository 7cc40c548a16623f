import type { DataSource } from 'typeorm';
import { Feed } from '../../server/database/entities/feed.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { formatSpotLine } from '../../worker/fake-feed/spot-line.ts';
import { insertStation, type StationRows } from './station-rows.ts';

export interface FeedStation extends StationRows {
  feedId: number;
  /** Receivers EI7QSA and EI7QSC, both on the feed. */
  receivers: { EI7QSA: number; EI7QSC: number };
}

/** A station with two skimmers and a feed at a port of this machine. */
export async function insertFeedStation(dataSource: DataSource, port: number): Promise<FeedStation> {
  const station = await insertStation(dataSource);
  const { stationId } = station;
  const receivers = dataSource.getRepository(Receiver);
  const first = await receivers.save({ stationId, callSign: 'EI7QSA', label: 'Hut' });
  const second = await receivers.save({ stationId, callSign: 'EI7QSC', label: 'Tower' });
  const feed = await dataSource
    .getRepository(Feed)
    .save({ stationId, name: 'Practice', host: '127.0.0.1', port, loginCall: 'EI7QSB' });
  return { ...station, feedId: feed.id, receivers: { EI7QSA: first.id, EI7QSC: second.id } };
}

const calls = [
  'EA8QSH',
  'W1QRB',
  'JA1QTC',
  'VK6QUD',
  'UA9QSE',
  'PY2QRF',
  'VE7QTG',
  'ZS1QUH',
  'K5QSJ',
  'LU3QTK',
];

/** Lines heard now, each another call or frequency: the first 20,000 differ. `n` counts from 0. */
export function spotLine(n: number, receiver = 'EI7QSA', timeMs = Date.now()): string {
  return formatSpotLine({
    timeMs,
    receiver,
    call: calls[n % calls.length]!,
    freqKhz: 1800 + (Math.floor(n / calls.length) % 2000) / 10,
    mode: 'CW',
    snrDb: n % 50,
    speedWpm: 22,
    kind: 'CQ',
  });
}

/** What a spot line and a stored spot have in common, as text. */
export const lineKeys = (lines: readonly string[]): string[] =>
  lines
    .map((line) => {
      const [, , receiver, freq, call] = line.split(/\s+/);
      return `${receiver!.replace('-#:', '')} ${call} ${freq}`;
    })
    .sort();

/** The same of every stored spot of a station, doubles included if there were any. */
export async function storedKeys(dataSource: DataSource, stationId: number): Promise<string[]> {
  const rows: { key: string }[] = await dataSource.query(
    `SELECT r.call_sign || ' ' || c.call || ' ' || to_char(s.freq_100hz / 10.0, 'FM999999.0') AS key
     FROM spot s JOIN call_sign c ON c.id = s.call_id
     JOIN receiver r ON r.station_id = s.station_id AND r.id = s.receiver_id
     WHERE s.station_id = $1`,
    [stationId],
  );
  return rows.map(({ key }) => key).sort();
}

export interface HealthRow {
  state: string;
  lines_last_minute: number;
  lines_total: number;
  stored_total: number;
  doubled_total: number;
  refused_total: number;
  other_receiver_total: number;
  last_error: string | null;
}

export async function readHealth(dataSource: DataSource, feedId: number): Promise<HealthRow | undefined> {
  const rows: HealthRow[] = await dataSource.query('SELECT * FROM feed_health WHERE feed_id = $1', [feedId]);
  return rows[0];
}
