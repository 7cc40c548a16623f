import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { connect } from 'node:net';
import { createInterface } from 'node:readline';
import type { DataSource } from 'typeorm';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { demoAccounts } from '../../server/platform/demo-accounts.ts';
import { createLogger } from '../../server/platform/logger.ts';
import { verifyPassword } from '../../server/platform/password.ts';
import { comparisonQuestion } from '../../shared/contracts/comparison.ts';
import { nightIndexOf, nightStartMs } from '../../shared/radio/night.ts';
import { readDemoWorld, type DemoWorld } from '../../worker/fake-feed/demo-world.ts';
import { createLiveStation } from '../../worker/fake-feed/live-station.ts';
import { loadDemo } from '../../worker/fake-feed/load-demo.ts';
import { createTestDatabase, type TestDatabase } from '../helpers/database.ts';

const nights = 2;
const dayMs = 86_400_000;
const hourMs = 3_600_000;

let database: TestDatabase;
let dataSource: DataSource;
/** The evening of the night on which the demo is loaded, some hours after noon. */
let nowMs: number;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = createDataSource({ url: database.url, poolSize: 4 });
  await connectDataSource(dataSource);
});
afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

function startScript(name: string, env: Record<string, string>) {
  const path = new URL(`../../worker/fake-feed/${name}.ts`, import.meta.url).pathname;
  return spawn(process.execPath, ['--import', 'tsx', path], {
    env: { ...process.env, DATABASE_URL: database.url, DEMO_NIGHTS: String(nights), ...env },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
}

async function theWorld(): Promise<DemoWorld> {
  const world = await readDemoWorld(dataSource.manager);
  if (world === null) throw new Error('There is no demo station.');
  return world;
}

async function count(sql: string, parameters: unknown[] = []): Promise<number> {
  const rows: { n: number }[] = await dataSource.query(`SELECT count(*) AS n FROM ${sql}`, parameters);
  return rows[0]!.n;
}

/** What the simulator itself says was heard: spots equal in receiver, second, call and frequency are one. */
function countSimulated(world: DemoWorld, fromMs: number, toMs: number): number {
  const keys = new Set<string>();
  for (const batch of world.simulator.spots(fromMs, toMs)) {
    for (const { receiver, timeMs, call, freqKhz } of batch) {
      keys.add(`${receiver} ${Math.floor(timeMs / 1000)} ${call} ${freqKhz}`);
    }
  }
  return keys.size;
}

const wholeSecond = (timeMs: number): number => Math.floor(timeMs / 1000) * 1000;

async function logOf(receiver: string, fromMs: number, toMs: number): Promise<string[]> {
  const world = await theWorld();
  const names = new Map([...world.antennaIds].map(([name, id]) => [id, name]));
  const rows: { antenna_id: number; starts_at: Date; ends_at: Date | null; source: string }[] =
    await dataSource.query(
      `SELECT antenna_id, starts_at, ends_at, source FROM dwell
       WHERE receiver_id = $1 AND starts_at >= $2 AND starts_at < $3 ORDER BY starts_at`,
      [world.receiverIds.get(receiver), new Date(fromMs), new Date(toMs)],
    );
  const minute = (time: Date | null) => (time === null ? 'now' : (time.getTime() - fromMs) / 60_000);
  return rows.map(
    (row) => `${names.get(row.antenna_id)} ${minute(row.starts_at)} to ${minute(row.ends_at)}, ${row.source}`,
  );
}

describe('loading the demo', () => {
  it('goes on after being killed half-way, and stores every spot of the simulator exactly once', async () => {
    const child = startScript('load-demo', {});
    for await (const line of createInterface({ input: child.stdout })) {
      if (!line.startsWith('Night 1 of')) continue;
      child.kill('SIGKILL');
      break;
    }
    if (child.signalCode === null && child.exitCode === null) await once(child, 'exit');
    expect(child.signalCode).toBe('SIGKILL');
    const world = await theWorld();
    const { startMs } = world.simulator;
    const halfWay = await count('spot');
    expect(halfWay).toBeGreaterThan(10_000);

    const loadedMs = Date.now();
    await loadDemo(dataSource, { nowMs: loadedMs, nights });
    const expected = countSimulated(world, startMs, wholeSecond(loadedMs));
    expect(expected).toBeGreaterThan(halfWay);
    expect(await count('spot')).toBe(expected);

    const planned = world.simulator.dwells(startMs, wholeSecond(loadedMs) + 1);
    expect(await count('dwell')).toBe(planned.length);
    expect(await count('dwell WHERE ends_at IS NULL')).toBe(3);
    expect(await count('station')).toBe(1);
    expect(await count('antenna')).toBe(8);
    expect(await count('feed')).toBe(1);
  });

  it('leaves units and bearings behind, so that the first page has an answer', async () => {
    expect(await count('dirty_block')).toBe(0);
    expect(await count('unit_night')).toBeGreaterThanOrEqual(nights);
    expect(
      await count('call_sign c WHERE NOT EXISTS (SELECT FROM call_bearing b WHERE b.call_id = c.id)'),
    ).toBe(0);
    const units: { total: number }[] = await dataSource.query(
      'SELECT sum(unit_count) AS total FROM unit_pack',
    );
    expect(units[0]!.total).toBeGreaterThan(10_000);
  });

  it('makes an account a role, which the stated password opens', async () => {
    for (const { email, role, password } of demoAccounts) {
      const rows: { role: string; password_hash: string }[] = await dataSource.query(
        'SELECT m.role, u.password_hash FROM app_user u JOIN membership m ON m.user_id = u.id WHERE u.email = $1',
        [email],
      );
      expect(rows.map((row) => row.role)).toEqual([role]);
      expect(rows[0]!.password_hash).toMatch(/^\$argon2id\$/);
      expect(await verifyPassword(rows[0]!.password_hash, password)).toBe(true);
    }
  });

  it('keeps trials of the analyst that the program can ask', async () => {
    const rows: { question: unknown }[] = await dataSource.query('SELECT question FROM trial');
    expect(rows.length).toBeGreaterThanOrEqual(4);
    for (const { question } of rows) expect(comparisonQuestion.parse(question)).toEqual(question);
  });

  it('catches up with the same world when it is opened a day later', async () => {
    const world = await theWorld();
    const { longitude } = world.scenario.place;
    // Late in the evening of the day after tomorrow's noon, wherever in the day this test runs.
    nowMs = nightStartMs(nightIndexOf(Date.now(), longitude) + 1, longitude) + 9 * hourMs;
    const before = await count('spot');
    const { stored } = await loadDemo(dataSource, { nowMs, nights });
    expect(stored).toBeGreaterThan(10_000);
    expect(await count('spot')).toBe(before + stored);
    expect(await count('spot')).toBe(countSimulated(world, world.simulator.startMs, nowMs));
    expect(await count('dwell')).toBe(world.simulator.dwells(world.simulator.startMs, nowMs + 1).length);
  });

  it('does nothing when nothing is missing', async () => {
    expect(await loadDemo(dataSource, { nowMs, nights })).toMatchObject({ stored: 0, nightsMade: 0 });
  });

  it('makes up for the last nights only after a long absence', async () => {
    const world = await theWorld();
    const { longitude } = world.scenario.place;
    const laterMs = nowMs + 20 * dayMs;
    const earliestMs = nightStartMs(nightIndexOf(laterMs, longitude) - 1, longitude);
    await loadDemo(dataSource, { nowMs: laterMs, nights: 1 });
    expect(
      await count('spot WHERE heard_at >= $1 AND heard_at < $2', [
        new Date(nowMs + hourMs),
        new Date(earliestMs),
      ]),
    ).toBe(0);
    expect(await count('spot WHERE heard_at >= $1', [new Date(earliestMs)])).toBe(
      countSimulated(world, earliestMs, laterMs),
    );
    expect(await count('dwell WHERE ends_at IS NULL')).toBe(3);
    nowMs = laterMs;
  });
});

describe('the switch of the live demo', () => {
  const logger = createLogger('test', 'silent');
  const receiver = 'EI7QSA';

  /** The moment after `afterMs` at which the plan puts the receiver on another antenna. */
  const nextSwitch = (world: DemoWorld, afterMs: number): number =>
    world.simulator.dwells(afterMs + 1, afterMs + dayMs).find((dwell) => dwell.receiver === receiver)!
      .startMs;

  it('logs the planned switches as they fall due, closing what was on', async () => {
    const world = await theWorld();
    const fromMs = nextSwitch(world, nowMs);
    const toMs = fromMs + 1_800_000;
    const live = createLiveStation(dataSource, world, nowMs, logger);
    for (let atMs = nowMs; atMs <= toMs; atMs += 60_000) await live.work(atMs);
    await live.work(toMs);
    const planned = world.simulator.dwells(fromMs, toMs + 1).filter((dwell) => dwell.receiver === receiver);
    expect(planned.length).toBeGreaterThanOrEqual(2);
    const minute = (timeMs: number) => (timeMs - fromMs) / 60_000;
    expect(await logOf(receiver, fromMs, toMs + 1)).toEqual(
      planned.map(({ antenna, startMs, endMs }) => {
        const end = endMs === null || endMs > toMs ? 'now' : minute(endMs);
        return `${antenna} ${minute(startMs)} to ${end}, plan`;
      }),
    );
    expect(await count('dwell WHERE ends_at IS NULL')).toBe(3);
    nowMs = nextSwitch(world, toMs) + 1500;
    await live.work(nowMs);
  });

  it('hears through the antenna that a person logs, until the plan switches again', async () => {
    const world = await theWorld();
    const byHandMs = nowMs + 60_000;
    const planned = world.simulator.antennaAt(receiver, byHandMs);
    const chosen = planned === 'Ground wire' ? 'Vertical' : 'Ground wire';
    await dataSource.query('UPDATE dwell SET ends_at = $2 WHERE receiver_id = $1 AND ends_at IS NULL', [
      world.receiverIds.get(receiver),
      new Date(byHandMs),
    ]);
    await dataSource.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, source) VALUES ($1, $2, $3, $4, 'hand')`,
      [world.stationId, world.receiverIds.get(receiver), world.antennaIds.get(chosen), new Date(byHandMs)],
    );
    const live = createLiveStation(dataSource, world, nowMs, logger);
    await live.work(byHandMs + 1000);
    expect(live.antennaAt(receiver, byHandMs - 1)).toBe(planned);
    expect(live.antennaAt(receiver, byHandMs + 1)).toBe(chosen);
    const switchMs = nextSwitch(world, byHandMs);
    await live.work(switchMs + 500);
    await live.work(switchMs + 1500);
    expect(live.antennaAt(receiver, switchMs - 1)).toBe(chosen);
    const after = world.simulator.antennaAt(receiver, switchMs + 1);
    expect(live.antennaAt(receiver, switchMs + 1)).toBe(after);
    expect(await logOf(receiver, byHandMs, byHandMs + hourMs)).toEqual([
      `${chosen} 0 to ${(switchMs - byHandMs) / 60_000}, hand`,
      `${after} ${(switchMs - byHandMs) / 60_000} to now, plan`,
    ]);
    nowMs = switchMs + 1500;
  });

  it('leaves a planned switch out where a person has logged something else already', async () => {
    const world = await theWorld();
    const switchMs = nextSwitch(world, nowMs);
    const thenMs = nextSwitch(world, switchMs);
    const before = await logOf(receiver, switchMs - 1, switchMs + hourMs);
    await dataSource.query('UPDATE dwell SET ends_at = $2 WHERE receiver_id = $1 AND ends_at IS NULL', [
      world.receiverIds.get(receiver),
      new Date(switchMs - 60_000),
    ]);
    await dataSource.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, ends_at, source)
       VALUES ($1, $2, $3, $4, $5, 'hand')`,
      [
        world.stationId,
        world.receiverIds.get(receiver),
        world.antennaIds.get('South wire'),
        new Date(switchMs - 60_000),
        new Date(switchMs + 120_000),
      ],
    );
    const live = createLiveStation(dataSource, world, nowMs, logger);
    await live.work(switchMs + 1000);
    expect(await logOf(receiver, switchMs - 1, switchMs + hourMs)).toEqual(before);
    expect(live.antennaAt(receiver, switchMs + 60_000)).toBe('South wire');
    await live.work(thenMs + 1000);
    expect(await logOf(receiver, thenMs, thenMs + hourMs)).toEqual([
      `${world.simulator.antennaAt(receiver, thenMs + 1)} 0 to now, plan`,
    ]);
  });
});

