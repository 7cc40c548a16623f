import { createHash } from 'node:crypto';
import { getDocumentProxy } from 'unpdf';
import { afterAll, beforeAll, beforeEach, describe, expect, it } from 'vitest';
import { listAudit } from '../../shared/contracts/audit.ts';
import { saveTrial } from '../../shared/contracts/comparison.ts';
import type { BodyInput, Endpoint } from '../../shared/contracts/endpoint.ts';
import * as contract from '../../shared/contracts/finding.ts';
import type { Finding } from '../../shared/contracts/finding.ts';
import { startTestApi } from '../helpers/api.ts';
import type { CallOptions, TestApi, TestReply } from '../helpers/api.ts';
import { storeSampleStation } from '../helpers/sample-station.ts';

let api: TestApi;
let stationId: number;
let manager: string;
let analyst: string;
let contester: string;
let finding: Finding;
let tests = 0;

beforeAll(async () => {
  api = await startTestApi();
  const sample = await storeSampleStation(api.dataSource, 'alternate');
  ({ stationId } = sample);
  manager = (await api.addPerson(stationId, 'manager')).token;
  analyst = (await api.addPerson(stationId, 'analyst')).token;
  contester = (await api.addPerson(stationId, 'contester')).token;
  const question = { antennaA: sample.antennas.ALPHA!, antennaB: sample.antennas.BRAVO! };
  const params = { stationId };
  const trial = await api.call(saveTrial, { params, token: analyst, body: { name: 'Inner name', question } });
  const reply = await api.call(contract.freezeFinding, {
    params,
    token: analyst,
    body: { title: 'Alpha or "Bravo"\r\n', trialId: (trial.body as { id: number }).id },
  });
  finding = contract.finding.parse(reply.body);
});
afterAll(() => api.close());
beforeEach(() => {
  tests += 1;
  api.deps.now = Date.now;
});

/** Guests of each test come from an address of their own: the rate limit is tested where it is meant. */
const guest = () => ({ 'x-forwarded-for': `10.9.0.${tests}` });
const params = () => ({ stationId, findingId: finding.id });
async function share(body: BodyInput<typeof contract.createShare> = { label: 'Friend of the club' }) {
  const reply = await api.call(contract.createShare, { params: params(), token: analyst, body });
  if (reply.status !== 201) throw new Error(`${reply.status} ${reply.text}`);
  return contract.createShare.reply.parse(reply.body);
}
const read = (token: string) => api.call(contract.readSharedFinding, { body: { token }, headers: guest() });
const withdraw = (shareId: string) =>
  api.call(contract.withdrawShare, { params: { ...params(), shareId }, token: analyst });
const inDays = (days: number) => () => Date.now() + days * 86_400_000;
/** A PDF as bytes: `call` reads text. */
async function download<E extends Endpoint>(endpoint: E, options: CallOptions<E>): Promise<Response> {
  const path = endpoint.path.replace(/:(\w+)/g, (_all, name: string) => String(options.params?.[name]));
  const search = new URLSearchParams(options.query as Record<string, string> | undefined);
  return fetch(`${api.url}/api${path}?${search}`, {
    method: endpoint.method,
    headers: {
      ...(options.token ? { authorization: `Bearer ${options.token}` } : {}),
      ...(options.body ? { 'content-type': 'application/json' } : {}),
      ...options.headers,
    },
    body: options.body ? JSON.stringify(options.body) : undefined,
  });
}
async function firstPage(response: Response): Promise<{ width: number; text: string }> {
  const document = await getDocumentProxy(new Uint8Array(await response.arrayBuffer()));
  const page = await document.getPage(1);
  const { items } = await page.getTextContent();
  const text = items
    .map((item) => ('str' in item ? item.str : ''))
    .join(' ')
    .replaceAll(/\s+/g, ' ');
  return { width: page.getViewport({ scale: 1 }).width, text };
}
const plain = (text: string) => text.replaceAll(/\s+/g, ' ');

