import type { DataSource } from 'typeorm';
import { saveTrial } from '../../shared/contracts/comparison.ts';
import { applyDwellChanges } from '../../shared/contracts/dwell.ts';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import { createShare } from '../../shared/contracts/finding.ts';
import { saveMapping, uploadImport } from '../../shared/contracts/import.ts';
import * as feedContract from '../../shared/contracts/feed.ts';
import * as memberContract from '../../shared/contracts/member.ts';
import * as positionContract from '../../shared/contracts/position.ts';
import * as tokenContract from '../../shared/contracts/token.ts';
import { fixtureAnswer } from '../../shared/pictures/answer.fixture.ts';
import { Finding } from '../../server/database/entities/finding.ts';
import type { TestApi, TestReply } from './api.ts';
import type { StationRows } from './station-rows.ts';

export const nightQuery = { from: '2026-11-30T12:00:00Z', to: '2026-12-01T12:00:00Z' };
/** Words that stand in the foreign station's rows and nowhere else. */
export const foreignMarks = ['Foreign', 'foreign', 'EI9QSF'];

export type Ids = Record<string, string | number>;
/** A station with its manager. */
export interface Manned extends StationRows {
  token: string;
  userId: string;
}
/** What is sent to a route; `field`: the foreign id is there and not in the path. */
export interface Walk {
  call: { query?: never; body?: never };
  field?: string;
  /** Ids of the own station in the path, where only what is sent names the other's. */
  params?: Ids;
}

