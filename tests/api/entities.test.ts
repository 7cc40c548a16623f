import type { DataSource, EntityTarget, ObjectLiteral } from 'typeorm';
import { afterAll, beforeAll, describe, expect, test } from 'vitest';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import * as rows from '../../server/database/entities/index.ts';
import type { TestDatabase } from '../helpers/database.ts';
import { createTestDatabase } from '../helpers/database.ts';

const userId = '0b0c6a52-5d0e-4e0a-9d3c-1f6f7f1f0a01';
const sessionId = '0b0c6a52-5d0e-4e0a-9d3c-1f6f7f1f0a02';
const tokenId = '0b0c6a52-5d0e-4e0a-9d3c-1f6f7f1f0a03';
const batchId = '0b0c6a52-5d0e-4e0a-9d3c-1f6f7f1f0a04';
/** Identity columns count from 1, and each table gets its first row here. */
const first = 1;
const [stationId, receiverId, antennaId, feedId, importId, callId] = [
  first,
  first,
  first,
  first,
  first,
  first,
];
/** More than 32 bits hold. */
const many = 5_000_000_000;
const at = (hour: number) => new Date(Date.UTC(2026, 0, 10, hour, 30, 15, 250));
const wholeSecond = new Date('2026-01-10T18:30:15Z');
const hash = Buffer.from(Array.from({ length: 32 }, (_, index) => index * 8));
const json = { text: 'Größe', list: [1, 2.5, null], inner: { yes: true } };

interface Sample<Row extends ObjectLiteral = ObjectLiteral> {
  entity: EntityTarget<Row>;
  /** Every property of the entity but its relations and what the database makes by itself. */
  row: Row;
}

/** The compiler sees to it that a sample names real properties with values of their types. */
function sample<Row extends ObjectLiteral>(entity: new () => Row, row: Partial<Row>): Sample {
  return { entity, row };
}

