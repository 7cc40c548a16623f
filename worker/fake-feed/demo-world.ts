import type { EntityManager } from 'typeorm';
import { z } from 'zod';
import { createDemoScenario, type Scenario } from './scenario.ts';
import { createSimulator, type Simulator } from './simulator.ts';

/**
 * What ties the demo station's rows to the simulated world behind them: seed and first night (the same
 * world must go on at every later start, days later too), and which row is which antenna and receiver.
 * By id, not by name: people may rename them.
 */
export const worldRecord = z.object({
  seed: z.number().int(),
  firstNight: z.iso.date(),
  /** The scenario's call sign of the receiver -> id. */
  receivers: z.record(z.string(), z.number().int()),
  /** The scenario's name of the antenna -> id. */
  antennas: z.record(z.string(), z.number().int()),
  feedId: z.number().int(),
});
export type WorldRecord = z.infer<typeof worldRecord>;

/**
 * The world is kept in the audit trail, in the transaction that makes the station: nobody can edit it by
 * mistake there, and it is there if and only if the station is.
 */
export const worldAction = 'demo.make';

export interface DemoWorld {
  stationId: number;
  feedId: number;
  scenario: Scenario;
  simulator: Simulator;
  receiverIds: ReadonlyMap<string, number>;
  antennaIds: ReadonlyMap<string, number>;
}

/** The demo station of this database; null when it has none yet. */
export async function readDemoWorld(manager: EntityManager): Promise<DemoWorld | null> {
  const rows: { station_id: number; detail: unknown }[] = await manager.query(
    `SELECT s.id AS station_id, e.detail FROM station s
     JOIN audit_entry e ON e.station_id = s.id AND e.action = $1
     WHERE s.is_demo ORDER BY e.id LIMIT 1`,
    [worldAction],
  );
  const row = rows[0];
  if (row === undefined) return null;
  const record = worldRecord.parse(row.detail);
  const scenario = createDemoScenario(record.firstNight);
  return {
    stationId: row.station_id,
    feedId: record.feedId,
    scenario,
    simulator: createSimulator({ seed: record.seed, scenario }),
    receiverIds: new Map(Object.entries(record.receivers)),
    antennaIds: new Map(Object.entries(record.antennas)),
  };
}