describe('the fake feed beside a database', () => {
  it('says where it listens and speaks of the three receivers', async () => {
    const world = await theWorld();
    const child = startScript('main', { FEED_PORT: '0', FEED_SPEED: '600', LOG_LEVEL: 'info' });
    try {
      let port = 0;
      for await (const line of createInterface({ input: child.stdout })) {
        const entry = JSON.parse(line) as { msg: string; port?: number };
        if (entry.msg !== 'listening') continue;
        port = entry.port ?? 0;
        break;
      }
      expect(await dataSource.query('SELECT host, port FROM feed WHERE id = $1', [world.feedId])).toEqual([
        { host: '127.0.0.1', port },
      ]);
      const socket = connect(port, '127.0.0.1');
      socket.write('EI7QSB\r\n');
      const receivers = new Set<string>();
      for await (const line of createInterface({ input: socket })) {
        const found = /^DX de (EI7Q\w\w)-#:/.exec(line);
        if (found) receivers.add(found[1]!);
        if (receivers.size === 3) break;
      }
      expect([...receivers].sort()).toEqual([...world.receiverIds.keys()].sort());
      socket.destroy();
    } finally {
      child.kill('SIGTERM');
      if (child.exitCode === null) await once(child, 'exit');
    }
    expect(child.exitCode).toBe(0);
  });
});
