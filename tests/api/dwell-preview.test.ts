import fc from 'fast-check';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { applyDwellChanges, previewDwellChanges, undoDwellChange } from '../../shared/contracts/dwell.ts';
import type { DwellChange, DwellPreview } from '../../shared/contracts/dwell.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation, insertSpots, readTags } from '../helpers/switch-log-rows.ts';
import type { DwellSeed, LogStation, TagRow } from '../helpers/switch-log-rows.ts';

let api: TestApi;
let operator: { token: string; userId: string };
beforeAll(async () => {
  api = await startTestApi();
  const { stationId } = await insertLogStation(api.dataSource);
  operator = await api.addPerson(stationId, 'operator');
});
afterAll(() => api.close());

const startMs = Date.UTC(2026, 10, 30, 18);
const iso = (secondsIn: number) => new Date(startMs + Math.round(secondsIn * 1000)).toISOString();
const guardSeconds = 20;

/** Counts from the database's view before and after: what the preview must have said. */
function recount(before: TagRow[], after: TagRow[]) {
  const counts = {
    spotsChangingAntenna: 0,
    spotsGainingAntenna: 0,
    spotsLosingAntenna: 0,
    spotsChangingGuard: 0,
  };
  expect(after.map((row) => row.key)).toEqual(before.map((row) => row.key));
  before.forEach((old, i) => {
    const now = after[i]!;
    if (old.antennaId !== now.antennaId) {
      counts.spotsChangingAntenna++;
      if (old.antennaId === null) counts.spotsGainingAntenna++;
      if (now.antennaId === null) counts.spotsLosingAntenna++;
    } else if (old.guarded !== now.guarded) counts.spotsChangingGuard++;
  });
  return counts;
}
const countsOf = ({
  spotsChangingAntenna,
  spotsGainingAntenna,
  spotsLosingAntenna,
  spotsChangingGuard,
}: DwellPreview) => ({ spotsChangingAntenna, spotsGainingAntenna, spotsLosingAntenna, spotsChangingGuard });

interface Setting {
  station: LogStation;
  token: string;
  dwellIds: number[];
  seeds: DwellSeed[];
}

const antennaOf = (station: LogStation, n: number) => [...station.antennaIds, station.verticalId][n % 3]!;

async function setUp(
  log: { receiver: number; gap: number; length: number; antenna: number }[],
  spots: { receiver: number; second: number; ms: number; unsure: boolean }[],
): Promise<Setting> {
  const station = await insertLogStation(api.dataSource);
  const { stationId } = station;
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId, userId: operator.userId, role: 'operator' });
  const ends = [0, 0];
  const seeds = log.map(({ receiver, gap, length, antenna }): DwellSeed => {
    const from = ends[receiver]! + gap;
    ends[receiver] = from + length;
    return {
      receiverId: station.receiverIds[receiver]!,
      antennaId: antennaOf(station, antenna),
      startMs: startMs + from * 1000,
      endMs: startMs + (from + length) * 1000,
    };
  });
  // The last dwell of the first receiver is still on.
  const last = seeds.findLast((seed) => seed.receiverId === station.receiverIds[0]);
  if (last) last.endMs = null;
  const dwellIds = await insertDwells(api.dataSource, stationId, seeds);
  await insertSpots(
    api.dataSource,
    stationId,
    spots.map(({ receiver, second, ms, unsure }, i) => ({
      receiverId: station.receiverIds[receiver]!,
      // As feeds write it: a time known to the minute only is the minute's start.
      timeMs: startMs + (unsure ? Math.floor(second / 60) * 60_000 : second * 1000 + ms),
      uncertaintySeconds: unsure ? 60 : 0,
      freq100Hz: 18_000 + i,
    })),
  );
  return { station, token: operator.token, dwellIds, seeds };
}

type Idea = { kind: number; dwell: number; share: number; antenna: number; shift: number };

/** Makes a change that has a fair chance to be accepted out of arbitrary numbers. */
function changesOf(idea: Idea, { station, dwellIds, seeds }: Setting): DwellChange[] {
  const at = idea.dwell % dwellIds.length;
  const [dwellId, seed] = [dwellIds[at]!, seeds[at]!];
  const from = (seed.startMs - startMs) / 1000;
  const to = seed.endMs === null ? from + 300 : (seed.endMs - startMs) / 1000;
  const within = iso(from + (to - from) * idea.share);
  const antennaId = antennaOf(station, idea.antenna);
  switch (idea.kind) {
    case 0:
      return [{ action: 'edit', dwellId, antennaId }];
    case 1:
      return [{ action: 'edit', dwellId, endsAt: within }];
    case 2:
      return [{ action: 'edit', dwellId, startsAt: within }];
    case 3:
      return [{ action: 'split', dwellId, at: within, antennaId }];
    case 4:
      return [{ action: 'delete', dwellId }];
    case 5:
      return [{ action: 'close', dwellId, at: within }];
    case 6: {
      const dwell = { receiverId: seed.receiverId, antennaId, startsAt: within, endsAt: iso(to), note: '' };
      return [
        { action: 'add', dwell },
        { action: 'edit', dwellId, endsAt: within },
      ];
    }
    default:
      return [{ action: 'edit', dwellId, startsAt: iso(from + idea.shift), endsAt: iso(to + idea.shift) }];
  }
}

