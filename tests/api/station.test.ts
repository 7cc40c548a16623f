import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import * as antennaContract from '../../shared/contracts/antenna.ts';
import * as feedContract from '../../shared/contracts/feed.ts';
import * as positionContract from '../../shared/contracts/position.ts';
import * as receiverContract from '../../shared/contracts/receiver.ts';
import * as stationContract from '../../shared/contracts/station.ts';
import { updateTrial, saveTrial } from '../../shared/contracts/comparison.ts';
import type { Endpoint } from '../../shared/contracts/endpoint.ts';
import { startTestApi } from '../helpers/api.ts';
import type { CallOptions, TestApi, TestReply } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

let api: TestApi;
let demo: TestApi;
let station: Awaited<ReturnType<typeof insertStation>>;
let params: { stationId: number };
let token: string;

beforeAll(async () => {
  api = await startTestApi();
  demo = await startTestApi({ demo: true });
});
afterAll(async () => {
  await api.close();
  await demo.close();
});
beforeEach(async () => {
  station = await insertStation(api.dataSource);
  params = { stationId: station.stationId };
  token = (await api.addPerson(station.stationId, 'manager')).token;
});

async function call<E extends Endpoint>(endpoint: E, options: CallOptions<E> = {}): Promise<TestReply> {
  return api.call(endpoint, { token, ...options, params: { ...params, ...options.params } });
}
const errorsOf = (reply: TestReply) =>
  (reply.body as { errors?: { path: string; message: string }[] }).errors;

/** Two spots, at 18:20 and 20:05, so that the hours 18, 19 and 20 can be dirty. */
async function insertSpots(): Promise<void> {
  const times = ['2026-11-30T18:20:00Z', '2026-11-30T20:05:00Z'];
  await api.dataSource.query('SELECT ensure_spot_partitions($1, $2)', times);
  await api.dataSource.query(`INSERT INTO call_sign (call) VALUES ('EA8QSH') ON CONFLICT (call) DO NOTHING`);
  await api.dataSource.query(
    `INSERT INTO spot (station_id, heard_at, heard_ms, receiver_id, call_id, freq_100hz, import_id, band_m, snr_db, mode, uncertainty_s)
     SELECT $1, at, 0, $2, c.id, 18200, 0, 160, 12, 1, 0
     FROM call_sign c, unnest($3::timestamptz[]) AS at WHERE c.call = 'EA8QSH'`,
    [station.stationId, station.receiverId, times],
  );
}

const dirtyHours = async (): Promise<string[]> =>
  (
    (await api.dataSource.query(
      'SELECT starts_at FROM dirty_block WHERE station_id = $1 ORDER BY starts_at',
      [station.stationId],
    )) as { starts_at: Date }[]
  ).map((row) => row.starts_at.toISOString().slice(11, 16));
const jobs = async (): Promise<string[]> =>
  (
    (await api.dataSource.query('SELECT kind FROM job WHERE station_id = $1 ORDER BY id', [
      station.stationId,
    ])) as { kind: string }[]
  ).map((row) => row.kind);

