import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { applyDwellChanges, switchReceiver } from '../../shared/contracts/dwell.ts';
import type { Dwell as DwellReply, DwellChange } from '../../shared/contracts/dwell.ts';
import { Dwell } from '../../server/database/entities/dwell.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertLogStation } from '../helpers/switch-log-rows.ts';
import type { LogStation } from '../helpers/switch-log-rows.ts';

/** The Switching page takes a press of a button back by changes of the log, not by the number of a batch. */
let api: TestApi;
let person: { token: string; userId: string };
let station: LogStation;
let nowMs = Date.UTC(2026, 10, 30, 22);

beforeAll(async () => {
  api = await startTestApi();
  api.deps.now = () => nowMs;
  person = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'manager');
});
afterAll(() => api.close());
beforeEach(async () => {
  station = await insertLogStation(api.dataSource);
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId: station.stationId, userId: person.userId, role: 'operator' });
});

const params = () => ({ stationId: station.stationId });
async function press(antenna: number | null): Promise<DwellReply | null> {
  nowMs += 60_000;
  const body = { receiver: station.receiverIds[0]!, antenna };
  const reply = await api.call(switchReceiver, { params: params(), token: person.token, body });
  expect(reply.status).toBe(200);
  return (reply.body as { dwell: DwellReply | null }).dwell;
}
async function change(changes: DwellChange[]): Promise<number> {
  return (await api.call(applyDwellChanges, { params: params(), token: person.token, body: { changes } }))
    .status;
}
async function log() {
  const rows = await api.dataSource
    .getRepository(Dwell)
    .find({ where: { stationId: station.stationId }, order: { startsAt: 'ASC' } });
  return rows.map(({ id, antennaId, endsAt }) => ({ id: Number(id), antennaId, isOpen: endsAt === null }));
}

describe('taking a press of a button back', () => {
  it('leaves the log as it was before the switch', async () => {
    const former = await press(station.antennaIds[0]!);
    const before = await log();
    const opened = await press(station.antennaIds[1]!);
    expect(await log()).toHaveLength(2);
    const status = await change([
      { action: 'delete', dwellId: opened!.id },
      { action: 'edit', dwellId: former!.id, endsAt: null },
    ]);
    expect(status).toBe(200);
    expect(await log()).toEqual(before);
  });

  it('connects the receiver again after a disconnection', async () => {
    const former = await press(station.antennaIds[0]!);
    const before = await log();
    expect(await press(null)).toBeNull();
    expect(await change([{ action: 'edit', dwellId: former!.id, endsAt: null }])).toBe(200);
    expect(await log()).toEqual(before);
  });

  it('is refused as a whole when another switch has followed', async () => {
    const former = await press(station.antennaIds[0]!);
    await press(station.antennaIds[1]!);
    await press(station.antennaIds[0]!);
    const before = await log();
    expect(await change([{ action: 'edit', dwellId: former!.id, endsAt: null }])).toBe(409);
    expect(await log()).toEqual(before);
  });
});
