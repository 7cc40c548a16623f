import type { Feed } from '../../../shared/contracts/feed.ts';
import { formatAgo } from '../../../shared/format.ts';

export interface FeedWords {
  /** One shape a state, so that no state is told by colour alone. */
  shape: 'bars' | 'ring' | 'triangle' | 'cross' | 'dash';
  tone: 'ok' | 'muted' | 'caution' | 'danger';
  word: string;
  sentence: string;
}

/** The state of a feed and what to do about it. A feed that the worker has not taken up yet has no health. */
export function feedWords(feed: Pick<Feed, 'enabled' | 'health'>, nowMs: number): FeedWords {
  const { health } = feed;
  if (!feed.enabled || health?.state === 'off') {
    return { shape: 'dash', tone: 'muted', word: 'off', sentence: 'Switched off: nothing is received.' };
  }
  if (health === null || health.state === 'connecting') {
    return {
      shape: 'ring',
      tone: 'muted',
      word: 'connecting',
      sentence: health?.lastError ? `Trying again after: ${health.lastError}` : 'The worker connects.',
    };
  }
  const last =
    health.lastLineAt === null ? 'No line so far' : `Last line ${formatAgo(health.lastLineAt, nowMs)}`;
  switch (health.state) {
    case 'receiving':
      return { shape: 'bars', tone: 'ok', word: 'receiving', sentence: `${last}.` };
    case 'silent':
      return {
        shape: 'triangle',
        tone: 'caution',
        word: 'silent',
        sentence: `${last}. Connected, but nothing comes: is the skimmer running, and the band open?`,
      };
    case 'lost':
      return {
        shape: 'cross',
        tone: 'danger',
        word: 'lost',
        sentence: `${last}. ${health.lastError ?? 'The connection broke.'} The worker keeps trying.`,
      };
  }
}
