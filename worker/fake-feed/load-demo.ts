import type { DataSource } from 'typeorm';
import { z } from 'zod';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { inTransaction } from '../../server/database/transaction.ts';
import { nightEndMs, nightIndexOf, nightStartMs } from '../../shared/radio/night.ts';
import { bandOfKhz } from '../../shared/radio/bands.ts';
import { ensureBearings } from '../bearings/bearing-store.ts';
import type { SpotRecord } from '../spots/spot-record.ts';
import { writeSpots } from '../spots/spot-writer.ts';
import { makeAllDirtyNights } from '../units/dirty-nights.ts';
import { followSwitchLog } from './demo-antennas.ts';
import { hashDemoPasswords, makeDemoStation } from './demo-station.ts';
import { postPlan } from './demo-switch-log.ts';
import { readDemoWorld, type DemoWorld } from './demo-world.ts';
import { demoFirstNight, demoNights, demoSeed } from './scenario.ts';
import type { SimulatedSpot } from './simulator.ts';

export interface LoadDemoOptions {
  /** The present, UTC milliseconds. */
  nowMs: number;
  /** Whole nights before the present one; 30 unless given. The most that a later start catches up, too. */
  nights?: number;
  /** Seed of a world that is made now; one that is there keeps its own. */
  seed?: number;
  feedHost?: string;
  feedPort?: number;
  /** A sentence for each step. */
  onProgress?: (text: string) => void;
}

export interface LoadedDemo {
  stationId: number;
  /** Spots that this call added. */
  stored: number;
  /** Nights whose units this call made. */
  nightsMade: number;
}

/** Any constant that nothing else locks. */
const loadLock = 1_764_547_201;
const secondMs = 1000;

/**
 * Brings the demo station up to the present: makes it when there is none, then adds the switch log and the
 * spots since the last spot heard, so that a first start, one after kill -9 and one a week later are the
 * same case. Every step leaves the database in a state from which the next call goes on: the station comes
 * in one transaction, the switch log in another that adds nothing twice, the spots night after night in
 * order of time, the units from the marks that the spots left.
 */
export async function loadDemo(dataSource: DataSource, options: LoadDemoOptions): Promise<LoadedDemo> {
  const lock = dataSource.createQueryRunner();
  await lock.connect();
  try {
    await lock.query('SELECT pg_advisory_lock($1)', [loadLock]);
    try {
      return await bringUpToDate(dataSource, options);
    } finally {
      await lock.query('SELECT pg_advisory_unlock($1)', [loadLock]);
    }
  } finally {
    await lock.release();
  }
}

async function bringUpToDate(dataSource: DataSource, options: LoadDemoOptions): Promise<LoadedDemo> {
  const { nights = demoNights, onProgress = () => undefined } = options;
  // Whole seconds, so that no second is cut in two: the next call starts with the one after the last spot's.
  const nowMs = Math.floor(options.nowMs / secondMs) * secondMs;
  const world = (await readDemoWorld(dataSource.manager)) ?? (await makeWorld(dataSource, options));
  const longitude = world.scenario.place.longitude;
  const earliestMs = nightStartMs(nightIndexOf(nowMs, longitude) - nights, longitude);
  const heardMs = await lastHeardMs(dataSource, world);
  const fromMs = Math.max(world.simulator.startMs, earliestMs, heardMs === null ? 0 : heardMs + secondMs);

  const { added } = await postPlan(dataSource, world, fromMs, nowMs, fromMs === earliestMs);
  if (added > 1) onProgress(`Switch log: ${count(added)} dwells`);
  const antennas = followSwitchLog(world);
  await antennas.refresh(dataSource.manager, fromMs);
  const feed = world.simulator.live({ fromMs, antennaAt: antennas.antennaAt });
  const last = nightIndexOf(nowMs, longitude);
  const first = nightIndexOf(fromMs, longitude);
  let stored = 0;
  for (let night = first; night <= last && fromMs < nowMs; night++) {
    const spots = feed.advance(Math.min(nowMs, nightEndMs(night, longitude)));
    stored += await storeSpots(dataSource, world, spots);
    if (first < last) onProgress(`Night ${night - first + 1} of ${last - first + 1}: ${count(stored)} spots`);
  }
  await storeBearings(dataSource, world);
  const nightsMade = await makeAllDirtyNights(dataSource, nowMs, ([night]) =>
    onProgress(`Units of the night of ${night}`),
  );
  return { stationId: world.stationId, stored, nightsMade };
}

