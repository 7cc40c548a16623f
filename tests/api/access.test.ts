import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import { permissions, role } from '../../shared/contracts/permission.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import type { Route } from '../../server/platform/route.ts';
import { startTestApi } from '../helpers/api.ts';
import type { TestApi } from '../helpers/api.ts';
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

beforeAll(async () => {
  api = await startTestApi();
  own = await insertStation(api.dataSource);
  foreign = await insertStation(api.dataSource);
  for (const r of role.options) tokens[r] = (await api.addPerson(own.stationId, r)).token;
  strangerToken = (await api.addPerson(foreign.stationId, 'manager')).token;
});
afterAll(() => api.close());

const noUuid = '00000000-0000-4000-8000-000000000000';
/** Ids that fit the contract and name nothing (or, given ids, something of another station). */
function paramsFor(r: Route, stationId: number, ids: Record<string, string | number> = {}) {
  const params: Record<string, string | number> = { stationId };
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
async function statusOf(r: Route, stationId: number, token?: string, ids?: Record<string, string | number>) {
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

  it('answers 404 to ids of another station under the own station', async () => {
    const ids: Record<string, string | number> = {
      receiverId: foreign.receiverId,
      antennaId: foreign.antennaIds[0],
    };
    const walked = stationRoutes().filter((r) =>
      Object.keys(ids).some((name) => r.endpoint.path.includes(`:${name}`)),
    );
    expect(walked.length).toBeGreaterThan(2);
    for (const r of walked) {
      const status = await statusOf(r, own.stationId, tokens.manager, ids);
      // A missing body is refused before the id is looked up: then the body below decides.
      if (status !== 400) expect(status, title(r)).toBe(404);
    }
  });

  it('answers 404 to ids of another station in a query', async () => {
    const ids: Record<string, number> = { receiverId: foreign.receiverId, antennaId: foreign.antennaIds[0] };
    const range: Record<string, string> = { from: '2026-11-30T18:00:00Z', to: '2026-11-30T19:00:00Z' };
    let walked = 0;
    for (const r of stationRoutes()) {
      const known = r.endpoint.query instanceof z.ZodObject ? Object.keys(r.endpoint.query.shape) : [];
      for (const name of known.filter((key) => key in ids)) {
        walked += 1;
        const search = new URLSearchParams({ [name]: String(ids[name]) });
        for (const key of known.filter((one) => one in range)) search.set(key, range[key]!);
        const path = r.endpoint.path.replace(':stationId', String(own.stationId));
        const response = await fetch(`${api.url}/api${path}?${search}`, {
          method: r.endpoint.method,
          headers: { authorization: `Bearer ${tokens.manager}` },
        });
        expect(response.status, `${title(r)} with ${name}`).toBe(404);
      }
    }
    expect(walked).toBeGreaterThan(2);
  });
});
