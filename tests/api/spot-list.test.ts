import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import fc from 'fast-check';
import { listSpots, mapSpots } from '../../shared/contracts/spot.ts';
import type { SpotRow } from '../../shared/contracts/spot.ts';
import type { QueryInput } from '../../shared/contracts/endpoint.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { listSpotPage } from '../../server/features/spots/spot-list.read-model.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { insertDwells, insertLogStation, insertSpots, readTags } from '../helpers/switch-log-rows.ts';
import type { DwellSeed, LogStation, SpotSeed } from '../helpers/switch-log-rows.ts';

let api: TestApi;
let person: { token: string; userId: string };
const at = (clock: string) => `2026-11-30T${clock}Z`;
const ms = (clock: string) => Date.parse(at(clock));

beforeAll(async () => {
  api = await startTestApi();
  person = await api.addPerson((await insertLogStation(api.dataSource)).stationId, 'contester');
});
afterAll(() => api.close());

async function makeStation(
  dwells: (station: LogStation) => DwellSeed[],
  spots: (station: LogStation) => SpotSeed[],
) {
  const station = await insertLogStation(api.dataSource);
  const { stationId } = station;
  await api.dataSource
    .getRepository(Membership)
    .save({ stationId, userId: person.userId, role: 'contester' });
  await insertDwells(api.dataSource, stationId, dwells(station));
  await insertSpots(api.dataSource, stationId, spots(station));
  return station;
}
async function list(stationId: number, query: QueryInput<typeof listSpots> = {}) {
  const reply = await api.call(listSpots, { params: { stationId }, token: person.token, query });
  const body = reply.body as { items: SpotRow[]; next: string | null; detail: string };
  return { status: reply.status, ...body };
}