/** By route: everything valid that can be sent to it, with the other station's ids in each place in turn. */
export function walks(mine: StationRows, f: Ids): Map<string, Walk[]> {
  const [antenna, otherAntenna] = mine.antennaIds;
  const receiver = mine.receiverId;
  const send = (body?: unknown, field?: string): Walk => ({ call: { body: body as never }, field });
  const ask = (query: unknown, field: string): Walk => ({ call: { query: query as never }, field });
  const path = [send()];
  const newDwell = (change: object) => ({
    receiverId: receiver,
    antennaId: antenna,
    startsAt: '2026-11-29T20:00:00Z',
    endsAt: '2026-11-29T21:00:00Z',
    ...change,
  });
  const changes = (change: object, field: string) => send({ changes: [change] }, field);
  const dwellChanges = [
    changes({ action: 'add', dwell: newDwell({ receiverId: f.receiverId }) }, 'receiverId'),
    changes({ action: 'add', dwell: newDwell({ antennaId: f.antennaId }) }, 'antennaId'),
    changes({ action: 'edit', dwellId: f.dwellId, note: 'x' }, 'dwellId'),
    changes({ action: 'edit', dwellId: f.ownDwellId, antennaId: f.antennaId }, 'antennaId'),
    changes(
      { action: 'split', dwellId: f.dwellId, at: '2026-11-30T18:30:00Z', antennaId: antenna },
      'dwellId',
    ),
    changes(
      { action: 'split', dwellId: f.ownDwellId, at: '2026-11-30T18:30:00Z', antennaId: f.antennaId },
      'antennaId',
    ),
    changes({ action: 'close', dwellId: f.dwellId, at: '2026-11-30T18:30:00Z' }, 'dwellId'),
    changes({ action: 'delete', dwellId: f.dwellId }, 'dwellId'),
  ];
  const question = (change: object) => ({ antennaA: antenna, antennaB: otherAntenna, ...change });
  const questions = (wrap: (q: object) => unknown) => [
    send(wrap(question({ antennaA: f.antennaId })), 'antennaA'),
    send(wrap(question({ antennaB: f.antennaId })), 'antennaB'),
    send(wrap(question({ receivers: [f.receiverId] })), 'receivers'),
  ];
  const table = { kind: 'spots', layout: 'table', format: {}, time: { kind: 'iso' } };
  const columns = { time: 1, receiver: 2, call: 3, freq: 4, snr: 5 };
  const spotMapping = (change: object = {}) => ({ ...table, columns, ...change });
  const dwellMapping = (change: object) => ({
    ...table,
    kind: 'dwells',
    columns: { antenna: 1, startsAt: 2 },
    ...change,
  });
  const mappings = (wrap: (m: object) => unknown) => [
    send(wrap(spotMapping({ fixedReceiverId: f.receiverId })), 'fixedReceiverId'),
    send(wrap(spotMapping({ receiverNames: { shed: f.receiverId } })), 'receiverNames'),
    send(wrap(dwellMapping({ fixedReceiverId: f.receiverId })), 'fixedReceiverId'),
    send(wrap(dwellMapping({ receiverNames: { shed: f.receiverId } })), 'receiverNames'),
    send(
      wrap(dwellMapping({ fixedReceiverId: receiver, antennaNames: { west: f.antennaId } })),
      'antennaNames',
    ),
  ];
  const spotMappings = mappings((mapping) => ({ mapping }))
    .slice(0, 2)
    .map((w) => ({ ...w, params: { importId: f.ownImportId! } }));
  return new Map<string, Walk[]>([
    ['PATCH /stations/:stationId/receivers/:receiverId', [send({ label: 'Taken' }), send({ retired: true })]],
    ['PATCH /stations/:stationId/antennas/:antennaId', [send({ notes: 'taken' })]],
    ['DELETE /stations/:stationId/antennas/:antennaId', path],
    ['PATCH /stations/:stationId/feeds/:feedId', [send({ enabled: false })]],
    ['DELETE /stations/:stationId/feeds/:feedId', path],
    ['GET /stations/:stationId/feeds/:feedId/refusals.csv', path],
    ['DELETE /stations/:stationId/positions/:positionId', path],
    ['DELETE /stations/:stationId/invitations/:invitationId', path],
    ['PATCH /stations/:stationId/members/:userId', [send({ role: 'contester' })]],
    ['DELETE /stations/:stationId/members/:userId', path],
    ['DELETE /stations/:stationId/tokens/:tokenId', path],
    ['GET /stations/:stationId/dwells', [ask({ ...nightQuery, receiverId: f.receiverId }, 'receiverId')]],
    [
      'POST /stations/:stationId/switch',
      [
        send({ receiver: f.receiverId, antenna }, 'receiver'),
        send({ receiver: 'EI9QSF', antenna }, 'receiver'),
        send({ receiver, antenna: f.antennaId }, 'antenna'),
        send({ receiver, antenna: 'Foreign wire' }, 'antenna'),
      ],
    ],
    ['POST /stations/:stationId/dwells/preview', dwellChanges],
    ['POST /stations/:stationId/dwells/changes', dwellChanges],
    ['POST /stations/:stationId/dwells/history/:batchId/undo', path],
    ['POST /stations/:stationId/comparisons', questions((q) => q)],
    ['POST /stations/:stationId/comparisons/units.csv', questions((q) => q)],
    ['POST /stations/:stationId/comparisons/sensitivity', questions((question) => ({ question }))],
    [
      'POST /stations/:stationId/ladder',
      [
        send({ receivers: [f.receiverId] }, 'receivers'),
        send({ referenceAntennaId: f.antennaId }, 'referenceAntennaId'),
      ],
    ],
    ['POST /stations/:stationId/trials', questions((q) => ({ name: 'Taken', question: q }))],
    ['GET /stations/:stationId/trials/:trialId', path],
    [
      'PATCH /stations/:stationId/trials/:trialId',
      [
        send({ name: 'Taken' }),
        ...questions((q) => ({ question: q })).map((w) => ({ ...w, params: { trialId: f.ownTrialId! } })),
      ],
    ],
    ['DELETE /stations/:stationId/trials/:trialId', path],
    [
      'POST /stations/:stationId/findings',
      [
        send({ title: 'Taken', trialId: f.trialId }, 'trialId'),
        ...questions((q) => ({ title: 'Taken', question: q })),
      ],
    ],
    ['GET /stations/:stationId/findings/:findingId', path],
    ['POST /stations/:stationId/findings/:findingId/recompute', path],
    [
      'POST /stations/:stationId/findings/:findingId/decisions',
      [send({ decision: 'keep', reason: 'Taken' })],
    ],
    ['GET /stations/:stationId/findings/:findingId/shares', path],
    ['POST /stations/:stationId/findings/:findingId/shares', [send({ label: 'Taken' })]],
    [
      'DELETE /stations/:stationId/findings/:findingId/shares/:shareId',
      [send(), { ...send(), params: { findingId: f.ownFindingId! } }],
    ],
    ['GET /stations/:stationId/findings/:findingId/report.pdf', path],
    ['GET /stations/:stationId/findings/:findingId/units.csv', path],
    [
      'GET /stations/:stationId/findings/:findingId/pictures/:picture.svg',
      [{ ...send(), params: { picture: 'rose' } }],
    ],
    ['GET /stations/:stationId/imports/:importId', path],
    [
      'POST /stations/:stationId/imports/:importId/preview',
      // What is wrong with a mapping of an own file stands beside the rows that the preview shows.
      [send({}), send({ mapping: spotMapping() })],
    ],
    [
      'POST /stations/:stationId/imports/:importId/start',
      [send({ mapping: spotMapping() }), ...spotMappings],
    ],
    ['POST /stations/:stationId/imports/:importId/cancel', path],
    ['POST /stations/:stationId/imports/:importId/undo', path],
    ['GET /stations/:stationId/imports/:importId/refusals', path],
    ['GET /stations/:stationId/imports/:importId/refusals.csv', path],
    ['PUT /stations/:stationId/mappings', mappings((mapping) => ({ name: 'Taken', mapping }))],
    ['DELETE /stations/:stationId/mappings/:mappingId', path],
    ['GET /stations/:stationId/jobs/:jobId', path],
    ['POST /stations/:stationId/jobs/:jobId/cancel', path],
    ['POST /stations/:stationId/jobs/:jobId/retry', path],
    [
      'GET /stations/:stationId/spots',
      [ask({ receiverId: f.receiverId }, 'receiverId'), ask({ antennaId: f.antennaId }, 'antennaId')],
    ],
    ['GET /stations/:stationId/tonight', [ask({ inUse: f.antennaId }, 'inUse')]],
  ]);
}