describe('standing rules and position', () => {
  const update = (body: CallOptions<typeof stationContract.updateStation>['body']) =>
    call(stationContract.updateStation, { body });

  it.each([
    ['guard', { guardSeconds: 30 }],
    ['block', { blockMinutes: 30 }],
    ['time window', { windowSeconds: 60 }],
    ['frequency tolerance', { freqToleranceKhz: 0.5 }],
  ] as const)('have every hour of spots made anew when the %s changes', async (_rule, body) => {
    await insertSpots();
    const reply = await update(body);
    expect(reply.status).toBe(200);
    expect(reply.body).toMatchObject(body);
    expect(await dirtyHours()).toEqual(['18:00', '19:00', '20:00']);
    expect(await jobs()).toEqual([]);
  });

  it('leave the units alone when what changes decides nothing about them, or nothing changes', async () => {
    await insertSpots();
    const reply = await update({
      name: 'Corrib Group',
      marginDb: 1.5,
      sectorCount: 8,
      guardSeconds: 20,
      blockMinutes: 15,
      freqToleranceKhz: 0.3,
      locator: 'io53',
    });
    expect(reply.body).toMatchObject({
      name: 'Corrib Group',
      marginDb: 1.5,
      sectorCount: 8,
      locator: 'IO53',
    });
    expect(await dirtyHours()).toEqual([]);
    expect(await jobs()).toEqual([]);
  });

  it('have bearings and units made anew when the station moves, and the zone follows', async () => {
    await insertSpots();
    await update({ locator: 'IO53' });
    await api.dataSource.query(
      `INSERT INTO call_bearing (station_id, call_id, azimuth_deg, distance_km, spread_deg, source)
       SELECT $1, id, 180, 2000, 5, 'country' FROM call_sign`,
      [station.stationId],
    );
    const reply = await update({ locator: 'jn48' });
    expect(reply.body).toMatchObject({
      locator: 'JN48',
      latitudeDeg: 48.5,
      longitudeDeg: 9,
      timeZone: 'Europe/Berlin',
    });
    expect(await dirtyHours()).toEqual(['18:00', '19:00', '20:00']);
    expect(await jobs()).toEqual(['bearings']);
    expect(
      await api.dataSource.query('SELECT 1 FROM call_bearing WHERE station_id = $1', [station.stationId]),
    ).toEqual([]);
  });

  it('keep a time zone that the manager chose when the same locator comes again', async () => {
    await update({ locator: 'IO53' });
    await update({ timeZone: 'UTC' });
    const reply = await update({ locator: 'IO53', name: 'Corrib' });
    expect(reply.body).toMatchObject({ timeZone: 'UTC' });
  });

  it('are refused with a sentence beside each field, and nothing is changed', async () => {
    const reply = await update({
      guardSeconds: 601,
      blockMinutes: 7,
      windowSeconds: 0.5,
      freqToleranceKhz: 0.25,
      marginDb: 0,
      sectorCount: 5,
      callSign: 'no call!',
      locator: 'IO5',
      name: ' ',
    });
    expect(reply.status).toBe(400);
    expect(Object.fromEntries(errorsOf(reply)!.map((e) => [e.path, e.message]))).toMatchObject({
      'body.guardSeconds': 'Give a number from 0 to 600.',
      'body.blockMinutes': 'Choose one of 5, 10, 15, 20, 30, 60.',
      'body.windowSeconds': expect.stringMatching(/^Give /),
      'body.freqToleranceKhz': 'Give a multiple of 0.1.',
      'body.marginDb': 'Give a number from 0.1 to 20.',
      'body.sectorCount': 'Choose one of 4, 6, 8, 12, 16, 18, 24, 36.',
      'body.callSign': 'Give a call sign of letters and digits such as EI7QSB.',
      'body.locator': 'Give a Maidenhead locator such as IO53 or IO53kr.',
      'body.name': 'This cannot be empty.',
    });
    const zone = await update({ name: 'Renamed', timeZone: 'Atlantis/Capital' });
    expect(errorsOf(zone)).toEqual([
      { path: 'body.timeZone', message: 'Give a time zone such as Europe/Dublin.' },
    ]);
    expect((await call(stationContract.readStation)).body).toMatchObject({ name: 'Corrib Low Band Group' });
  });
});

