import { readFileSync } from 'node:fs';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { Antenna } from '../../server/database/entities/antenna.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { Station } from '../../server/database/entities/station.ts';
import { ladderAnswer, rankAntennas } from '../../shared/contracts/ladder.ts';
import type { LadderAnswer, LadderQuestionInput } from '../../shared/contracts/ladder.ts';
import {
  ALTERNATING,
  packUnits,
  rulesKey,
  SIMULTANEOUS,
  STANDING_RULES,
} from '../../shared/pairing/index.ts';
import type { UnitColumns } from '../../shared/pairing/index.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';
import type { StoredSample } from '../helpers/sample-station.ts';

/** Worked independently in R 4.2.2 (data.table, sandwich); see tests/reference/sample-station/README.md. */
const expected = JSON.parse(
  readFileSync(new URL('../reference/sample-station/expected.json', import.meta.url), 'utf8'),
) as Record<'swap' | 'alternate', { byBand: Record<string, Record<string, number>> }>;

let api: TestApi;
beforeAll(async () => {
  api = await startTestApi();
});
afterAll(() => api.close());

async function ask(stationId: number, token: string, body: LadderQuestionInput = {}): Promise<LadderAnswer> {
  const reply = await api.call(rankAntennas, { params: { stationId }, token, body });
  expect(reply.status, reply.text.slice(0, 400)).toBe(200);
  return ladderAnswer.parse(reply.body);
}

const rung = (answer: LadderAnswer, id: number) =>
  answer.components.flatMap(({ antennas }) => antennas).find((antenna) => antenna.id === id)!;
const antennaIds = (answer: LadderAnswer) =>
  answer.components.map(({ antennas }) => antennas.map(({ id }) => id));

/**
 * A station made by hand. Ten calls in four nights, each heard once by one alternating receiver on three pairs:
 * A-B is 2 dB give or take one, A-C 3 dB, B-C 1 dB; D-E (another pair of antennas) is 4 dB give or take one.
 * F is heard against A, but only ever on the second receiver while A was on the first. G hears nothing.
 * The C of the hand-made station is out of service.
 */
interface HandMade {
  stationId: number;
  token: string;
  ids: Record<'A' | 'B' | 'C' | 'D' | 'E' | 'F' | 'G', number>;
  receivers: [number, number];
}

interface Heard {
  a: number;
  b: number;
  differenceDb: number;
  kind?: number;
  receivers?: readonly [number, number];
  band?: number;
}

async function makeStation(): Promise<HandMade> {
  const { dataSource } = api;
  const { id: stationId } = await dataSource.getRepository(Station).save({
    ...{ name: 'Made by hand', callSign: 'EI7QSB', locator: 'IO53', latitudeDeg: 53.5, longitudeDeg: -9 },
    ...{ timeZone: 'Europe/Dublin', ituRegion: 1 },
  });
  const names = ['A', 'B', 'C', 'D', 'E', 'F', 'G'] as const;
  const ids = {} as HandMade['ids'];
  for (const marker of names) {
    const inServiceTo = marker === 'C' ? '2026-11-20' : null;
    const saved = await dataSource
      .getRepository(Antenna)
      .save({ stationId, name: `Antenna ${marker}`, marker, kind: 'other', inServiceTo });
    ids[marker] = saved.id;
  }
  const receivers: number[] = [];
  for (const callSign of ['EI7QSA', 'EI7QSC']) {
    const saved = await dataSource.getRepository(Receiver).save({ stationId, callSign, label: callSign });
    receivers.push(saved.id);
  }
  const calls: { id: number }[] = await dataSource.query(
    `INSERT INTO call_sign (call) SELECT 'EA' || n || 'QSH' FROM generate_series(0, 9) AS n
     ON CONFLICT (call) DO UPDATE SET call = excluded.call RETURNING id`,
  );
  const [first, second] = receivers as [number, number];
  for (let night = 1; night <= 4; night++) {
    const heard = calls.map(({ id }, c): { call: number; pairs: Heard[] } => {
      const wobble = c % 2 === 0 ? 1 : -1;
      return {
        call: id,
        pairs: [
          { a: ids.A, b: ids.B, differenceDb: 2 + wobble },
          { a: ids.A, b: ids.C, differenceDb: 3 },
          { a: ids.B, b: ids.C, differenceDb: 1 },
          { a: ids.D, b: ids.E, differenceDb: 4 + wobble },
          { a: ids.A, b: ids.F, differenceDb: 6 + wobble, kind: SIMULTANEOUS, receivers: [first, second] },
          { a: ids.A, b: ids.B, differenceDb: 5, band: 80 },
        ],
      };
    });
    const rows = heard
      .flatMap(({ call, pairs }) => pairs.map((pair) => ({ call, ...pair })))
      .sort((x, y) => x.a - y.a || x.b - y.b);
    await storeNight(stationId, `2026-11-0${night}`, Date.UTC(2026, 10, night, 22), rows, first);
  }
  return {
    stationId,
    token: (await api.addPerson(stationId, 'contester')).token,
    ids,
    receivers: [first, second],
  };
}

