import { countOf, formatAgo } from '../../../shared/format.ts';

export interface FeedHint {
  level: 'good' | 'bad';
  words: string;
  detail: string;
}

interface FeedState {
  name: string;
  enabled: boolean;
  health: {
    state: 'connecting' | 'receiving' | 'silent' | 'lost' | 'off';
    lastLineAt: string | null;
    linesLastMinute: number;
    lastError: string | null;
  } | null;
}

/** One hint for all feeds: the worst one speaks. Null when no feed is switched on. */
export function feedHint(feeds: readonly FeedState[], nowMs: number): FeedHint | null {
  const on = feeds.filter((feed) => feed.enabled);
  const troubled = on.find((feed) => feed.health?.state === 'lost' || feed.health?.state === 'silent');
  if (troubled?.health) {
    const { state, lastLineAt, lastError } = troubled.health;
    const last = lastLineAt === null ? 'never a line' : `last line ${formatAgo(lastLineAt, nowMs)}`;
    return {
      level: 'bad',
      words: `Feed ${state}, ${last}`,
      detail: lastError ? `${troubled.name}: ${lastError}` : troubled.name,
    };
  }
  if (on.length === 0) return null;
  if (on.every((feed) => feed.health?.state === 'receiving')) {
    const lines = on.reduce((sum, feed) => sum + (feed.health?.linesLastMinute ?? 0), 0);
    return {
      level: 'good',
      words: `Feed ${countOf(lines, 'line')}/min`,
      detail: on.map((feed) => feed.name).join(', '),
    };
  }
  return { level: 'good', words: 'Feed connecting', detail: on.map((feed) => feed.name).join(', ') };
}
