import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { permissions, role } from '../../shared/contracts/permission.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import type { Route } from '../../server/platform/route.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
import { fillStations, foreignMarks, nightQuery, walks } from '../helpers/foreign-ids.ts';
import type { Ids } from '../helpers/foreign-ids.ts';
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
let foreignIds: Ids = {};

beforeAll(async () => {
  api = await startTestApi();
  own = await insertStation(api.dataSource);
  foreign = await insertStation(api.dataSource);
  for (const r of role.options) tokens[r] = (await api.addPerson(own.stationId, r)).token;
  const stranger = await api.addPerson(foreign.stationId, 'manager', 'foreign-manager@x.example');
  strangerToken = stranger.token;
  foreignIds = await fillStations(
    api,
    { ...own, token: tokens.manager, userId: '' },
    { ...foreign, ...stranger },
  );
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
      'POST /stations/:stationId/comparisons/sensitivity',
      'POST /stations/:stationId/ladder',
      'POST /stations/:stationId/dwells/preview',
      'POST /stations/:stationId/imports/:importId/preview',
      'POST /stations/:stationId/findings/:findingId/recompute',
      'POST /shared-findings/read',
      'POST /shared-findings/report.pdf',
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
      '/shared-findings/read',
      '/shared-findings/report.pdf',
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
