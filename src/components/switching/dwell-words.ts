import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Receiver } from '../../../shared/contracts/receiver.ts';
import { countOf, formatDuration, formatShare, formatUtc, formatUtcTime } from '../../../shared/format.ts';
import type { LaneItem } from './lane.ts';

type Names = ReadonlyMap<number, Pick<Antenna, 'name' | 'marker'>>;

/** "18:05Z to 18:10Z", with dates where the two days differ or `withDay` is set. */
export function spanWords(fromMs: number, toMs: number | null, withDay = false): string {
  const sameDay = toMs !== null && utcDay(fromMs) === utcDay(toMs);
  const start = withDay || !sameDay ? formatUtc(fromMs) : formatUtcTime(fromMs);
  if (toMs === null) return `since ${start}`;
  return `${start} to ${sameDay ? formatUtcTime(toMs) : formatUtc(toMs)}`;
}

const utcDay = (timeMs: number) => new Date(timeMs).toISOString().slice(0, 10);

/** A part of the time line in words, for focus, tooltips and screen readers. */
export function itemWords(item: LaneItem, antennas: Names): string {
  const name = (id: number) => antennas.get(id)?.name ?? `antenna ${id}`;
  if (item.kind === 'dwell') {
    const { dwell } = item;
    const startMs = Date.parse(dwell.startsAt);
    const endMs = dwell.endsAt === null ? null : Date.parse(dwell.endsAt);
    const lasting = endMs === null ? '' : `, ${formatDuration((endMs - startMs) / 1000)}`;
    const note = dwell.note === '' ? '' : `. Note: ${dwell.note}`;
    return `${name(dwell.antennaId)}, ${spanWords(startMs, endMs, true)}${lasting}${note}`;
  }
  if (item.kind === 'gap') {
    const length = formatDuration((item.toMs - item.fromMs) / 1000);
    return `No dwell, ${spanWords(item.fromMs, item.isOpen ? null : item.toMs, true)}, ${length}`;
  }
  const shares = item.shares.slice(0, 4).map((each) => `${name(each.antennaId)} ${formatShare(each.share)}`);
  const gaps = item.gapCount === 0 ? '' : ` and ${countOf(item.gapCount, 'gap')}`;
  return `${countOf(item.dwellCount, 'dwell')}${gaps}, ${spanWords(item.fromMs, item.toMs, true)}: ${shares.join(', ')}`;
}

/** What the whole time line shows, in a sentence for each receiver. */
export function lanesWords(
  lanes: readonly { receiver: Pick<Receiver, 'label'>; items: readonly LaneItem[] }[],
  fromMs: number,
  toMs: number,
): string {
  const sentences = lanes.map(({ receiver, items }) => {
    let dwells = 0;
    let gaps = 0;
    for (const item of items) {
      if (item.kind === 'dwell') dwells += 1;
      else if (item.kind === 'gap') gaps += 1;
      else {
        dwells += item.dwellCount;
        gaps += item.gapCount;
      }
    }
    return `${receiver.label}: ${countOf(dwells, 'dwell')}, ${countOf(gaps, 'gap')}.`;
  });
  return `Switch log ${spanWords(fromMs, toMs, true)}. ${sentences.join(' ')}`;
}