async function storeNight(
  stationId: number,
  night: string,
  atMs: number,
  rows: (Heard & { call: number })[],
  receiver: number,
): Promise<void> {
  const ints = (of: (row: (typeof rows)[number]) => number) => Int32Array.from(rows, of);
  const units: UnitColumns = {
    antennaA: ints(({ a }) => a),
    antennaB: ints(({ b }) => b),
    call: ints(({ call }) => call),
    band: Int16Array.from(rows, ({ band }) => band ?? 160),
    blockMinute: ints(() => atMs / 60_000),
    receiverA: ints(({ receivers }) => receivers?.[0] ?? receiver),
    receiverB: ints(({ receivers }) => receivers?.[1] ?? receiver),
    kind: Uint8Array.from(rows, ({ kind }) => kind ?? ALTERNATING),
    differenceDb: Float64Array.from(rows, ({ differenceDb }) => differenceDb),
    countA: new Uint16Array(rows.length).fill(1),
    countB: new Uint16Array(rows.length).fill(1),
    sumSnrA: ints(({ differenceDb }) => 20 + differenceDb),
    sumSnrB: ints(() => 20),
    speedWpm: new Uint8Array(rows.length),
  };
  const key = rulesKey(STANDING_RULES);
  for (const pack of packUnits(units, STANDING_RULES.blockMinutes)) {
    await api.dataSource.query(
      `INSERT INTO unit_pack (station_id, rules_key, antenna_a, antenna_b, night, unit_count, heard_only_count, units, heard_only)
       VALUES ($1, $2, $3, $4, $5, $6, 0, $7, '')`,
      [stationId, key, pack.antennaA, pack.antennaB, night, pack.count, Buffer.from(pack.data)],
    );
  }
  await api.dataSource.query(
    `INSERT INTO unit_night (station_id, rules_key, night, spots, tally) VALUES ($1, $2, $3, 0, '{"spots": [], "doubles": 0, "listening": []}')`,
    [stationId, key, night],
  );
}

