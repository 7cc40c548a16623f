import type { Share } from '../../../shared/contracts/finding.ts';
import { formatAgo } from '../../../shared/format.ts';

/** Whether a link still opens the finding, and until when, in words. */
export function shareState(
  share: Pick<Share, 'expiresAt' | 'withdrawnAt'>,
  nowMs: number,
): { isGood: boolean; words: string } {
  if (share.withdrawnAt !== null)
    return { isGood: false, words: `withdrawn ${formatAgo(share.withdrawnAt, nowMs)}` };
  const ended = Date.parse(share.expiresAt) <= nowMs;
  return { isGood: !ended, words: `${ended ? 'ended' : 'good, ends'} ${formatAgo(share.expiresAt, nowMs)}` };
}