const samples: Sample[] = [
  sample(rows.User, {
    id: userId,
    email: 'aoife@corrib.example',
    name: 'Aoife',
    passwordHash: 'argon2id',
    lengthUnit: 'ft',
    theme: 'dark',
    createdAt: at(1),
    passwordChangedAt: at(2),
    disabledAt: at(3),
  }),
  sample(rows.Session, {
    id: sessionId,
    userId,
    userAgent: 'Browser',
    createdAt: at(1),
    lastUsedAt: at(2),
    expiresAt: at(3),
    revokedAt: at(4),
    revokedReason: 'signed out',
  }),
  sample(rows.RefreshToken, { tokenHash: hash, sessionId, issuedAt: at(1), expiresAt: at(2), usedAt: at(3) }),
  sample(rows.PasswordReset, { tokenHash: hash, userId, createdAt: at(1), expiresAt: at(2), usedAt: at(3) }),
  sample(rows.Station, {
    name: 'Corrib Low Band Group',
    callSign: 'EI7QSB',
    locator: 'IO53',
    latitudeDeg: 53.4791666667,
    longitudeDeg: -9.0416666667,
    timeZone: 'Europe/Dublin',
    ituRegion: 1,
    guardSeconds: 25,
    blockMinutes: 20,
    windowSeconds: 45,
    freqTolerance100hz: 4,
    marginDb: 1.5,
    sectorCount: 16,
    isDemo: true,
    createdAt: at(1),
  }),
  sample(rows.Membership, { stationId, userId, role: 'analyst', createdAt: at(1) }),
  sample(rows.Invitation, {
    stationId,
    id: tokenId,
    email: 'nuala@corrib.example',
    role: 'contester',
    tokenHash: hash,
    invitedBy: userId,
    createdAt: at(1),
    expiresAt: at(2),
    acceptedAt: at(3),
    withdrawnAt: at(4),
  }),
  sample(rows.ApiToken, {
    stationId,
    id: tokenId,
    name: 'Switch box',
    tokenHash: hash,
    scopes: ['dwell:write', 'spot:read'],
    createdBy: userId,
    createdAt: at(1),
    expiresAt: at(2),
    lastUsedAt: at(3),
    revokedAt: at(4),
  }),
  sample(rows.Receiver, {
    stationId,
    callSign: 'EI7QSB',
    label: 'Shed',
    notes: 'Under the bench',
    createdAt: at(1),
    retiredAt: at(2),
  }),
  sample(rows.Antenna, {
    stationId,
    name: 'North-east',
    marker: 'circle',
    kind: 'long wire',
    headingDeg: 57.5,
    beamwidthDeg: 80.1,
    lengthM: 176.3,
    heightM: 2.2,
    notes: 'Over the bog',
    inServiceFrom: '2024-10-27',
    inServiceTo: '2026-03-29',
    createdAt: at(1),
  }),
  sample(rows.Feed, {
    stationId,
    name: 'Village hall',
    host: '127.0.0.1',
    port: 7300,
    loginCall: 'EI7QSB',
    enabled: false,
    createdAt: at(1),
  }),
  sample(rows.FeedHealth, {
    stationId,
    feedId,
    state: 'silent',
    connectedAt: at(1),
    lastLineAt: at(2),
    linesLastMinute: 600,
    linesTotal: many,
    storedTotal: many + 1,
    doubledTotal: many + 2,
    refusedTotal: many + 3,
    otherReceiverTotal: many + 4,
    lastError: 'cut off',
    updatedAt: at(3),
  }),
  sample(rows.FeedRefusal, { stationId, feedId, receivedAt: at(1), reason: 'No call sign.', raw: 'DX de' }),
  sample(rows.Dwell, {
    stationId,
    receiverId,
    antennaId,
    startsAt: at(18),
    endsAt: at(19),
    source: 'import',
    note: 'Rain',
    importId,
    createdBy: userId,
    createdAt: at(20),
  }),
  sample(rows.DwellChange, {
    stationId,
    batchId,
    dwellId: many,
    action: 'split',
    before: json,
    after: { ...json, list: [] },
    userId,
    tokenId,
    at: at(1),
  }),
  sample(rows.CallSign, { call: 'EA8QSH' }),
  sample(rows.CallBearing, {
    stationId,
    callId,
    country: 'Canary Islands',
    source: 'call area',
    latitudeDeg: 28.3,
    longitudeDeg: -15.8,
    radiusKm: 250,
    azimuthDeg: 194.6,
    distanceKm: 2871.5,
    spreadDeg: 5.5,
  }),
  sample(rows.PositionOverride, {
    stationId,
    matches: 'prefix',
    pattern: 'EA8',
    locator: 'IL18',
    radiusKm: 120.5,
    createdBy: userId,
    createdAt: at(1),
  }),
  sample(rows.Spot, {
    heardAt: wholeSecond,
    stationId,
    receiverId,
    callId,
    freq100hz: 18_215,
    importId,
    heardMs: 250,
    bandM: 160,
    snrDb: -7,
    speedWpm: 24,
    mode: 1,
    uncertaintyS: 30,
    feedMinute: 1110,
  }),
  sample(rows.SavedMapping, {
    stationId,
    kind: 'spots',
    name: 'Winter files',
    mapping: json,
    createdBy: userId,
    createdAt: at(1),
  }),
  sample(rows.ImportRecord, {
    stationId,
    kind: 'dwells',
    fileName: 'winter.csv',
    sha256: hash,
    sizeBytes: many,
    state: 'undone',
    mapping: json,
    rowsRead: many + 1,
    rowsStored: many + 2,
    rowsDoubled: many + 3,
    rowsRefused: many + 4,
    rowsUndone: many + 5,
    bytesDone: many + 6,
    firstAt: at(1),
    lastAt: at(2),
    error: 'The disk is full.',
    createdBy: userId,
    createdAt: at(3),
    startedAt: at(4),
    finishedAt: at(5),
  }),
  sample(rows.ImportChunk, { stationId, importId, chunkNo: 0, data: hash }),
  sample(rows.ImportRefusal, {
    stationId,
    importId,
    lineNo: many,
    field: 'time',
    reason: 'No time.',
    raw: ';;',
  }),
  sample(rows.Job, {
    stationId,
    kind: 'import-undo',
    payload: json,
    state: 'running',
    attempts: 2,
    maxAttempts: 7,
    runAt: at(1),
    claimedBy: 'worker 1',
    heartbeatAt: at(2),
    progress: { done: 1, total: 3 },
    error: 'Once more.',
    cancelRequested: true,
    createdBy: userId,
    createdAt: at(3),
    finishedAt: at(4),
  }),
  sample(rows.TimedRun, { name: 'sweep', tick: at(1), claimedBy: 'worker 1' }),
  sample(rows.DirtyBlock, { stationId, startsAt: at(1), markedAt: at(2) }),
  sample(rows.UnitPack, {
    stationId,
    rulesKey: 'standing',
    antennaA: 1,
    antennaB: 2,
    night: '2026-01-10',
    unitCount: 412,
    heardOnlyCount: 31,
    units: hash,
    heardOnly: hash,
    madeAt: at(1),
  }),
  sample(rows.UnitNight, {
    stationId,
    rulesKey: 'standing',
    night: '2026-03-29',
    spots: 41_002,
    tally: json,
    madeAt: at(1),
  }),
  sample(rows.Trial, {
    stationId,
    name: 'Wire or loop',
    question: json,
    notes: 'For the winter',
    createdBy: userId,
    createdAt: at(1),
    updatedAt: at(2),
    archivedAt: at(3),
  }),
  sample(rows.Finding, {
    stationId,
    trialId: first,
    title: 'North-east against West',
    note: 'Before the frost',
    question: json,
    sentence: 'Does North-east hear better than West?',
    headline: json,
    answer: json,
    circumstances: json,
    firstNight: '2026-01-01',
    lastNight: '2026-01-10',
    digest: hash,
    nightDigests: [json],
    evidence: Buffer.from('packed'),
    dwellCount: 412,
    pictures: { rose: { whole: '<svg/>', sheets: ['<svg/>'] } },
    programVersion: '0.1.0',
    frozenBy: userId,
    frozenByName: 'Aoife',
    frozenAt: at(1),
  }),
  sample(rows.FindingDecision, {
    stationId,
    findingId: first,
    decision: 'look again',
    about: 'b',
    lookAgainOn: '2026-12-01',
    reason: 'The wire was iced.',
    decidedBy: userId,
    decidedByName: 'Aoife',
    decidedAt: at(2),
  }),
  sample(rows.FindingShare, {
    stationId,
    id: tokenId,
    findingId: first,
    tokenHash: hash,
    label: 'Friend of the club',
    createdBy: userId,
    createdAt: at(1),
    expiresAt: at(2),
    withdrawnAt: at(3),
    lastReadAt: at(4),
    timesRead: 7,
  }),
  sample(rows.AuditEntry, {
    stationId,
    at: at(1),
    userId,
    tokenId,
    action: 'trial.archive',
    target: '1',
    detail: json,
    requestId: 'r-1',
  }),
];