describe('the ladder of a station made by hand', () => {
  let made: HandMade;
  let answer: LadderAnswer;
  beforeAll(async () => {
    made = await makeStation();
    answer = await ask(made.stationId, made.token);
  });

  it('ranks the linked antennas by values that can be worked on paper', () => {
    const { A, B, C, D, E, F } = made.ids;
    expect(answer.bandMetres).toBe(160);
    expect(answer.bands).toEqual([
      { bandMetres: 160, units: 200 },
      { bandMetres: 80, units: 40 },
    ]);
    expect(antennaIds(answer)).toEqual([[A, B, C], [D, E], [F]]);
    // In a balanced round of three the value is a third of the sum of the differences: (2 + 3) / 3 and so on.
    expect(rung(answer, A).valueDb).toBeCloseTo(5 / 3, 9);
    expect(rung(answer, B).valueDb).toBeCloseTo(-1 / 3, 9);
    expect(rung(answer, C).valueDb).toBeCloseTo(-4 / 3, 9);
    expect(rung(answer, D).valueDb).toBeCloseTo(2, 9);
    expect(rung(answer, F)).toMatchObject({ valueDb: null, intervalDb: null, rank: null, speaks: false });
    expect(answer.components[0]!.antennas.map(({ rank }) => rank)).toEqual([1, 2, 3]);
    expect(rung(answer, A)).toMatchObject({
      units: 120,
      clusters: 40,
      nights: 4,
      stations: 10,
      speaks: true,
    });
    expect([rung(answer, A).inService, rung(answer, C).inService]).toEqual([true, false]);
    expect(rung(answer, A).chanceBest).toBe(1);
  });

  it('takes a difference apart into its direct and its indirect part', () => {
    const { A, B } = made.ids;
    const pair = answer.components[0]!.pairs.find(({ a, b }) => a === A && b === B)!;
    expect(pair).toMatchObject({ units: 40, clusters: 40, nights: 4, stations: 10 });
    expect(pair.differenceDb).toBeCloseTo(2, 9);
    expect(pair.directShare).toBeCloseTo(2 / 3, 9);
    expect(pair.direct!.estimateDb).toBeCloseTo(2, 9);
    expect(pair.indirect!.estimateDb).toBeCloseTo(2, 9);
    // Two thirds of each cluster's +-1 over its 40 units; 200 rows, five independent coefficients, t with 39
    // degrees of freedom (R: qt(0.975, 39) = 2.022690920037).
    const se = Math.sqrt(40 * (2 / 3 / 40) ** 2 * (40 / 39) * (199 / (200 - 4)));
    expect(pair.intervalDb![1] - pair.differenceDb).toBeCloseTo(2.022690920037 * se, 9);
  });

  it('says it in a sentence, with what to do about an antenna that is down', () => {
    expect(answer.sentence.replaceAll('\u2009', ' ')).toMatch(
      /^On 160 m Antenna A hears best: 2\.0 dB above the next, Antenna B \(95 % interval 1\.8 to 2\.2 dB\), chance of being best above 0\.99, from 200 units of 10 stations in 4 nights\.$/,
    );
    expect(answer.warnings.join(' ')).toMatch(/Only 4 nights carry this answer/);
  });

  it('names each obstacle with cures that would remove it', () => {
    const { D, E, F, G } = made.ids;
    const of = (kind: string) => answer.obstacles.filter((obstacle) => obstacle.kind === kind);
    expect(of('inseparable')).toMatchObject([{ antennaIds: [F], receiverIds: made.receivers }]);
    expect(of('inseparable')[0]!.cures).toEqual([
      'Swap the two antennas for about 40 minutes: Antenna A on EI7QSC and Antenna F on EI7QSA.',
      'Or put both EI7QSA and EI7QSC on Antenna A for about 40 minutes.',
      'Or let one receiver alternate between Antenna A and Antenna F, a few minutes each.',
    ]);
    expect(of('unlinked')).toMatchObject([{ antennaIds: [D, E] }]);
    expect(of('unlinked')[0]!.cures).toHaveLength(2);
    expect(of('no units')).toMatchObject([
      { antennaIds: [G], sentence: 'Antenna G has no units on 160\u2009m.' },
    ]);
    expect(answer.receivers.map(({ receivers }) => receivers.map(({ offsetDb }) => offsetDb))).toEqual([
      [null],
      [null],
    ]);
  });

  it('measures against a chosen antenna', async () => {
    const { A, B, C, D } = made.ids;
    const against = await ask(made.stationId, made.token, { referenceAntennaId: C });
    expect(against.components[0]!.referenceAntennaId).toBe(C);
    expect([A, B, C].map((id) => Math.round(rung(against, id).valueDb! * 1e9) / 1e9)).toEqual([3, 1, 0]);
    expect(rung(against, C)).toMatchObject({ intervalDb: null, speaks: true });
    expect(against.components[1]!.referenceAntennaId).toBeNull();
    expect(rung(against, D).valueDb).toBeCloseTo(2, 9);
  });

  it('narrows to a band, nights, hours, kinds and receivers, and counts what it leaves out', async () => {
    const { A, B } = made.ids;
    const band = await ask(made.stationId, made.token, { bandMetres: 80 });
    expect(antennaIds(band)).toEqual([[A, B]]);
    expect(rung(band, A).valueDb).toBeCloseTo(2.5, 9);
    const nights = await ask(made.stationId, made.token, { fromNight: '2026-11-02', toNight: '2026-11-03' });
    expect(nights.counts).toMatchObject({ units: 100, nights: 2, clusters: 20, df: 19 });
    expect(nights.preparation).toMatchObject({
      firstNight: '2026-11-02',
      lastNight: '2026-11-03',
      standing: true,
    });
    // Two nights are too few to speak.
    expect(nights.components.flatMap(({ antennas }) => antennas.filter(({ speaks }) => speaks))).toEqual([]);
    expect(nights.sentence).toMatch(/^Not enough yet to rank the antennas on 160/);
    const utc = (from: number, to: number) => ({
      from: { reference: 'utc' as const, hours: from },
      to: { reference: 'utc' as const, hours: to },
    });
    const hours = await ask(made.stationId, made.token, { hours: utc(0, 4) });
    expect([hours.counts.units, hours.leftOut.outsideHoursUnits]).toEqual([0, 200]);
    expect(hours.components).toEqual([]);
    expect(hours.sentence).toMatch(/^No station was heard on two antennas at the same time on 160/);
    const kinds = await ask(made.stationId, made.token, { kinds: ['alternating'] });
    expect([kinds.counts.units, kinds.counts.simultaneous, kinds.leftOut.otherKindUnits]).toEqual([
      160, 0, 40,
    ]);
    const receivers = await ask(made.stationId, made.token, { receivers: [made.receivers[0]] });
    expect([receivers.counts.units, receivers.leftOut.otherReceiverUnits]).toEqual([160, 40]);
    // Nobody knows where these calls live.
    const sectors = await ask(made.stationId, made.token, { sectors: [0] });
    expect([sectors.counts.units, sectors.leftOut.bearingUnsureUnits]).toEqual([0, 200]);
  });

  it('has no ladder before there are units, and says so', async () => {
    const { id: stationId } = await api.dataSource.getRepository(Station).save({
      ...{ name: 'New', callSign: 'EI7QSB', locator: 'IO53', latitudeDeg: 53.5, longitudeDeg: -9 },
      ...{ timeZone: 'Europe/Dublin', ituRegion: 1 },
    });
    const { token } = await api.addPerson(stationId, 'analyst');
    const none = await ask(stationId, token);
    expect(none).toMatchObject({ bandMetres: null, bands: [], components: [], receivers: [], obstacles: [] });
    expect(none.sentence).toMatch(/^There are no units in these nights/);
  });

  it('refuses what the station does not have, naming the field', async () => {
    const reply = await api.call(rankAntennas, {
      params: { stationId: made.stationId },
      token: made.token,
      body: { sectors: [12], receivers: [999_999], referenceAntennaId: 999_999 },
    });
    expect(reply.status).toBe(400);
    const { errors } = reply.body as unknown as { errors: { path: string }[] };
    expect(errors.map(({ path }) => path)).toEqual([
      'body.referenceAntennaId',
      'body.receivers',
      'body.sectors',
    ]);
  });
});

