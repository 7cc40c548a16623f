import type { EntityManager } from 'typeorm';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { AuditEntry } from '../../server/database/entities/audit-entry.ts';
import { Feed } from '../../server/database/entities/feed.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { Station } from '../../server/database/entities/station.ts';
import { Trial } from '../../server/database/entities/trial.ts';
import { User } from '../../server/database/entities/user.ts';
import { demoAccounts } from '../../server/platform/demo-accounts.ts';
import { hashPassword } from '../../server/platform/password.ts';
import { demoTrials } from './demo-trials.ts';
import { worldAction, type WorldRecord } from './demo-world.ts';
import { createDemoScenario } from './scenario.ts';

export interface DemoStationOptions {
  seed: number;
  /** `YYYY-MM-DD` */
  firstNight: string;
  feedHost: string;
  feedPort: number;
}

export type DemoAccount = (typeof demoAccounts)[number] & { passwordHash: string };

/** Slow on purpose (argon2id), so it is done before the transaction begins. */
export function hashDemoPasswords(): Promise<DemoAccount[]> {
  return Promise.all(
    demoAccounts.map(async (account) => ({ ...account, passwordHash: await hashPassword(account.password) })),
  );
}

/**
 * Makes the demo station with its people, receivers, antennas, feed and trials, and notes the world behind
 * it: in the caller's transaction, so that a station that is there is a whole one.
 */
export async function makeDemoStation(
  manager: EntityManager,
  options: DemoStationOptions,
  accounts: readonly DemoAccount[],
): Promise<void> {
  const scenario = createDemoScenario(options.firstNight);
  const { id: stationId } = await manager.save(
    manager.create(Station, {
      name: scenario.stationName,
      callSign: scenario.callSign,
      locator: scenario.locator,
      latitudeDeg: scenario.place.latitude,
      longitudeDeg: scenario.place.longitude,
      timeZone: scenario.timeZone,
      ituRegion: scenario.ituRegion,
      isDemo: true,
    }),
  );
  const people = await addPeople(manager, stationId, accounts);

  const receivers: Record<string, number> = {};
  for (const { callSign, label, notes } of scenario.receivers) {
    const row = await manager.save(manager.create(Receiver, { stationId, callSign, label, notes }));
    receivers[callSign] = row.id;
  }
  const antennas: Record<string, number> = {};
  for (const antenna of scenario.antennas) {
    const row = await manager.save(manager.create(Antenna, { stationId, ...antenna }));
    antennas[antenna.name] = row.id;
  }
  const feed = await manager.save(
    manager.create(Feed, {
      stationId,
      name: 'Practice feed',
      host: options.feedHost,
      port: options.feedPort,
      loginCall: scenario.callSign,
    }),
  );
  const createdBy = people.get('analyst') ?? null;
  await manager.save(
    demoTrials(antennas, options.firstNight).map((trial) =>
      manager.create(Trial, { ...trial, stationId, createdBy }),
    ),
  );
  const record: WorldRecord = {
    seed: options.seed,
    firstNight: options.firstNight,
    receivers,
    antennas,
    feedId: feed.id,
  };
  await manager.insert(AuditEntry, {
    stationId,
    action: worldAction,
    target: scenario.stationName,
    detail: record,
  });
}

/** Role -> user id. People who are in the database already (from a demo station deleted since) stay as they are. */
async function addPeople(
  manager: EntityManager,
  stationId: number,
  accounts: readonly DemoAccount[],
): Promise<Map<string, string>> {
  const people = new Map<string, string>();
  for (const { email, name, passwordHash, role } of accounts) {
    const known = await manager.findOneBy(User, { email });
    const { id } = known ?? (await manager.save(manager.create(User, { email, name, passwordHash })));
    await manager.save(manager.create(Membership, { stationId, userId: id, role }));
    people.set(role, id);
  }
  return people;
}
