import type { EntityManager } from 'typeorm';
import type { DemoWorld } from './demo-world.ts';
import type { AntennaLookup } from './simulator.ts';

export interface DemoAntennas {
  /** Reads what people logged that reaches beyond `sinceMs`. */
  refresh(manager: EntityManager, sinceMs: number): Promise<void>;
  /** What the receivers hear through: what a person logged, else the plan's own switching. */
  antennaAt: AntennaLookup;
}

/**
 * Lets the simulated station follow the demo's user: a dwell that a person logged by hand (or through an
 * API token) counts as the switch truly turned. An antenna that the simulator has never heard of is
 * silent. The plan's own dwells are not read back: where the log forgot them, the switch turned all the same.
 */
export function followSwitchLog(world: DemoWorld): DemoAntennas {
  const receivers = new Map([...world.receiverIds].map(([callSign, id]) => [id, callSign]));
  const antennas = new Map([...world.antennaIds].map(([name, id]) => [id, name]));
  let logged: { receiver: string; antenna: string | null; startMs: number; endMs: number }[] = [];
  return {
    async refresh(manager, sinceMs) {
      const rows: { receiver_id: number; antenna_id: number; starts_at: Date; ends_at: Date | null }[] =
        await manager.query(
          `SELECT receiver_id, antenna_id, starts_at, ends_at FROM dwell
           WHERE station_id = $1 AND source IN ('hand', 'token') AND during && tstzrange($2, NULL)`,
          [world.stationId, new Date(sinceMs)],
        );
      logged = rows.flatMap((row) => {
        const receiver = receivers.get(row.receiver_id);
        if (receiver === undefined) return [];
        const antenna = antennas.get(row.antenna_id) ?? null;
        return [
          { receiver, antenna, startMs: row.starts_at.getTime(), endMs: row.ends_at?.getTime() ?? Infinity },
        ];
      });
    },
    antennaAt(receiver, timeMs) {
      const byHand = logged.find(
        (dwell) => dwell.receiver === receiver && dwell.startMs <= timeMs && timeMs < dwell.endMs,
      );
      return byHand === undefined ? world.simulator.antennaAt(receiver, timeMs) : byHand.antenna;
    },
  };
}
