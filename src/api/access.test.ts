// @vitest-environment node
import { afterEach, describe, expect, it } from 'vitest';
import { signedInFixture, startLocalServer } from '../../tests/helpers/client-server.ts';
import type { LocalServer, Reply } from '../../tests/helpers/client-server.ts';
import { accessToken, dropAccess, onSignedOut, refreshAccess, takeAccess } from './access.ts';

let server: LocalServer;
afterEach(async () => {
  dropAccess();
  await server.stop();
});

/** A server that gives these answers to refreshing, one after the other, and the last one from then on. */
async function answering(...replies: Reply[]): Promise<void> {
  server = await startLocalServer({
    'POST /auth/refresh': () => (replies.length > 1 ? replies.shift()! : replies[0]!),
  });
}
const raced: Reply = { status: 409, code: 'refresh-raced', detail: 'Another tab asked at the same moment.' };

describe('a new access token', () => {
  it('is asked for again when another tab was a moment earlier', async () => {
    await answering(raced, raced, { body: signedInFixture() });
    await refreshAccess();
    expect(server.seen).toHaveLength(3);
    expect(accessToken()).toBe('a-token-of-the-tests');
  });

  it('does not end the session when the race is never decided', async () => {
    await answering(raced);
    takeAccess(signedInFixture());
    let ended = 0;
    const stop = onSignedOut(() => (ended += 1));
    await expect(refreshAccess()).rejects.toMatchObject({ status: 409, code: 'refresh-raced' });
    stop();
    expect(ended).toBe(0);
    expect(accessToken()).toBe('a-token-of-the-tests');
  });

  it('is asked for once by all who need it at the same time', async () => {
    await answering({ body: signedInFixture() });
    await Promise.all([refreshAccess(), refreshAccess(), refreshAccess()]);
    expect(server.seen).toEqual(['POST /auth/refresh']);
  });
});