describe('changes of one field', () => {
  it('leave every other field of an antenna, a receiver, a feed and a trial as it was', async () => {
    const antenna = {
      name: 'South loop',
      marker: 'S',
      kind: 'loop',
      headingDeg: 180,
      beamwidthDeg: 70,
      lengthM: 24.5,
      heightM: 3,
      notes: 'rope renewed',
      inServiceFrom: '2026-10-01',
      inServiceTo: null,
    } as const;
    const added = antennaContract.addAntenna.reply.parse(
      (await call(antennaContract.addAntenna, { body: antenna })).body,
    );
    const changed = await call(antennaContract.updateAntenna, {
      params: { antennaId: added.id },
      body: { inServiceTo: '2026-11-30' },
    });
    expect(changed.body).toEqual({ id: added.id, ...antenna, inServiceTo: '2026-11-30' });

    await call(receiverContract.updateReceiver, {
      params: { receiverId: station.receiverId },
      body: { notes: 'on the shelf' },
    });
    const receiver = await call(receiverContract.updateReceiver, {
      params: { receiverId: station.receiverId },
      body: { label: 'Barn' },
    });
    expect(receiver.body).toMatchObject({ callSign: 'EI7QSB', label: 'Barn', notes: 'on the shelf' });

    const feed = {
      name: 'Main',
      host: 'skimmer.example.org',
      port: 7300,
      loginCall: 'EI7QSB',
      enabled: false,
    };
    const { id } = feedContract.addFeed.reply.parse((await call(feedContract.addFeed, { body: feed })).body);
    const renamed = await call(feedContract.updateFeed, { params: { feedId: id }, body: { name: 'Spare' } });
    expect(renamed.body).toMatchObject({ ...feed, name: 'Spare' });

    const [antennaA, antennaB] = station.antennaIds;
    const trial = saveTrial.reply.parse(
      (
        await call(saveTrial, {
          body: { name: 'Trial', question: { antennaA, antennaB }, notes: 'before the storm' },
        })
      ).body,
    );
    const retitled = await call(updateTrial, { params: { trialId: trial.id }, body: { name: 'Autumn' } });
    expect(retitled.body).toMatchObject({ name: 'Autumn', notes: 'before the storm' });
  });
});

describe('receivers', () => {
  it('cannot change their call sign once spots are filed under it, and can before', async () => {
    const rename = () =>
      call(receiverContract.updateReceiver, {
        params: { receiverId: station.receiverId },
        body: { callSign: 'ei7qsc', label: 'Barn' },
      });
    expect((await rename()).body).toMatchObject({ callSign: 'EI7QSC', label: 'Barn' });
    await insertSpots();
    const refused = await call(receiverContract.updateReceiver, {
      params: { receiverId: station.receiverId },
      body: { callSign: 'EI7QSD', label: 'Loft' },
    });
    expect([refused.status, errorsOf(refused)]).toEqual([
      409,
      [
        {
          path: 'body.callSign',
          message: 'Spots are filed under this call sign: add another receiver and retire this one.',
        },
      ],
    ]);
    // The same call sign with another label is no renaming.
    expect((await rename()).status).toBe(200);
  });

  it('have one call sign each, are retired and come back', async () => {
    const twin = await call(receiverContract.addReceiver, { body: { callSign: 'EI7QSB', label: 'Twin' } });
    expect([twin.status, errorsOf(twin)]).toEqual([
      409,
      [{ path: 'body.callSign', message: 'The station has a receiver with this call sign already.' }],
    ]);
    const at = { receiverId: station.receiverId };
    const retired = await call(receiverContract.updateReceiver, { params: at, body: { retired: true } });
    const { retiredAt } = receiverContract.updateReceiver.reply.parse(retired.body);
    expect(Date.parse(retiredAt!)).toBeGreaterThan(Date.now() - 60_000);
    expect(
      (await call(receiverContract.updateReceiver, { params: at, body: { retired: true } })).body,
    ).toMatchObject({
      retiredAt,
    });
    expect(
      (await call(receiverContract.updateReceiver, { params: at, body: { retired: false } })).body,
    ).toMatchObject({
      retiredAt: null,
    });
  });
});

