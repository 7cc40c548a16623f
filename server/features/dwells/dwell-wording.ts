import { clockText } from '../../platform/clock-text.ts';
import type { DwellRecord, DwellStep } from './dwell-record.ts';

/** What sentences call receivers and antennas. */
export interface LogNames {
  receiver: (id: number) => string;
  antenna: (id: number) => string;
}

export function spanText(startMs: number, endMs: number | null): string {
  return endMs === null
    ? `from ${clockText(startMs)} on`
    : `from ${clockText(startMs)} to ${clockText(endMs)}`;
}

/** "EI7QSB on Vertical from 2026-11-30 18:05:00Z to 2026-11-30 18:10:00Z" */
export function dwellText(dwell: DwellRecord, names: LogNames): string {
  return `${names.receiver(dwell.receiverId)} on ${names.antenna(dwell.antennaId)} ${spanText(dwell.startMs, dwell.endMs)}`;
}

export function overlapSentence(dwell: DwellRecord, inTheWay: DwellRecord, names: LogNames): string {
  if (dwell.endMs === null && inTheWay.startMs > dwell.startMs) {
    return (
      `Only the newest dwell of a receiver can stay open: give ${dwellText(dwell, names)} an end, ` +
      `because the log has ${dwellText(inTheWay, names)}.`
    );
  }
  return (
    `Two antennas at once cannot be: ${dwellText(dwell, names)} would overlap ` +
    `${dwellText(inTheWay, names)}. Shorten or delete one of them.`
  );
}

/** One sentence about a whole batch of changes. */
export function batchSummary(steps: readonly DwellStep[], names: LogNames): string {
  const isUndo = steps.some((step) => step.action === 'undo');
  const sentence = isUndo ? manyText(steps, names) : (ownText(steps, names) ?? manyText(steps, names));
  return `${isUndo ? 'Took a change back: ' : ''}${sentence}.`;
}

/** A switch is stored as the closing of one dwell and the adding of an open one at the same moment. */
export function isSwitch(steps: readonly DwellStep[]): boolean {
  const added = steps.find((step) => step.action === 'add')?.after;
  const closed = steps.find((step) => step.action === 'close')?.after;
  return (
    steps.length === 2 &&
    added?.endMs === null &&
    closed?.receiverId === added.receiverId &&
    closed.endMs === added.startMs
  );
}

/** The sentence of a batch that is one thing to a person; null for a batch of several. */
function ownText(steps: readonly DwellStep[], names: LogNames): string | null {
  const [first, second] = steps;
  if (!first) return null;
  if (second) {
    if (steps.length > 2) return null;
    const added = steps.find((step) => step.before === null)?.after;
    const shortened = steps.find((step) => step.before !== null)?.before;
    if (!added || !shortened) return null;
    if (isSwitch(steps)) {
      return `${names.receiver(added.receiverId)} switched from ${names.antenna(shortened.antennaId)} to ${names.antenna(added.antennaId)} at ${clockText(added.startMs)}`;
    }
    if (steps.every((step) => step.action === 'split')) {
      return `Split ${dwellText(shortened, names)} at ${clockText(added.startMs)}: ${names.antenna(added.antennaId)} after it`;
    }
    return null;
  }
  const { before, after } = first;
  if (!before) return after && `Added ${dwellText(after, names)}`;
  if (!after) return `Deleted ${dwellText(before, names)}`;
  if (first.action === 'close' && after.endMs !== null) {
    return `Closed ${names.receiver(after.receiverId)} on ${names.antenna(after.antennaId)} at ${clockText(after.endMs)}`;
  }
  return `Changed ${dwellText(before, names)}: ${differences(before, after, names).join(', ')}`;
}

function differences(before: DwellRecord, after: DwellRecord, names: LogNames): string[] {
  const said: string[] = [];
  if (before.antennaId !== after.antennaId) said.push(`antenna now ${names.antenna(after.antennaId)}`);
  if (before.startMs !== after.startMs) said.push(`start now ${clockText(after.startMs)}`);
  if (before.endMs !== after.endMs)
    said.push(after.endMs === null ? 'now open' : `end now ${clockText(after.endMs)}`);
  if (before.note !== after.note) said.push(after.note === '' ? 'note removed' : 'note changed');
  return said;
}

function manyText(steps: readonly DwellStep[], names: LogNames): string {
  const count = (n: number, word: string) => (n === 0 ? [] : [`${n} ${word}`]);
  const added = steps.filter((step) => !step.before).length;
  const deleted = steps.filter((step) => !step.after).length;
  const parts = [
    ...count(added, 'added'),
    ...count(steps.length - added - deleted, 'changed'),
    ...count(deleted, 'deleted'),
  ];
  const records = steps.flatMap((step) => [step.before, step.after]).filter((record) => record !== null);
  const receivers = [...new Set(records.map((record) => names.receiver(record.receiverId)))].sort();
  const start = Math.min(...records.map((record) => record.startMs));
  const ends = records.map((record) => record.endMs);
  const end = ends.includes(null) ? null : Math.max(...ends.map((ms) => ms ?? 0));
  return `${parts.join(', ')} on ${receivers.join(', ')}, ${spanText(start, end)}`;
}
