import type { Dwell, DwellChange } from '../../../shared/contracts/dwell.ts';
import { parseUtc, utcText } from './utc-text.ts';

/** A dwell as it stands in the fields of the correction panel. */
export interface DwellDraft {
  antennaId: number;
  startsText: string;
  endsText: string;
  stillOn: boolean;
  note: string;
}

export type DraftField = 'antennaId' | 'startsAt' | 'endsAt' | 'note' | 'at';
export type FieldErrors = Partial<Record<DraftField, string>>;

const wantedTime = 'Give a UTC time such as 2026-11-30 18:05:00.';

export function draftOf(dwell: Pick<Dwell, 'antennaId' | 'startsAt' | 'endsAt' | 'note'>): DwellDraft {
  return {
    antennaId: dwell.antennaId,
    startsText: utcText(Date.parse(dwell.startsAt)),
    endsText: dwell.endsAt === null ? '' : utcText(Date.parse(dwell.endsAt)),
    stillOn: dwell.endsAt === null,
    note: dwell.note,
  };
}

interface ReadDraft {
  startsAt: string;
  endsAt: string | null;
}

/**
 * The times of a draft as instants. A text that still says what the stored dwell says keeps the stored instant: the
 * field shows whole seconds only, and saving must not cut the rest off.
 */
function readTimes(
  draft: DwellDraft,
  stored: { startsAt: string; endsAt: string | null } | null,
  nearMs: number,
): { times: ReadDraft } | { errors: FieldErrors } {
  const errors: FieldErrors = {};
  const read = (text: string, storedAt: string | null | undefined, field: 'startsAt' | 'endsAt') => {
    if (storedAt && text.trim() === utcText(Date.parse(storedAt))) return storedAt;
    const timeMs = parseUtc(text, storedAt ? Date.parse(storedAt) : nearMs);
    if (timeMs === null) errors[field] = wantedTime;
    return timeMs === null ? '' : new Date(timeMs).toISOString();
  };
  const startsAt = read(draft.startsText, stored?.startsAt, 'startsAt');
  const endsAt = draft.stillOn ? null : read(draft.endsText, stored?.endsAt, 'endsAt');
  if (!errors.startsAt && !errors.endsAt && endsAt !== null && Date.parse(endsAt) <= Date.parse(startsAt)) {
    errors.endsAt = 'The end must come after the start.';
  }
  return Object.keys(errors).length > 0 ? { errors } : { times: { startsAt, endsAt } };
}

export type Proposal = { change: DwellChange } | { errors: FieldErrors };

/** The edit that a draft means, naming only what differs; no change at all is said beside the first field. */
export function editOf(dwell: Dwell, draft: DwellDraft): Proposal {
  const read = readTimes(draft, dwell, Date.parse(dwell.startsAt));
  if ('errors' in read) return read;
  const { startsAt, endsAt } = read.times;
  const note = draft.note.trim();
  const differs = {
    ...(draft.antennaId === dwell.antennaId ? {} : { antennaId: draft.antennaId }),
    ...(startsAt === dwell.startsAt ? {} : { startsAt }),
    ...(endsAt === dwell.endsAt ? {} : { endsAt }),
    ...(note === dwell.note ? {} : { note }),
  };
  if (Object.keys(differs).length === 0) {
    return { errors: { antennaId: 'Nothing is changed yet: change the antenna, a time or the note.' } };
  }
  return { change: { action: 'edit', dwellId: dwell.id, ...differs } };
}

export function additionOf(receiverId: number, draft: DwellDraft, nearMs: number): Proposal {
  const read = readTimes(draft, null, nearMs);
  if ('errors' in read) return read;
  const { antennaId } = draft;
  return {
    change: { action: 'add', dwell: { receiverId, antennaId, ...read.times, note: draft.note.trim() } },
  };
}

/** Cuts a dwell in two; the text names the time of the cut. */
export function splitOf(dwell: Dwell, atText: string, laterAntennaId: number): Proposal {
  const timeMs = parseUtc(atText, middleOf(dwell));
  if (timeMs === null) return { errors: { at: wantedTime } };
  const at = new Date(timeMs).toISOString();
  return { change: { action: 'split', dwellId: dwell.id, at, antennaId: laterAntennaId } };
}

function middleOf(dwell: Dwell): number {
  const startMs = Date.parse(dwell.startsAt);
  return dwell.endsAt === null ? startMs : (startMs + Date.parse(dwell.endsAt)) / 2;
}

/**
 * The server's sentences by the field that they stand beside. A sentence about a change as a whole (an overlap)
 * goes to the time that was moved: the end when only that was, else the start; a split's to its time.
 */
export function errorsByField(
  errors: readonly { path: string; message: string }[],
  change: DwellChange,
): FieldErrors {
  const byField: FieldErrors = {};
  for (const { path, message } of errors) {
    const field = path
      .replace(/^body\./, '')
      .replace(/^changes\.\d+\.?/, '')
      .replace(/^dwell\./, '');
    byField[isField(field) ? field : fieldOfWhole(change)] ??= message;
  }
  return byField;
}

function isField(name: string): name is DraftField {
  return ['antennaId', 'startsAt', 'endsAt', 'note', 'at'].includes(name);
}

function fieldOfWhole(change: DwellChange): DraftField {
  if (change.action === 'split' || change.action === 'close') return 'at';
  if (change.action !== 'edit') return 'startsAt';
  return change.endsAt !== undefined && change.startsAt === undefined ? 'endsAt' : 'startsAt';
}