/** One of everything at the other station, made through its own API where that can be done. */
export async function fillStations(api: TestApi, own: Manned, foreign: Manned): Promise<Ids> {
  const params = { stationId: foreign.stationId };
  const as = { params, token: foreign.token };
  const { dataSource } = api;
  await dataSource.query(
    `UPDATE receiver SET call_sign = 'EI9QSF', label = 'Foreign' WHERE station_id = $1`,
    [foreign.stationId],
  );
  await dataSource.query(`UPDATE antenna SET name = 'Foreign wire' WHERE station_id = $1 AND id = $2`, [
    foreign.stationId,
    foreign.antennaIds[0],
  ]);
  await dataSource.query(`UPDATE station SET name = 'Foreign station' WHERE id = $1`, [foreign.stationId]);
  const idOf = (reply: TestReply): string | number => {
    if (reply.status >= 300) throw new Error(`${reply.status} ${reply.text}`);
    return (reply.body as { id: string | number }).id;
  };
  const dwell = (s: StationRows, of: { note?: string }): BodyInput<typeof applyDwellChanges> => ({
    changes: [
      {
        action: 'add',
        dwell: {
          receiverId: s.receiverId,
          antennaId: s.antennaIds[0],
          startsAt: '2026-11-30T18:00:00Z',
          endsAt: '2026-11-30T19:00:00Z',
          ...of,
        },
      },
    ],
  });
  const added = await api.call(applyDwellChanges, { ...as, body: dwell(foreign, { note: 'foreign' }) });
  const { batchId, dwells } = applyDwellChanges.reply.parse(added.body);
  const ownAdded = await api.call(applyDwellChanges, {
    params: { stationId: own.stationId },
    token: own.token,
    body: dwell(own, {}),
  });
  const file = (name: string) => {
    const form = new FormData();
    form.append('file', new Blob(['time,receiver,call,freq,snr\n']), name);
    return form;
  };
  const made = await api.call(tokenContract.makeToken, {
    ...as,
    body: { name: 'Foreign', scopes: ['spot:read'] },
  });
  const [antennaA, antennaB] = foreign.antennaIds;
  const ids: Ids = {
    receiverId: foreign.receiverId,
    antennaId: foreign.antennaIds[0],
    dwellId: dwells[0]!.id,
    ownDwellId: applyDwellChanges.reply.parse(ownAdded.body).dwells[0]!.id,
    batchId,
    userId: foreign.userId,
    tokenId: tokenContract.makeToken.reply.parse(made.body).token.id,
    invitationId: idOf(
      await api.call(memberContract.inviteMember, {
        ...as,
        body: { email: 'foreign@x.example', role: 'operator' },
      }),
    ),
    feedId: idOf(
      await api.call(feedContract.addFeed, {
        ...as,
        body: { name: 'Foreign', host: 'feed.example.org', port: 7300, loginCall: 'EI9QSF', enabled: false },
      }),
    ),
    positionId: idOf(
      await api.call(positionContract.addPositionOverride, {
        ...as,
        body: { matches: 'call', pattern: 'EI9QSF', locator: 'IO53' },
      }),
    ),
    trialId: idOf(
      await api.call(saveTrial, { ...as, body: { name: 'Foreign', question: { antennaA, antennaB } } }),
    ),
    ownTrialId: idOf(
      await api.call(saveTrial, {
        params: { stationId: own.stationId },
        token: own.token,
        body: { name: 'Own', question: { antennaA: own.antennaIds[0], antennaB: own.antennaIds[1] } },
      }),
    ),
    importId: idOf(
      await api.call(uploadImport, { ...as, query: { kind: 'spots' }, body: file('foreign.csv') }),
    ),
    ownImportId: idOf(
      await api.call(uploadImport, {
        params: { stationId: own.stationId },
        token: own.token,
        query: { kind: 'spots' },
        body: file('own.csv'),
      }),
    ),
    mappingId: idOf(
      await api.call(saveMapping, {
        ...as,
        body: {
          name: 'Foreign',
          mapping: { kind: 'spots', layout: 'spot lines', format: {}, time: { kind: 'iso' }, columns: {} },
        },
      }),
    ),
  };
  ids.findingId = await storeFinding(dataSource, foreign, 'Foreign');
  ids.ownFindingId = await storeFinding(dataSource, own, 'Own');
  const shared = await api.call(createShare, {
    params: { stationId: foreign.stationId, findingId: ids.findingId },
    token: foreign.token,
    body: { label: 'Foreign' },
  });
  ids.shareId = createShare.reply.parse(shared.body).share.id;
  const [job] = (await dataSource.query('SELECT id FROM job WHERE station_id = $1 LIMIT 1', [
    foreign.stationId,
  ])) as [{ id: number }];
  ids.jobId = job.id;
  return ids;
}

/** A finding of an invented answer: freezing a real one takes a station with spots. */
async function storeFinding(dataSource: DataSource, of: Manned, title: string): Promise<number> {
  const answer = fixtureAnswer();
  const { antennas, verdict, estimate, marginDb, counts, question } = answer;
  const { id } = await dataSource.getRepository(Finding).save({
    stationId: of.stationId,
    title,
    question: { ...question },
    sentence: 'Does North-east wire hear better than Vertical?',
    headline: { antennas, verdict, estimate, marginDb, counts },
    answer: { ...answer },
    circumstances: {},
    firstNight: '2026-11-01',
    lastNight: '2026-11-14',
    digest: Buffer.alloc(32),
    nightDigests: [],
    evidence: Buffer.alloc(0),
    dwellCount: 0,
    pictures: {},
    programVersion: '0.1.0',
    frozenByName: 'manager',
  });
  return id;
}