let database: TestDatabase;
let dataSource: DataSource;

beforeAll(async () => {
  database = await createTestDatabase();
  dataSource = await connectDataSource(createDataSource({ url: database.url }));
  await dataSource.query(`SELECT ensure_spot_partitions($1, $1)`, [wholeSecond]);
  // In this order, since rows name others.
  for (const { entity, row } of samples) await dataSource.getRepository(entity).insert({ ...row });
});

afterAll(async () => {
  await dataSource.destroy();
  await database.drop();
});

test('every table has a sample', () => {
  expect(samples.map(({ entity }) => entity)).toEqual(rows.entities);
});

const camelCase = (name: string): string =>
  name.replaceAll(/_(\w)/g, (_, letter: string) => letter.toUpperCase());

describe.each(samples.map(({ entity, row }) => [nameOf(entity), entity, row] as const))(
  '%s',
  (_name, entity, row) => {
    test('gives back what was stored', async () => {
      const stored = await dataSource.getRepository(entity).find();
      expect(stored).toHaveLength(1);
      expect(Object.fromEntries(Object.keys(row).map((key) => [key, stored[0]![key]]))).toEqual(row);
    });

    test('names every column in camel case and leaves none out', async () => {
      const { tableName } = dataSource.getMetadata(entity);
      const columns: { name: string; by_itself: boolean }[] = await dataSource.query(
        `SELECT column_name AS name, is_identity = 'YES' OR is_generated = 'ALWAYS' AS by_itself
         FROM information_schema.columns WHERE table_name = $1`,
        [tableName],
      );
      const given = columns.filter((column) => !column.by_itself).map(({ name }) => camelCase(name));
      expect(Object.keys(row).sort()).toEqual(given.sort());
    });
  },
);

function nameOf(entity: EntityTarget<ObjectLiteral>): string {
  return typeof entity === 'function' ? entity.name : String(entity);
}

describe('an identity column', () => {
  test.each([
    ['a dwell', rows.Dwell],
    ['a job', rows.Job],
    ['an entry of the audit trail', rows.AuditEntry],
  ])('gives %s its number as a number', async (_what, entity) => {
    const [stored] = await dataSource.getRepository<{ id: number }>(entity).find();
    expect(stored!.id).toBe(first);
  });

  test('gives the number back to whoever saves', async () => {
    const saved = await dataSource.getRepository(rows.Job).save({ stationId, kind: 'units', payload: {} });
    expect(saved).toMatchObject({ id: first + 1, state: 'queued', attempts: 0, maxAttempts: 5 });
    await dataSource.getRepository(rows.Job).delete({ stationId, id: saved.id });
  });
});

test('a membership finds its person and its station', async () => {
  const found = await dataSource
    .getRepository(rows.Membership)
    .findOneOrFail({ where: { stationId, userId }, relations: { user: true, station: true } });
  expect([found.user.name, found.station.callSign, found.role]).toEqual(['Aoife', 'EI7QSB', 'analyst']);
});

test('a refresh token finds its session and whose it is', async () => {
  const found = await dataSource
    .getRepository(rows.RefreshToken)
    .findOneOrFail({ where: { tokenHash: hash }, relations: { session: { user: true } } });
  expect(found.session.user.email).toBe('aoife@corrib.example');
});
