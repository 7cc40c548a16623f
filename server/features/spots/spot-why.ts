import { GUARDED, UNTAGGED } from '../../../shared/pairing/index.ts';
import { clockText } from '../../platform/clock-text.ts';

export interface WhyFacts {
  timeMs: number;
  uncertaintySeconds: number;
  tag: number;
  guardSeconds: number;
  receiver: string;
  /** The dwell that holds the spot. */
  dwell: { antenna: string; startMs: number; endMs: number } | null;
  /** Of a spot in no dwell: where the receiver's log ends before it and starts again after it. */
  gap: { fromMs: number | null; toMs: number | null } | null;
}

const thin = '\u2009';

/** The sentence that says why a spot is tagged as it is. */
export function whyTagged(facts: WhyFacts): string {
  const { dwell, guardSeconds } = facts;
  if (facts.tag === UNTAGGED || !dwell) return whyUntagged(facts);
  const after = `${durationText(facts.timeMs - dwell.startMs)} after the switch to ${dwell.antenna}`;
  if (facts.tag !== GUARDED) {
    return guardSeconds === 0 ? `${after}.` : `${after}, past the guard of ${guardSeconds}${thin}s.`;
  }
  if (facts.timeMs < dwell.startMs + guardSeconds * 1000) {
    return `${after}; the guard is ${guardSeconds}${thin}s.`;
  }
  const at = clockText(dwell.endMs).slice(11);
  return facts.uncertaintySeconds === 60
    ? `Only the minute is known: the switch at ${at} falls inside it.`
    : `The time is known to ${facts.uncertaintySeconds}${thin}s only: the switch at ${at} falls inside that.`;
}

function whyUntagged({ receiver, gap }: WhyFacts): string {
  const { fromMs = null, toMs = null } = gap ?? {};
  if (fromMs !== null && toMs !== null) {
    return `No dwell of ${receiver} covers this time: the log has a gap from ${clockText(fromMs)} to ${clockText(toMs)}.`;
  }
  if (fromMs !== null)
    return `No dwell of ${receiver} covers this time: its log ends at ${clockText(fromMs)}.`;
  if (toMs !== null) return `No dwell of ${receiver} covers this time: its log starts at ${clockText(toMs)}.`;
  return `${receiver} has no dwell in the switch log.`;
}

/** "9 s", "4 min 12 s", "3 h 5 min": two units are enough to find the place. */
function durationText(durationMs: number): string {
  const seconds = Math.floor(durationMs / 1000);
  const parts: [number, string][] = [
    [Math.floor(seconds / 86_400), 'd'],
    [Math.floor(seconds / 3600) % 24, 'h'],
    [Math.floor(seconds / 60) % 60, 'min'],
    [seconds % 60, 's'],
  ];
  const first = parts.findIndex(([n]) => n > 0);
  if (first < 0) return `0${thin}s`;
  return parts
    .slice(first, first + 2)
    .filter(([n]) => n > 0)
    .map(([n, unit]) => `${n}${thin}${unit}`)
    .join(' ');
}