describe('the ladder of the sample station', () => {
  let swap: StoredSample;
  let token: string;
  beforeAll(async () => {
    swap = await storeSampleStation(api.dataSource, 'swap');
    token = (await api.addPerson(swap.stationId, 'analyst')).token;
  });

  it('equals the regression worked in R where only the two swapped receivers count', async () => {
    const receivers = [swap.receivers.EI7QSA!, swap.receivers.EI7QSC!];
    for (const [band, worked] of Object.entries(expected.swap.byBand)) {
      const answer = await ask(swap.stationId, token, { bandMetres: Number(band), receivers });
      const { antennas, pairs } = answer.components.find((component) => component.antennas.length === 2)!;
      const turn = antennas[0]!.id === swap.antennas.ALPHA ? 1 : -1;
      expect(answer.counts).toMatchObject({ units: worked.units, clusters: worked.clusters });
      expect(turn * pairs[0]!.differenceDb).toBeCloseTo(worked.estimate!, 6);
      const interval = [worked.lo! * turn, worked.hi! * turn].sort((x, y) => x - y);
      expect(pairs[0]!.intervalDb![0]).toBeCloseTo(interval[0]!, 6);
      expect(pairs[0]!.intervalDb![1]).toBeCloseTo(interval[1]!, 6);
    }
  });

  it('keeps apart the antenna that was only ever on its own receiver', async () => {
    const answer = await ask(swap.stationId, token, { bandMetres: 160 });
    const { ALPHA, BRAVO, CHARLIE } = swap.antennas as Record<'ALPHA' | 'BRAVO' | 'CHARLIE', number>;
    expect(antennaIds(answer).map((ids) => ids.sort((a, b) => a - b))).toEqual([[ALPHA, BRAVO], [CHARLIE]]);
    const [obstacle] = answer.obstacles;
    expect(obstacle).toMatchObject({ kind: 'inseparable', antennaIds: [CHARLIE] });
    expect(obstacle!.cures[0]).toMatch(/^Swap the two antennas for about 40 minutes: .*CHARLIE on EI7QS/);
    expect(obstacle!.cures.join(' ')).toMatch(
      /put both EI7QS. and EI7QS. on (ALPHA|BRAVO|CHARLIE) for about 40 minutes/,
    );
  });

  it('has units under other rules made by the job of the comparisons', async () => {
    const rules = { blockMinutes: 30 as const, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 };
    const call = (who: string) =>
      api.call(rankAntennas, { params: { stationId: swap.stationId }, token: who, body: { rules } });
    const contester = (await api.addPerson(swap.stationId, 'contester')).token;
    expect((await call(contester)).status).toBe(403);
    const first = await call(token);
    expect(first.status).toBe(202);
    expect((await call(token)).body).toEqual(first.body);
    const jobs = await api.dataSource.query(
      `SELECT payload FROM job WHERE station_id = $1 AND kind = 'units'`,
      [swap.stationId],
    );
    expect(jobs).toEqual([{ payload: { rulesKey: 'b30.w30.f3.g20' } }]);
  });
});