describe('the preview of a correction', () => {
  it('says exactly what applying it changes, and undo changes it back, for arbitrary logs and corrections', async () => {
    let accepted = 0;
    let refused = 0;
    let moved = 0;
    await fc.assert(
      fc.asyncProperty(
        fc.array(
          fc.record({
            receiver: fc.nat(1),
            gap: fc.constantFrom(0, 0, 0, 7, 90),
            length: fc.integer({ min: 1, max: 400 }),
            antenna: fc.nat(2),
          }),
          { minLength: 1, maxLength: 12 },
        ),
        fc.array(
          fc.record({
            receiver: fc.nat(1),
            second: fc.nat(2400),
            ms: fc.nat(999),
            unsure: fc.boolean(),
          }),
          { minLength: 40, maxLength: 150 },
        ),
        fc.array(
          fc.record({
            kind: fc.nat(7),
            dwell: fc.nat(11),
            share: fc.double({ min: 0.05, max: 0.95, noNaN: true }),
            antenna: fc.nat(2),
            shift: fc.integer({ min: -60, max: 60 }),
          }),
          { minLength: 1, maxLength: 3 },
        ),
        async (log, spots, ideas) => {
          const setting = await setUp(log, spots);
          const { station, token } = setting;
          const { stationId } = station;
          const call = { params: { stationId }, token };
          const body = { changes: ideas.flatMap((idea) => changesOf(idea, setting)) };
          const before = await readTags(api.dataSource, stationId, guardSeconds);
          const preview = await api.call(previewDwellChanges, { ...call, body });
          expect(await readTags(api.dataSource, stationId, guardSeconds)).toEqual(before);

          const applied = await api.call(applyDwellChanges, { ...call, body });
          const after = await readTags(api.dataSource, stationId, guardSeconds);
          if (applied.status !== 200) {
            refused++;
            expect([400, 409], applied.text).toContain(applied.status);
            expect(after).toEqual(before);
            return;
          }
          accepted++;
          expect(preview.status, preview.text).toBe(200);
          const said = preview.body as DwellPreview;
          const reply = applied.body as { batchId: string; preview: DwellPreview };
          expect(countsOf(said)).toEqual(recount(before, after));
          expect(reply.preview).toEqual(said);
          moved += said.spotsChangingAntenna + said.spotsChangingGuard;

          const undone = await api.call(undoDwellChange, {
            params: { stationId, batchId: reply.batchId },
            token,
          });
          expect(undone.status, undone.text).toBe(200);
          expect(await readTags(api.dataSource, stationId, guardSeconds)).toEqual(before);
          expect(countsOf((undone.body as { preview: DwellPreview }).preview)).toEqual(
            recount(after, before),
          );
        },
      ),
      { numRuns: 60, seed: 20261130, endOnFailure: true },
    );
    // A property that only ever saw refusals would prove nothing.
    expect(accepted).toBeGreaterThan(20);
    expect(refused).toBeGreaterThan(3);
    expect(moved).toBeGreaterThan(300);
  });

  it('names blocks and nights that the correction reaches', async () => {
    const setting = await setUp(
      [{ receiver: 0, gap: 0, length: 1200, antenna: 0 }],
      [
        { receiver: 0, second: 30, ms: 0, unsure: false },
        { receiver: 0, second: 2399, ms: 0, unsure: false },
      ],
    );
    const { stationId } = setting.station;
    const reply = await api.call(previewDwellChanges, {
      params: { stationId },
      token: setting.token,
      body: { changes: [{ action: 'close', dwellId: setting.dwellIds[0]!, at: iso(1000) }] },
    });
    // 18:16:40 to the last spot at 18:39:59, and the 255 s before in which a doubtful time could lie.
    expect(reply.body).toEqual({
      spotsChangingAntenna: 1,
      spotsGainingAntenna: 0,
      spotsLosingAntenna: 1,
      spotsChangingGuard: 0,
      blocksTouched: 3,
      nightsTouched: ['2026-11-30'],
      warnings: [],
    });
  });
});
