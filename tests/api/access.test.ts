import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { saveTrial } from '../../shared/contracts/comparison.ts';
import { applyDwellChanges } from '../../shared/contracts/dwell.ts';
import type { BodyInput } from '../../shared/contracts/endpoint.ts';
import { saveMapping, uploadImport } from '../../shared/contracts/import.ts';
import { permissions, role } from '../../shared/contracts/permission.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import * as station from '../../shared/contracts/station.ts';
import type { Route } from '../../server/platform/route.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi, TestReply } from '../helpers/api.ts';
import { insertStation } from '../helpers/station-rows.ts';

/**
 * Walks every route of the API as nobody, as each role, as a member of another station, and with another
 * station's ids. A route added tomorrow is walked tomorrow.
 */
let api: TestApi;
let own: Awaited<ReturnType<typeof insertStation>>;
let foreign: Awaited<ReturnType<typeof insertStation>>;
const tokens = {} as Record<Role, string>;
let strangerToken: string;
let strangerId: string;
let foreignIds: Ids = {};

beforeAll(async () => {
  api = await startTestApi();
  own = await insertStation(api.dataSource);
  foreign = await insertStation(api.dataSource);
  for (const r of role.options) tokens[r] = (await api.addPerson(own.stationId, r)).token;
  const stranger = await api.addPerson(foreign.stationId, 'manager', 'foreign-manager@x.example');
  [strangerToken, strangerId] = [stranger.token, stranger.userId];
  foreignIds = await fillForeign();
});
afterAll(() => api.close());

const noUuid = '00000000-0000-4000-8000-000000000000';
/** Ids that fit the contract and name nothing (or, given ids, something of another station). */
function paramsFor(r: Route, stationId: number, ids: Ids = {}) {
  const params: Ids = { stationId };
  for (const [, name] of r.endpoint.path.matchAll(/:(\w+)/g)) {
    if (name === 'stationId' || name === undefined) continue;
    params[name] =
      ids[name] ?? (r.endpoint.params.safeParse({ stationId, [name]: 999_999 }).success ? 999_999 : noUuid);
  }
  return params;
}
const title = (r: Route) => `${r.endpoint.method} ${r.endpoint.path}`;
const stationRoutes = () => api.routes.filter((r) => r.access.kind === 'station');

/** Status of a call with no body: authorisation comes before validation, so 400 means "let in". */
async function statusOf(r: Route, stationId: number, token?: string, ids?: Ids) {
  const path = r.endpoint.path.replace(/:(\w+)/g, (_all, name: string) =>
    String(paramsFor(r, stationId, ids)[name]),
  );
  const response = await fetch(`${api.url}/api${path}`, {
    method: r.endpoint.method,
    headers: token ? { authorization: `Bearer ${token}` } : {},
    signal: AbortSignal.timeout(20_000),
  });
  await response.body?.cancel();
  return response.status;
}