describe('the list of spots', () => {
  it('says of every spot why it is tagged as it is', async () => {
    const { stationId, antennaIds, verticalId } = await makeStation(
      ({ receiverIds: [b], antennaIds: [northEast], verticalId: vertical }) => [
        { receiverId: b, antennaId: northEast, startMs: ms('18:00:00'), endMs: ms('18:10:00') },
        { receiverId: b, antennaId: vertical, startMs: ms('18:10:00'), endMs: ms('18:30:00') },
        { receiverId: b, antennaId: northEast, startMs: ms('19:00:00'), endMs: ms('19:30:00') },
      ],
      ({ receiverIds: [b, c] }) => [
        { receiverId: b, timeMs: ms('17:59:59.999') },
        { receiverId: b, timeMs: ms('18:10:09.400') },
        { receiverId: b, timeMs: ms('18:14:12') },
        { receiverId: b, timeMs: ms('18:29:30'), uncertaintySeconds: 60 },
        { receiverId: b, timeMs: ms('18:29:31'), uncertaintySeconds: 40 },
        { receiverId: b, timeMs: ms('18:45:00') },
        { receiverId: b, timeMs: ms('19:30:00') },
        { receiverId: c, timeMs: ms('18:00:00') },
      ],
    );
    const { items, next } = await list(stationId);
    expect(next).toBeNull();
    const plain = (text: string) => text.replaceAll('\u2009', ' ');
    expect(items.map((row) => [row.heardAt.slice(11), row.tag, row.antennaId, plain(row.why)])).toEqual([
      [
        '19:30:00.000Z',
        'untagged',
        null,
        'No dwell of EI7QSB covers this time: its log ends at 2026-11-30 19:30:00Z.',
      ],
      [
        ...['18:45:00.000Z', 'untagged', null],
        'No dwell of EI7QSB covers this time: the log has a gap from 2026-11-30 18:30:00Z to 2026-11-30 19:00:00Z.',
      ],
      [
        ...['18:29:31.000Z', 'guarded', verticalId],
        'The time is known to 40 s only: the switch at 18:30:00Z falls inside that.',
      ],
      [
        '18:29:30.000Z',
        'guarded',
        verticalId,
        'Only the minute is known: the switch at 18:30:00Z falls inside it.',
      ],
      [
        '18:14:12.000Z',
        'tagged',
        verticalId,
        '4 min 12 s after the switch to Vertical, past the guard of 20 s.',
      ],
      ['18:10:09.400Z', 'guarded', verticalId, '9 s after the switch to Vertical; the guard is 20 s.'],
      ['18:00:00.000Z', 'untagged', null, 'EI7QSC has no dwell in the switch log.'],
      [
        '17:59:59.999Z',
        'untagged',
        null,
        'No dwell of EI7QSB covers this time: its log starts at 2026-11-30 18:00:00Z.',
      ],
    ]);
    expect((await list(stationId, { antennaId: antennaIds[0] })).items).toEqual([]);
    const guarded = await list(stationId, { tag: 'guarded', antennaId: verticalId });
    expect(guarded.items.map((row) => row.heardAt.slice(11, 19))).toEqual([
      '18:29:31',
      '18:29:30',
      '18:10:09',
    ]);
    expect((await list(stationId, { tag: 'untagged', antennaId: verticalId })).items).toEqual([]);
    const exact = await list(stationId, { from: at('17:59:59.999'), to: at('18:10:09.400') });
    expect(exact.items.map((row) => row.heardAt.slice(11))).toEqual(['18:00:00.000Z', '17:59:59.999Z']);
  });

  it('gives bearing and country, and calls a bearing unsure by the width of a sector', async () => {
    const { stationId } = await makeStation(
      () => [],
      ({ receiverIds: [b] }) =>
        ['EA8QSH', 'JA1QSJ', 'VK2QSK/MM', 'K1QSL'].map((call, i) => ({
          ...{ receiverId: b, timeMs: ms('18:00:00') + i * 1000, call, bandMetres: 80, freq100Hz: 35_105 },
        })),
    );
    await api.dataSource.query(
      `INSERT INTO call_bearing (station_id, call_id, country, source, latitude_deg, longitude_deg, radius_km, azimuth_deg, distance_km, spread_deg)
       SELECT $1, c.id, v.country, v.source, v.lat, v.lon, 100, v.az, v.km, v.spread
       FROM (VALUES ('EA8QSH', 'Canary Islands', 'country', 28, -15.5, 193, 2890, 29.9),
                    ('JA1QSJ', 'Japan', 'call area', 36, 140, 22, 9700, 30.1),
                    ('VK2QSK/MM', 'Australia', 'none', NULL, NULL, NULL, NULL, NULL)) AS v (call, country, source, lat, lon, az, km, spread)
       JOIN call_sign c ON c.call = v.call`,
      [stationId],
    );
    const { items } = await list(stationId);
    expect(
      items.map((row) => [row.call, row.country, row.azimuthDeg, row.distanceKm, row.bearingUnsure]),
    ).toEqual([
      ['K1QSL', null, null, null, false],
      ['VK2QSK/MM', 'Australia', null, null, false],
      ['JA1QSJ', 'Japan', 22, 9700, true],
      ['EA8QSH', 'Canary Islands', 193, 2890, false],
    ]);
    expect(items[0]).toMatchObject({
      freqKhz: 3510.5,
      bandMetres: 80,
      mode: 'CW',
      snrDb: 12,
      importId: null,
    });
    expect((await list(stationId, { call: ' ja1qsj ' })).items.map((row) => row.call)).toEqual(['JA1QSJ']);
    expect(await list(stationId, { call: 'ZZ9QSZ' })).toMatchObject({ items: [], next: null });

    const query = { from: at('18:00:00'), to: at('18:00:02'), bandMetres: 80 };
    const map = await api.call(mapSpots, { params: { stationId }, token: person.token, query });
    const place = { latitudeDeg: 36, longitudeDeg: 140, azimuthDeg: 22, distanceKm: 9700 };
    expect(map.body).toEqual({
      stations: [
        {
          ...{ call: 'EA8QSH', country: 'Canary Islands', spots: 1, bestSnrDb: 12 },
          ...{ latitudeDeg: 28, longitudeDeg: -15.5, azimuthDeg: 193, distanceKm: 2890 },
        },
        { call: 'JA1QSJ', country: 'Japan', spots: 1, bestSnrDb: 12, ...place },
      ],
    });
    const season = { from: '2026-09-01T00:00:00Z', to: at('18:00:00') };
    const refused = await api.call(mapSpots, { params: { stationId }, token: person.token, query: season });
    expect([refused.status, (refused.body as { detail: string }).detail]).toEqual([
      ...[400, 'Choose at most 31 days for the map.'],
    ]);
  });

  it('pages every filter to exactly the spots that fit it, in order, also when each look finds little', async () => {
    const antennaOf = (station: LogStation, n: number) => [...station.antennaIds, station.verticalId][n]!;
    await fc.assert(
      fc.asyncProperty(
        fc.array(
          fc.record({
            receiver: fc.nat(1),
            gap: fc.constantFrom(0, 0, 40, 4000, 90_000),
            length: fc.integer({ min: 20, max: 6000 }),
            antenna: fc.nat(2),
          }),
          { maxLength: 12 },
        ),
        fc.array(
          fc.record({
            receiver: fc.nat(1),
            second: fc.oneof(fc.nat(300), fc.nat(40_000), fc.nat(400_000)),
            ms: fc.nat(999),
            unsure: fc.boolean(),
            band: fc.constantFrom(160, 80),
          }),
          { minLength: 30, maxLength: 120 },
        ),
        fc.record(
          {
            tag: fc.constantFrom('tagged' as const, 'guarded' as const, 'untagged' as const),
            antenna: fc.nat(2),
            receiver: fc.nat(1),
            bandMetres: fc.constantFrom(160, 80),
            fromSecond: fc.nat(20_000),
            toSecond: fc.integer({ min: 20_001, max: 400_000 }),
          },
          { requiredKeys: [] },
        ),
        fc.integer({ min: 1, max: 9 }),
        fc.boolean(),
        async (log, spots, wish, limit, hasTime) => {
          const ends = [0, 0];
          const station = await makeStation(
            (rows) =>
              log.map(({ receiver, gap, length, antenna }) => {
                const from = ends[receiver]! + gap;
                ends[receiver] = from + length;
                return {
                  ...{ receiverId: rows.receiverIds[receiver]!, antennaId: antennaOf(rows, antenna) },
                  ...{
                    startMs: ms('00:00:00') + from * 1000,
                    endMs: ms('00:00:00') + ends[receiver]! * 1000,
                  },
                };
              }),
            (rows) =>
              spots.map((spot, i) => ({
                ...{ receiverId: rows.receiverIds[spot.receiver]!, bandMetres: spot.band },
                ...{ timeMs: ms('00:00:00') + spot.second * 1000 + spot.ms, freq100Hz: 18_000 + i },
                uncertaintySeconds: spot.unsure ? 60 : 0,
              })),
          );
          const { stationId } = station;
          const instant = (second: number) => new Date(ms('00:00:00') + second * 1000 + 300).toISOString();
          const query = {
            limit,
            ...(wish.tag === undefined ? {} : { tag: wish.tag }),
            ...(wish.antenna === undefined ? {} : { antennaId: antennaOf(station, wish.antenna) }),
            ...(wish.receiver === undefined ? {} : { receiverId: station.receiverIds[wish.receiver]! }),
            ...(wish.bandMetres === undefined ? {} : { bandMetres: wish.bandMetres }),
            ...(wish.fromSecond === undefined ? {} : { from: instant(wish.fromSecond) }),
            ...(wish.toSecond === undefined ? {} : { to: instant(wish.toSecond) }),
          };
          // What the database's own view says fits.
          const tags = new Map(
            (await readTags(api.dataSource, stationId, 20)).map((row) => [row.key.split(' ').at(-1), row]),
          );
          const expected = spots
            .map((spot, i) => ({ ...spot, freq: 18_000 + i, tag: tags.get(String(18_000 + i))! }))
            .filter(({ tag, receiver, band, second, ms: rest }) => {
              const name = tag.antennaId === null ? 'untagged' : tag.guarded ? 'guarded' : 'tagged';
              const time = second * 1000 + rest;
              return (
                (wish.tag === undefined || wish.tag === name) &&
                (wish.antenna === undefined || tag.antennaId === query.antennaId) &&
                (wish.receiver === undefined || receiver === wish.receiver) &&
                (wish.bandMetres === undefined || band === wish.bandMetres) &&
                (wish.fromSecond === undefined || time >= wish.fromSecond * 1000 + 300) &&
                (wish.toSecond === undefined || time < wish.toSecond * 1000 + 300)
              );
            })
            .sort((p, q) => q.second - p.second || q.receiver - p.receiver || q.freq - p.freq)
            .map((spot) => spot.freq / 10);
          const found: number[] = [];
          let after: string | undefined;
          for (let pages = 0; ; pages++) {
            expect(pages).toBeLessThan(400);
            // Without time, every page ends after its first look and must still say where to go on.
            const page = await listSpotPage(
              api.dataSource.manager,
              stationId,
              { ...query, after },
              hasTime ? 800 : -1,
            );
            expect(page.items.length).toBeLessThanOrEqual(limit);
            found.push(...page.items.map((row) => row.freqKhz));
            if (page.next === null) break;
            after = page.next;
          }
          expect(found).toEqual(expected);
        },
      ),
      { numRuns: 60, seed: 1130, endOnFailure: true },
    );
  });

  it('goes straight to old gaps and old antennas, wherever the filter may start', async () => {
    const day = 86_400_000;
    const clock = (days: number) => ms('18:00:00') + days * day;
    const { stationId, receiverIds, verticalId } = await makeStation(
      ({ receiverIds: [b], antennaIds: [northEast], verticalId: vertical }) => [
        { receiverId: b, antennaId: vertical, startMs: clock(0), endMs: clock(1) },
        { receiverId: b, antennaId: vertical, startMs: clock(2), endMs: clock(3) },
        { receiverId: b, antennaId: northEast, startMs: clock(3), endMs: clock(60) },
        { receiverId: b, antennaId: northEast, startMs: clock(61), endMs: null },
      ],
      ({ receiverIds: [b] }) =>
        [-1, 0.5, 1.5, 2.5, 30, 60.5, 70, 200].map((days) => ({ receiverId: b, timeMs: clock(days) })),
    );
    const daysOf = (items: SpotRow[]) => items.map((row) => (Date.parse(row.heardAt) - clock(0)) / day);
    for (const [to, gaps, onVertical] of [
      [undefined, [60.5, 1.5, -1], [2.5, 0.5]],
      [60.25, [1.5, -1], [2.5, 0.5]],
      [2, [1.5, -1], [0.5]],
      [0.25, [-1], []],
    ] as const) {
      const range = to === undefined ? {} : { to: new Date(clock(to)).toISOString() };
      const label = `until day ${to}`;
      const untagged = await list(stationId, { ...range, tag: 'untagged', receiverId: receiverIds[0] });
      expect(daysOf(untagged.items), label).toEqual(gaps);
      const vertical = await list(stationId, { ...range, antennaId: verticalId });
      expect(daysOf(vertical.items), label).toEqual(onVertical);
    }
  });

  it('refuses a turned range and a cursor that is none', async () => {
    const { stationId } = await makeStation(
      () => [],
      () => [],
    );
    expect((await list(stationId, { from: at('18:00:00'), to: at('18:00:00') })).status).toBe(400);
    for (const after of ['1', '1.2.3', '1.2.3.x', '1.2.3.99999999999', "1.2.3.4'"])
      expect((await list(stationId, { after })).status, after).toBe(400);
    expect(await list(stationId, { after: '1.2.3.4' })).toMatchObject({ status: 200, items: [], next: null });
  });

  it('answers 404 to receivers and antennas of another station', async () => {
    const [own, other] = [
      await makeStation(
        () => [],
        () => [],
      ),
      await insertLogStation(api.dataSource),
    ];
    expect((await list(own.stationId, { receiverId: other.receiverIds[0] })).status).toBe(404);
    expect((await list(own.stationId, { antennaId: other.verticalId })).status).toBe(404);
    expect((await list(other.stationId)).status).toBe(404);
  });
});