describe('a share link', () => {
  it('opens its finding to somebody without an account, and nothing else of the station', async () => {
    const { token, url, share: made } = await share({ label: 'Friend of the club', days: 7 });
    expect(url).toBe(`http://127.0.0.1/f#${token}`);
    expect(Date.parse(made.expiresAt) - Date.parse(made.createdAt)).toBeCloseTo(7 * 86_400_000, -5);
    const reply = await read(token);
    expect(reply.status).toBe(200);
    const shown = contract.sharedFinding.parse(reply.body);
    expect(shown).toMatchObject({ title: finding.title, digest: finding.digest, trial: null });
    expect(shown.answer).toEqual(finding.answer);
    expect(shown.linkExpiresAt).toBe(made.expiresAt);
    expect(finding.trial!.name).toBe('Inner name');
    expect(reply.text).not.toContain('Inner name');
    const asMember = await api.call(contract.readFinding, { params: params(), token });
    expect(asMember.status).toBe(401);
  });

  it('is never indexed and never kept by a cache, neither its page nor what it shows', async () => {
    const { token } = await share();
    const replies = [await read(token), await read('x'.repeat(43))];
    for (const { headers } of replies) {
      expect(headers.get('x-robots-tag')).toContain('noindex');
      expect(headers.get('cache-control')).toBe('no-store');
      expect(headers.get('referrer-policy')).toBe('no-referrer');
    }
    const page = await fetch(`${api.url}/f`);
    expect(page.headers.get('x-robots-tag')).toContain('noindex');
  });

  it('is stored as the SHA-256 of its token; the token is shown once and stands nowhere else', async () => {
    const { token, share: made } = await share();
    const [row] = await api.dataSource.query(
      'SELECT token_hash, to_jsonb(s)::text AS whole FROM finding_share s WHERE id = $1',
      [made.id],
    );
    expect(row.token_hash).toEqual(createHash('sha256').update(token).digest());
    const list = await api.call(contract.listShares, { params: params(), token: analyst });
    const audit = await api.call(listAudit, { params: { stationId }, token: manager });
    for (const text of [row.whole, list.text, audit.text]) expect(text).not.toContain(token);
    expect(audit.text).toContain('finding.share');
  });

  it('is refused alike when it is unknown, expired or withdrawn', async () => {
    const expired = await share({ label: 'Short', days: 1 });
    const withdrawn = await share();
    expect((await withdraw(withdrawn.share.id)).status).toBe(204);
    expect((await read(expired.token)).status).toBe(200);
    api.deps.now = inDays(1.01);
    const replies = [await read(expired.token), await read(withdrawn.token), await read('A'.repeat(43))];
    const told = replies.map(({ status, body }) => {
      const { requestId: _each, ...rest } = body as Record<string, unknown>;
      return { status, rest, id: typeof _each };
    });
    expect(told[0]).toMatchObject({ status: 404, rest: { code: 'link-refused' } });
    expect(told[1]).toEqual(told[0]);
    expect(told[2]).toEqual(told[0]);
  });

  it('counts how often it was read; withdrawing it twice keeps the first time', async () => {
    const { token, share: made } = await share();
    await read(token);
    await read(token);
    await withdraw(made.id);
    const of = async () => {
      const reply = await api.call(contract.listShares, { params: params(), token: analyst });
      return contract.listShares.reply.parse(reply.body).items.find((each) => each.id === made.id)!;
    };
    const first = await of();
    expect(first).toMatchObject({ timesRead: 2, label: 'Friend of the club', createdBy: finding.frozenBy });
    expect(first.lastReadAt! >= first.createdAt).toBe(true);
    expect((await withdraw(made.id)).status).toBe(204);
    expect((await of()).withdrawnAt).toBe(first.withdrawnAt);
    expect((await read(token)).status).toBe(404);
  });

  it('lives 1 to 365 days, and is made by those who may share', async () => {
    for (const days of [0, 366, 1.5]) {
      const reply = await api.call(contract.createShare, {
        params: params(),
        token: analyst,
        body: { label: 'x', days },
      });
      expect([reply.status, reply.text], String(days)).toEqual([400, expect.stringContaining('body.days')]);
    }
    const { token } = await share({ label: 'Long', days: 365 });
    api.deps.now = inDays(364.9);
    expect((await read(token)).status).toBe(200);
    api.deps.now = Date.now;
    for (const call of [contract.createShare, contract.listShares]) {
      const reply = await api.call(call, {
        params: params(),
        token: contester,
        body: call === contract.createShare ? { label: 'x' } : undefined,
      });
      expect(reply.status).toBe(403);
    }
  });

  it('cannot be guessed at leisure', async () => {
    let last: TestReply | null = null;
    for (let tries = 0; tries < 31; tries++) last = await read(`guess-${tries}-`.padEnd(43, 'x'));
    expect(last!.status).toBe(429);
    expect(Number(last!.headers.get('retry-after'))).toBeGreaterThan(0);
  });
});

describe('the PDF of a finding', () => {
  it.each([
    ['a4', 595.28],
    ['letter', 612],
  ] as const)('comes on %s, for members and for guests alike', async (paper, width) => {
    const { token } = await share();
    const forMember = await download(contract.findingPdf, {
      params: params(),
      query: { paper },
      token: contester,
    });
    const forGuest = await download(contract.sharedFindingPdf, { body: { token, paper }, headers: guest() });
    for (const response of [forMember, forGuest]) {
      expect(response.status).toBe(200);
      expect(response.headers.get('content-type')).toBe('application/pdf');
      expect(response.headers.get('content-disposition')).toBe('attachment; filename="Alpha_or_Bravo_.pdf"');
      expect(response.headers.get('cache-control')).toBe('no-store');
      const page = await firstPage(response);
      expect(page.width).toBeCloseTo(width, 1);
      expect(page.text).toContain(plain(finding.sentence));
      expect(page.text).toContain(plain(finding.verdict.sentence));
    }
    expect(forGuest.headers.get('x-robots-tag')).toContain('noindex');
  });

  it('is refused on other paper and with a wrong token', async () => {
    const folio = await download(contract.findingPdf, {
      params: params(),
      query: { paper: 'folio' as 'a4' },
      token: analyst,
    });
    expect(folio.status).toBe(400);
    const wrong = await download(contract.sharedFindingPdf, {
      body: { token: 'B'.repeat(43) },
      headers: guest(),
    });
    expect(wrong.status).toBe(404);
  });
});