describe('access to the API', () => {
  it('has one declared access for each route, and no route twice', () => {
    const titles = api.routes.map(title);
    expect(new Set(titles).size).toBe(titles.length);
    for (const r of api.routes) {
      expect(['public', 'session', 'station'], title(r)).toContain(r.access.kind);
      expect(r.endpoint.path.startsWith('/stations/:stationId'), title(r)).toBe(r.access.kind === 'station');
      if (r.access.kind === 'station')
        expect(Object.keys(permissions), title(r)).toContain(r.access.permission);
    }
  });

  it('names an audit action on every route that changes something', () => {
    const readsByPost = [
      'POST /auth/refresh',
      'POST /auth/sign-out',
      'POST /auth/invitation/read',
      'POST /stations/:stationId/comparisons',
      'POST /stations/:stationId/comparisons/units.csv',
      'POST /stations/:stationId/dwells/preview',
      'POST /stations/:stationId/imports/:importId/preview',
    ];
    const silent = api.routes.filter((r) => r.endpoint.method !== 'GET' && r.audit === null).map(title);
    expect(silent.filter((t) => !readsByPost.includes(t))).toEqual([]);
    expect(api.routes.filter((r) => r.endpoint.method === 'GET' && r.audit !== null).map(title)).toEqual([]);
  });

  it('lets only these routes be called by anybody', () => {
    expect(
      api.routes
        .filter((r) => r.access.kind === 'public')
        .map((r) => r.endpoint.path)
        .sort(),
    ).toEqual([
      '/auth/demo-accounts',
      '/auth/demo-mail',
      '/auth/invitation/accept',
      '/auth/invitation/read',
      '/auth/password-reset',
      '/auth/password-reset/confirm',
      '/auth/refresh',
      '/auth/set-up',
      '/auth/sign-in',
      '/auth/sign-out',
      '/health/live',
      '/health/ready',
    ]);
  });

  it('answers 401 to nobody on every other route', async () => {
    for (const r of api.routes.filter((x) => x.access.kind !== 'public')) {
      expect(await statusOf(r, own.stationId), title(r)).toBe(401);
      expect(await statusOf(r, own.stationId, 'not.a.token'), title(r)).toBe(401);
    }
  });

  it('gives each role what the permission table gives it, and 403 otherwise', async () => {
    for (const r of stationRoutes()) {
      if (r.access.kind !== 'station') continue;
      const allowed: readonly Role[] = permissions[r.access.permission];
      for (const who of role.options) {
        const status = await statusOf(r, own.stationId, tokens[who]);
        const label = `${title(r)} as ${who}`;
        if (allowed.includes(who)) expect([200, 201, 202, 204, 400, 404, 409], label).toContain(status);
        else expect(status, label).toBe(403);
      }
    }
  });

  it('shows a station to strangers as if it did not exist', async () => {
    for (const r of stationRoutes())
      expect(await statusOf(r, own.stationId, strangerToken), title(r)).toBe(404);
  });

  it('refuses API tokens where no scope is named', async () => {
    for (const r of api.routes.filter((x) => x.access.kind === 'station' && !x.access.tokenScope)) {
      expect([401, 403], title(r)).toContain(await statusOf(r, own.stationId, `wwk_${'x'.repeat(43)}`));
    }
  });

  it('knows every route that takes an id of the station, in its path or in what is sent', () => {
    const withIds = stationRoutes().filter((r) => idNames(r).length > 0);
    expect(withIds.length).toBeGreaterThan(20);
    expect(withIds.map(title).filter((t) => !walks(own, foreignIds).has(t))).toEqual([]);
    const titles = new Set(api.routes.map(title));
    expect([...walks(own, foreignIds).keys()].filter((t) => !titles.has(t))).toEqual([]);
  });

  it("finds nothing, names the field, and changes nothing when sent another station's ids", async () => {
    const before = await rowsOf(foreign.stationId);
    for (const r of stationRoutes()) {
      const path = paramsFor(r, own.stationId, foreignIds);
      for (const sent of walks(own, foreignIds).get(title(r)) ?? []) {
        const reply = await api.call(r.endpoint, {
          token: tokens.manager,
          ...sent.call,
          params: { ...path, ...sent.params },
        });
        const label = `${title(r)} ${JSON.stringify(sent.call)}: ${reply.status} ${reply.text.slice(0, 400)}`;
        if (!sent.field) {
          // What is sent is valid: only the id can be what is refused.
          expect(reply.status, label).toBe(404);
          continue;
        }
        expect([400, 404], label).toContain(reply.status);
        if (reply.status === 404) continue;
        const { errors = [] } = reply.body as { errors?: { path: string }[] };
        expect(errors.map((e) => e.path).join(' '), label).toContain(sent.field);
      }
    }
    expect(await rowsOf(foreign.stationId)).toEqual(before);
  });

  it("shows none of another station's rows in any list", async () => {
    const marked = JSON.stringify(foreignMarks);
    for (const r of stationRoutes().filter((x) => x.endpoint.method === 'GET')) {
      if (Object.keys(paramsFor(r, own.stationId)).length > 1 || r.endpoint.path.endsWith('/events'))
        continue;
      const query = r.endpoint.query.safeParse({}).success ? {} : nightQuery;
      const reply = await api.call(r.endpoint, {
        params: { stationId: own.stationId },
        query: query as never,
        token: tokens.manager,
      });
      expect(reply.status, `${title(r)} ${reply.text.slice(0, 300)}`).toBe(200);
      for (const mark of JSON.parse(marked) as string[]) expect(reply.text, title(r)).not.toContain(mark);
    }
  });
});

const nightQuery = { from: '2026-11-30T12:00:00Z', to: '2026-12-01T12:00:00Z' };
/** Words that stand in the foreign station's rows and nowhere else. */
const foreignMarks = ['Foreign', 'foreign', 'EI9QSF'];

