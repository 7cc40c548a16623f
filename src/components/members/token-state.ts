import { formatAgo } from '../../../shared/format.ts';

interface Token {
  expiresAt: string;
  revokedAt: string | null;
}

/** Whether a token still opens anything, and until when, in words. */
export function tokenState(token: Token, nowMs: number): { isGood: boolean; words: string } {
  if (token.revokedAt !== null)
    return { isGood: false, words: `revoked ${formatAgo(token.revokedAt, nowMs)}` };
  const ended = Date.parse(token.expiresAt) <= nowMs;
  const words = `${ended ? 'ended' : 'good, ends'} ${formatAgo(token.expiresAt, nowMs)}`;
  return { isGood: !ended, words };
}