function count(value: number): string {
  return value.toLocaleString('en-GB');
}

async function makeWorld(dataSource: DataSource, options: LoadDemoOptions): Promise<DemoWorld> {
  const { nowMs, nights = demoNights, seed = demoSeed, feedHost = '127.0.0.1', feedPort = 7373 } = options;
  const accounts = await hashDemoPasswords();
  const firstNight = demoFirstNight(nowMs, nights);
  await inTransaction(dataSource, (manager) =>
    makeDemoStation(manager, { seed, firstNight, feedHost, feedPort }, accounts),
  );
  const world = await readDemoWorld(dataSource.manager);
  if (world === null) throw new Error('The demo station was made and cannot be found.');
  options.onProgress?.('The station, its people, antennas and receivers');
  return world;
}

/** The last live spot. What people import stands apart and may lie in any year. */
async function lastHeardMs(dataSource: DataSource, { stationId }: DemoWorld): Promise<number | null> {
  const rows: { heard_at: Date }[] = await dataSource.query(
    'SELECT heard_at FROM spot WHERE station_id = $1 AND import_id = 0 ORDER BY heard_at DESC LIMIT 1',
    [stationId],
  );
  return rows[0]?.heard_at.getTime() ?? null;
}

async function storeSpots(
  dataSource: DataSource,
  world: DemoWorld,
  heard: readonly SimulatedSpot[],
): Promise<number> {
  const spots = heard.map((spot): SpotRecord => {
    const receiverId = world.receiverIds.get(spot.receiver);
    const bandMetres = bandOfKhz(spot.freqKhz);
    if (receiverId === undefined || bandMetres === null) {
      throw new Error(
        `${spot.receiver} heard ${spot.call} on ${spot.freqKhz} kHz, outside of the demo's world.`,
      );
    }
    return {
      heardAtMs: spot.timeMs,
      receiverId,
      call: spot.call,
      freq100Hz: Math.round(spot.freqKhz * 10),
      bandMetres,
      snrDb: spot.snrDb,
      speedWpm: spot.speedWpm,
      mode: spot.mode,
      uncertaintySeconds: 0,
      feedMinute: null,
    };
  });
  const { stored } = await writeSpots(dataSource, { stationId: world.stationId, importId: 0, spots });
  return stored;
}

async function storeBearings(dataSource: DataSource, world: DemoWorld): Promise<void> {
  const rows: { id: number }[] = await dataSource.query('SELECT id FROM call_sign WHERE call = ANY($1)', [
    world.simulator.stations.map(({ call }) => call),
  ]);
  await inTransaction(dataSource, (manager) =>
    ensureBearings(
      manager,
      world.stationId,
      rows.map(({ id }) => id),
    ),
  );
}

const environment = z.object({
  DATABASE_URL: z.string().min(1, 'DATABASE_URL is missing: give a PostgreSQL address.'),
  FEED_HOST: z.string().default('127.0.0.1'),
  FEED_PORT: z.coerce.number().int().min(1).max(65535).default(7373),
  DEMO_SEED: z.coerce.number().int().default(demoSeed),
  DEMO_NIGHTS: z.coerce.number().int().min(0).max(400).default(demoNights),
});

/** The script: exit code 0 = up to date, 1 = failed, 2 = a setting is wrong. */
async function runAsScript(): Promise<number> {
  const parsed = environment.safeParse(process.env);
  if (!parsed.success) {
    const sentences = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
    process.stderr.write(`The demo cannot be loaded. ${sentences.join(' ')}\n`);
    return 2;
  }
  const env = parsed.data;
  const dataSource = createDataSource({
    url: env.DATABASE_URL,
    poolSize: 4,
    applicationName: 'whichwire load-demo',
  });
  await connectDataSource(dataSource, { waitSeconds: 60 });
  try {
    await loadDemo(dataSource, {
      nowMs: Date.now(),
      nights: env.DEMO_NIGHTS,
      seed: env.DEMO_SEED,
      feedHost: env.FEED_HOST,
      feedPort: env.FEED_PORT,
      onProgress: (text) => process.stdout.write(`${text}\n`),
    });
    return 0;
  } catch (error) {
    process.stderr.write(`Loading the demo failed; the next start goes on from here. ${String(error)}\n`);
    return 1;
  } finally {
    await dataSource.destroy();
  }
}

// By the file's name, as in migrate.ts: bundled into another entry this must not run by itself.
if (/[\\/]load-demo\.(ts|js)$/.test(process.argv[1] ?? '')) {
  process.exitCode = await runAsScript();
}