type Ids = Record<string, string | number>;
type Own = Awaited<ReturnType<typeof insertStation>>;
/** What is sent to a route; `field`: the foreign id is there and not in the path. */
interface Walk {
  call: { query?: never; body?: never };
  field?: string;
  /** Ids of the own station in the path, where only what is sent names the other's. */
  params?: Ids;
}

/** Names of ids of the station's things that a route takes: in the path, the query or the body. */
function idNames(r: Route): string[] {
  const names = [...r.endpoint.path.matchAll(/:(\w+)/g)].map((m) => m[1]!).filter((n) => n !== 'stationId');
  const isId = /(Ids?|^receivers?|^antennas?|^antenna[AB]|^inUse|Names)$/;
  const walk = (node: unknown): void => {
    if (Array.isArray(node)) node.forEach(walk);
    if (typeof node !== 'object' || node === null) return;
    for (const [key, value] of Object.entries(node)) {
      if (key === 'properties') names.push(...Object.keys(value as object).filter((n) => isId.test(n)));
      walk(value);
    }
  };
  for (const part of [r.endpoint.query, r.endpoint.body]) {
    walk(z.toJSONSchema(part, { io: 'input', unrepresentable: 'any' }));
  }
  return names;
}

/** By route: everything valid that can be sent to it, with the other station's ids in each place in turn. */
function walks(mine: Own, f: Ids): Map<string, Walk[]> {
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
async function fillForeign(): Promise<Ids> {
  const params = { stationId: foreign.stationId };
  const as = { params, token: strangerToken };
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
  const dwell = (s: Own, of: { note?: string }): BodyInput<typeof applyDwellChanges> => ({
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
    token: tokens.manager,
    body: dwell(own, {}),
  });
  const file = (name: string) => {
    const form = new FormData();
    form.append('file', new Blob(['time,receiver,call,freq,snr\n']), name);
    return form;
  };
  const made = await api.call(station.makeToken, { ...as, body: { name: 'Foreign', scopes: ['spot:read'] } });
  const [antennaA, antennaB] = foreign.antennaIds;
  const ids: Ids = {
    receiverId: foreign.receiverId,
    antennaId: foreign.antennaIds[0],
    dwellId: dwells[0]!.id,
    ownDwellId: applyDwellChanges.reply.parse(ownAdded.body).dwells[0]!.id,
    batchId,
    userId: strangerId,
    tokenId: station.makeToken.reply.parse(made.body).token.id,
    invitationId: idOf(
      await api.call(station.inviteMember, { ...as, body: { email: 'foreign@x.example', role: 'operator' } }),
    ),
    feedId: idOf(
      await api.call(station.addFeed, {
        ...as,
        body: { name: 'Foreign', host: 'feed.example.org', port: 7300, loginCall: 'EI9QSF', enabled: false },
      }),
    ),
    positionId: idOf(
      await api.call(station.addPositionOverride, {
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
        token: tokens.manager,
        body: { name: 'Own', question: { antennaA: own.antennaIds[0], antennaB: own.antennaIds[1] } },
      }),
    ),
    importId: idOf(
      await api.call(uploadImport, { ...as, query: { kind: 'spots' }, body: file('foreign.csv') }),
    ),
    ownImportId: idOf(
      await api.call(uploadImport, {
        params: { stationId: own.stationId },
        token: tokens.manager,
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
  const [job] = (await dataSource.query('SELECT id FROM job WHERE station_id = $1 LIMIT 1', [
    foreign.stationId,
  ])) as [{ id: number }];
  ids.jobId = job.id;
  return ids;
}

/** Every row of a station, by table: what a request of another station must leave as it is. */
async function rowsOf(stationId: number): Promise<Record<string, string>> {
  const tables: { name: string }[] = await api.dataSource.query(
    `SELECT c.table_name AS name FROM information_schema.columns c
     JOIN information_schema.tables t USING (table_schema, table_name)
     WHERE c.table_schema = 'public' AND c.column_name = 'station_id' AND t.table_type = 'BASE TABLE'`,
  );
  const rows: Record<string, string> = {};
  for (const { name } of tables) {
    const [row] = (await api.dataSource.query(
      `SELECT coalesce(json_agg(t ORDER BY t::text), '[]')::text AS rows FROM "${name}" t WHERE station_id = $1`,
      [stationId],
    )) as [{ rows: string }];
    rows[name] = row.rows;
  }
  return rows;
}