describe('antennas', () => {
  it('stay while the switch log names them, and go when it does not', async () => {
    const [named, unnamed] = station.antennaIds;
    await api.dataSource.query(
      `INSERT INTO dwell (station_id, receiver_id, antenna_id, starts_at, source) VALUES ($1, $2, $3, now(), 'hand')`,
      [station.stationId, station.receiverId, named],
    );
    const refused = await call(antennaContract.removeAntenna, { params: { antennaId: named } });
    expect([refused.status, (refused.body as { detail: string }).detail]).toEqual([
      409,
      'The switch log names this antenna. Give it an end of service instead of removing it.',
    ]);
    expect((await call(antennaContract.removeAntenna, { params: { antennaId: unnamed } })).status).toBe(204);
    expect((await call(antennaContract.removeAntenna, { params: { antennaId: unnamed } })).status).toBe(404);
  });

  it('are refused with the field named', async () => {
    const reply = await call(antennaContract.addAntenna, {
      body: {
        name: 'North-east',
        marker: 'ab',
        kind: 'loop',
        headingDeg: 360,
        beamwidthDeg: 0,
        lengthM: -1,
        heightM: 301,
        inServiceFrom: '30/11/2026',
      },
    });
    expect(Object.fromEntries(errorsOf(reply)!.map((e) => [e.path, e.message]))).toEqual({
      'body.marker': 'Give one letter, A to Z.',
      'body.headingDeg': 'Give less than 360 degrees; north is 0.',
      'body.beamwidthDeg': 'Give more than 0 degrees.',
      'body.lengthM': 'Give more than 0.',
      'body.heightM': 'Give at most 300 metres.',
      'body.inServiceFrom': 'Give a date such as 2026-11-30.',
    });
    const body = { name: 'North-east', marker: 'N', kind: 'loop' } as const;
    expect(errorsOf(await call(antennaContract.addAntenna, { body }))).toEqual([
      { path: 'body.name', message: 'The station has an antenna with this name already.' },
    ]);
    const backwards = await call(antennaContract.updateAntenna, {
      params: { antennaId: station.antennaIds[0] },
      body: { inServiceFrom: '2026-11-30', inServiceTo: '2026-11-29' },
    });
    expect(errorsOf(backwards)).toEqual([
      { path: 'body.inServiceTo', message: 'The end of service must not come before its start.' },
    ]);
  });
});

