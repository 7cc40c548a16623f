import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { applyDwellChanges } from '../../shared/contracts/dwell.ts';
import type { DwellChange, DwellPreview } from '../../shared/contracts/dwell.ts';
import { markAllDirty } from '../../server/database/dirty-blocks.ts';
import { DirtyBlock } from '../../server/database/entities/dirty-block.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { makeAllDirtyNights } from '../../worker/units/dirty-nights.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation, insertSpots } from '../helpers/switch-log-rows.ts';
import type { DwellSeed, LogStation, SpotSeed } from '../helpers/switch-log-rows.ts';

let api: TestApi;
let operator: { token: string; userId: string };
beforeAll(async () => {
  api = await startTestApi();
  operator = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'operator');
});
afterAll(() => api.close());

const startMs = Date.UTC(2026, 10, 29, 18);
const minuteMs = 60_000;
const nights = 4;
const nowMs = startMs + nights * 24 * 60 * minuteMs;

/** Four evenings of half an hour: both receivers hear three stations every 40 s and change antennas. */
async function makeStation(): Promise<{ station: LogStation; dwellIds: number[]; dwells: DwellSeed[] }> {
  const station = await insertLogStation(api.dataSource);
  const { stationId, receiverIds, antennaIds } = station;
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId, userId: operator.userId, role: 'operator' });
  const dwells: DwellSeed[] = [];
  const spots: SpotSeed[] = [];
  for (let night = 0; night < nights; night++) {
    const from = startMs + night * 24 * 60 * minuteMs;
    for (const [r, receiverId] of receiverIds.entries()) {
      for (let part = 0; part < 3; part++) {
        const antennaId = antennaIds[(r + part) % 2]!;
        const begin = from + part * 10 * minuteMs;
        dwells.push({ receiverId, antennaId, startMs: begin, endMs: begin + 10 * minuteMs });
      }
      for (let n = 0; n < 45; n++) {
        ['EA8QSH', 'JA1QSJ', 'K1QSL'].forEach((call, c) =>
          spots.push({
            ...{
              receiverId,
              call,
              timeMs: from + n * 40_000 + c * 7000 + r * 2000,
              freq100Hz: 18_100 + c * 30,
            },
            snrDb: 10 + ((n * 7 + r * 3 + c) % 11),
          }),
        );
      }
    }
  }
  const dwellIds = await insertDwells(api.dataSource, stationId, dwells);
  await insertSpots(api.dataSource, stationId, spots);
  await markAllDirty(api.dataSource.manager, stationId);
  await makeAllDirtyNights(api.dataSource, nowMs);
  return { station, dwellIds, dwells };
}

/** All units and tallies of a station, without the time at which they were made. */
async function units(stationId: number): Promise<unknown[]> {
  return api.dataSource.query(
    `SELECT night::text, antenna_a, antenna_b, unit_count, heard_only_count, encode(units, 'hex') AS units,
       encode(heard_only, 'hex') AS heard_only, NULL::jsonb AS tally
     FROM unit_pack WHERE station_id = $1
     UNION ALL
     SELECT night::text, 0, 0, spots, 0, '', '', tally FROM unit_night WHERE station_id = $1
     ORDER BY 1, 2, 3`,
    [stationId],
  );
}

describe('units after a correction of the switch log', () => {
  it('are those that making everything anew gives, for arbitrary corrections', async () => {
    let changed = 0;
    await fc.assert(
      fc.asyncProperty(
        fc.array(
          fc.record({
            kind: fc.nat(4),
            dwell: fc.nat(nights * 6 - 1),
            minutes: fc.integer({ min: 1, max: 9 }),
          }),
          { minLength: 1, maxLength: 2 },
        ),
        async (ideas) => {
          const { station, dwellIds, dwells } = await makeStation();
          const { stationId, verticalId } = station;
          const changes = ideas.map(({ kind, dwell, minutes }): DwellChange => {
            const [dwellId, seed] = [dwellIds[dwell]!, dwells[dwell]!];
            const within = new Date(seed.startMs + minutes * minuteMs).toISOString();
            if (kind === 0) return { action: 'edit', dwellId, antennaId: verticalId };
            if (kind === 1) return { action: 'edit', dwellId, endsAt: within };
            if (kind === 2) return { action: 'edit', dwellId, startsAt: within };
            if (kind === 3) return { action: 'split', dwellId, at: within, antennaId: verticalId };
            return { action: 'delete', dwellId };
          });
          const before = await units(stationId);
          const reply = await api.call(applyDwellChanges, {
            params: { stationId },
            token: operator.token,
            body: { changes },
          });
          if (reply.status !== 200) return;
          const marked = await api.dataSource.getRepository(DirtyBlock).countBy({ stationId });
          expect(marked).toBeGreaterThan(0);
          // A correction of one evening must not have every night made anew.
          expect(marked).toBeLessThan(24);
          const { preview } = reply.body as { preview: DwellPreview };
          expect(preview.nightsTouched.length).toBeLessThanOrEqual(ideas.length);
          await makeAllDirtyNights(api.dataSource, nowMs);
          const followed = await units(stationId);
          await markAllDirty(api.dataSource.manager, stationId);
          await makeAllDirtyNights(api.dataSource, nowMs);
          expect(followed).toEqual(await units(stationId));
          if (JSON.stringify(before) !== JSON.stringify(followed)) changed++;
        },
      ),
      { numRuns: 12, seed: 42, endOnFailure: true },
    );
    expect(changed).toBeGreaterThan(6);
  });
});