describe('feeds', () => {
  const body = (host: string) => ({ name: 'Feed', host, port: 7300, loginCall: 'EI7QSB' });
  const ownSentence = "Addresses of the server itself are not accepted; give the feed's own host name.";

  it.each(['localhost', '127.0.0.1', '::1', '2130706433', '0:0:0:0:0:0:0:1', '169.254.1.1', 'a.localhost.'])(
    'refuse %s as a host, when made and when changed',
    async (host) => {
      expect(errorsOf(await call(feedContract.addFeed, { body: body(host) }))).toEqual([
        { path: 'body.host', message: ownSentence },
      ]);
      const { id } = feedContract.addFeed.reply.parse(
        (await call(feedContract.addFeed, { body: body('feed.example.org') })).body,
      );
      const changed = await call(feedContract.updateFeed, { params: { feedId: id }, body: { host } });
      expect(errorsOf(changed)).toEqual([{ path: 'body.host', message: ownSentence }]);
    },
  );

  it.each(['192.168.1.20', '2001:db8::20', 'skimmer.example.org'])('take %s as a host', async (host) => {
    const reply = await call(feedContract.addFeed, { body: body(host) });
    expect([reply.status, (reply.body as { host: string }).host]).toEqual([201, host]);
  });

  it('may stand on the server itself in demo mode', async () => {
    const { stationId } = await insertStation(demo.dataSource);
    const manager = await demo.addPerson(stationId, 'manager');
    const reply = await demo.call(feedContract.addFeed, {
      params: { stationId },
      body: body('127.0.0.1'),
      token: manager.token,
    });
    expect(reply.status).toBe(201);
  });

  it('are refused with the field named, and go without taking spots along', async () => {
    const wrong = await call(feedContract.addFeed, {
      body: { ...body('not a host'), port: 70_000, loginCall: '!' },
    });
    expect(Object.fromEntries(errorsOf(wrong)!.map((e) => [e.path, e.message]))).toEqual({
      'body.host': 'Give a host name or an IP address.',
      'body.port': 'Give a port from 1 to 65535.',
      'body.loginCall': 'Give a call sign of letters and digits such as EI7QSB.',
    });
    await insertSpots();
    const { id } = feedContract.addFeed.reply.parse(
      (await call(feedContract.addFeed, { body: body('feed.example.org') })).body,
    );
    expect((await call(feedContract.removeFeed, { params: { feedId: id } })).status).toBe(204);
    expect((await call(feedContract.removeFeed, { params: { feedId: id } })).status).toBe(404);
    const spots: unknown[] = await api.dataSource.query('SELECT 1 FROM spot WHERE station_id = $1', [
      station.stationId,
    ]);
    expect(spots).toHaveLength(2);
  });

  it('hand out their refused lines as CSV that no spreadsheet takes for a formula', async () => {
    const { id } = feedContract.addFeed.reply.parse(
      (await call(feedContract.addFeed, { body: body('feed.example.org') })).body,
    );
    await api.dataSource.query(
      `INSERT INTO feed_refusal (station_id, feed_id, received_at, reason, raw)
       VALUES ($1, $2, '2026-11-30T18:05:00Z', 'The time is not one.', '=1+1,"x"')`,
      [station.stationId, id],
    );
    const reply = await call(feedContract.downloadFeedRefusals, { params: { feedId: id } });
    expect(reply.headers.get('content-type')).toMatch(/^text\/csv/);
    expect(reply.headers.get('content-disposition')).toContain('attachment');
    const [header, line] = reply.text.trim().split('\r\n');
    expect(header).toBe('received_at,reason,raw');
    expect(line).toBe(`2026-11-30T18:05:00.000Z,The time is not one.,"'=1+1,""x"""`);
  });
});

describe('position corrections', () => {
  it('have the bearings made anew, and are refused twice or with a locator that is none', async () => {
    const body = { matches: 'call', pattern: 'ea8qsh', locator: 'il18rj', radiusKm: 20 } as const;
    const added = await call(positionContract.addPositionOverride, { body });
    expect([added.status, added.body]).toEqual([
      201,
      { id: expect.any(Number), ...body, pattern: 'EA8QSH', locator: 'IL18rj' },
    ]);
    expect(await jobs()).toEqual(['bearings']);
    expect(errorsOf(await call(positionContract.addPositionOverride, { body }))).toEqual([
      { path: 'body.pattern', message: 'There is a correction for this already: withdraw it first.' },
    ]);
    const wrong = await call(positionContract.addPositionOverride, {
      body: { matches: 'prefix', pattern: 'E A', locator: 'XX99', radiusKm: -1 },
    });
    expect(errorsOf(wrong)!.map((e) => e.path)).toEqual(['body.pattern', 'body.locator', 'body.radiusKm']);
    const { id } = positionContract.addPositionOverride.reply.parse(added.body);
    expect((await call(positionContract.removePositionOverride, { params: { positionId: id } })).status).toBe(
      204,
    );
    expect(await jobs()).toEqual(['bearings', 'bearings']);
  });

  it('may be written by analysts, and by no operator or contester', async () => {
    const body = { matches: 'prefix', pattern: 'EA8', locator: 'IL18' } as const;
    for (const [role, status] of [
      ['analyst', 201],
      ['operator', 403],
      ['contester', 403],
    ] as const) {
      const person = await api.addPerson(station.stationId, role);
      const reply = await call(positionContract.addPositionOverride, { body, token: person.token });
      expect(reply.status, role).toBe(status);
    }
  });
});
