import { comparisonQuestion, hourMark, pairingRules, unitKind } from './comparison.ts';
import type { ComparisonQuestion, HourMark, HourRange, PairingRulesInput } from './comparison.ts';
import { day, id } from './common.ts';

/** A question whose antennas may still have to be chosen. */
export type QuestionDraft = Omit<ComparisonQuestion, 'antennaA' | 'antennaB'> & {
  antennaA: number | null;
  antennaB: number | null;
};

/** What a router hands over: a key may be absent, empty, or given twice. */
export type AddressQuery = Readonly<Record<string, string | null | undefined | readonly (string | null)[]>>;

export interface DecodedQuestion {
  draft: QuestionDraft;
  /** One sentence for each part of the address that could not be used, and what stands in its place. */
  problems: string[];
}

/** The question that asks for everything, with no antennas chosen. */
export const openQuestion: Readonly<QuestionDraft> = Object.freeze({
  antennaA: null,
  antennaB: null,
  fromNight: null,
  toNight: null,
  bandsMetres: [],
  hours: null,
  sectors: [],
  receivers: [],
  kinds: [],
  rules: null,
  marginDb: null,
  zeros: 'drop',
  clustering: 'one-way',
  hourBasis: 'utc',
});

/** Keys of the address, in the order in which they are written. */
export const questionKeys = [
  'a',
  'b',
  'bands',
  'sectors',
  'hours',
  'nights',
  'receivers',
  'kinds',
  'rules',
  'margin',
  'zeros',
  'clusters',
  'basis',
] as const;
type QuestionKey = (typeof questionKeys)[number];

/**
 * A question as address parts; whatever is at its default is left out.
 *
 * `nights=2026-11-01..2026-11-30` (either end may be missing), `hours=sunset2..sunrise0` (hours by the
 * UTC clock or after sunset or sunrise), `rules=15,30,0.3,20` (block in minutes, window in seconds,
 * frequency tolerance in kHz, guard in seconds); lists are separated by commas.
 */
export function encodeQuestion(question: QuestionDraft): Partial<Record<QuestionKey, string>> {
  const { rules } = question;
  const parts: Record<QuestionKey, string> = {
    a: question.antennaA === null ? '' : String(question.antennaA),
    b: question.antennaB === null ? '' : String(question.antennaB),
    bands: question.bandsMetres.join(','),
    sectors: question.sectors.join(','),
    hours:
      question.hours === null ? '' : `${writeMark(question.hours.from)}..${writeMark(question.hours.to)}`,
    nights:
      question.fromNight === null && question.toNight === null
        ? ''
        : `${question.fromNight ?? ''}..${question.toNight ?? ''}`,
    receivers: question.receivers.join(','),
    kinds: question.kinds.join(','),
    rules:
      rules === null
        ? ''
        : [rules.blockMinutes, rules.windowSeconds, rules.freqToleranceKhz, rules.guardSeconds].join(','),
    margin: question.marginDb === null ? '' : String(question.marginDb),
    zeros: question.zeros === 'drop' ? '' : question.zeros,
    clusters: question.clustering === 'one-way' ? '' : question.clustering,
    basis: question.hourBasis === 'utc' ? '' : question.hourBasis,
  };
  return Object.fromEntries(questionKeys.filter((key) => parts[key] !== '').map((key) => [key, parts[key]]));
}

/**
 * Reads a question from an address. Never throws: a part that is broken, out of range or unknown falls
 * back to its default, and a sentence says so. Keys in `otherKeys` belong to the page and are left alone.
 */
export function decodeQuestion(query: AddressQuery, otherKeys: readonly string[] = []): DecodedQuestion {
  const problems: string[] = [];
  const known: readonly string[] = [...questionKeys, ...otherKeys];
  for (const key of Object.keys(query)) {
    if (!known.includes(key)) {
      problems.push(`The address says "${clip(key)}", which means nothing here; it was left out.`);
    }
  }

  /** The reading of one key, or its default with a sentence that says what was expected. */
  function read<T>(
    key: QuestionKey,
    parse: (text: string) => T | undefined,
    fallback: T,
    wanted: string,
    instead: string,
  ): T {
    const given = query[key];
    const text = typeof given === 'string' || given == null ? given : given[0];
    if (given != null && typeof given !== 'string' && given.length > 1) {
      problems.push(`The address gives "${key}" more than once; the first one counts.`);
    }
    if (text == null || text === '') return fallback;
    const value = parse(text);
    if (value !== undefined) return value;
    problems.push(`The address says ${key}=${clip(text)}, which cannot be read: ${wanted}. ${instead}`);
    return fallback;
  }

  const shape = comparisonQuestion.shape;
  const antenna = (key: 'a' | 'b') =>
    read<number | null>(
      key,
      (text) => within(id, wholeNumber(text)),
      null,
      "give an antenna's number",
      'Choose an antenna.',
    );
  const numbers = (limits: { safeParse: (value: unknown) => { success: boolean } }, smallest: number) =>
    function parse(text: string): number[] | undefined {
      const list = [...new Set(text.split(',').map(wholeNumber))];
      const good = list.filter((value) => value !== undefined && value >= smallest);
      return good.length === list.length && limits.safeParse(good).success ? (good as number[]) : undefined;
    };

  const draft: QuestionDraft = {
    antennaA: antenna('a'),
    antennaB: antenna('b'),
    bandsMetres: read(
      'bands',
      numbers(shape.bandsMetres, 1),
      [],
      'give wavelengths in metres such as 160,80',
      'All bands are shown.',
    ),
    sectors: read(
      'sectors',
      numbers(shape.sectors, 0),
      [],
      'give sector numbers from 0 such as 0,1',
      'All directions are shown.',
    ),
    hours: read<HourRange | null>(
      'hours',
      readHours,
      null,
      'give hours such as utc22..utc4 or sunset2..sunrise0',
      'All hours are shown.',
    ),
    ...read<Pick<QuestionDraft, 'fromNight' | 'toNight'>>(
      'nights',
      readNights,
      { fromNight: null, toNight: null },
      'give nights such as 2026-11-01..2026-11-30, the earlier first',
      'All nights are shown.',
    ),
    receivers: read(
      'receivers',
      numbers(shape.receivers, 1),
      [],
      "give receivers' numbers such as 1,2",
      'All receivers are shown.',
    ),
    kinds: read<ComparisonQuestion['kinds']>(
      'kinds',
      (text) => within(unitKind.array(), [...new Set(text.split(','))]),
      [],
      'give simultaneous, alternating or both',
      'Both kinds are shown.',
    ),
    rules: read<PairingRulesInput | null>(
      'rules',
      readRules,
      null,
      'give block minutes, window seconds, tolerance in kHz and guard seconds such as 15,30,0.3,20',
      "The station's own rules apply.",
    ),
    marginDb: read<number | null>(
      'margin',
      (text) => within(shape.marginDb, decimal(text)) ?? undefined,
      null,
      'give decibels from 0.1 to 20',
      "The station's own margin applies.",
    ),
    zeros: read<ComparisonQuestion['zeros']>(
      'zeros',
      (text) => within(shape.zeros.unwrap(), text),
      'drop',
      'give pratt or drop',
      'Zeros are dropped before ranking.',
    ),
    clustering: read<ComparisonQuestion['clustering']>(
      'clusters',
      (text) => within(shape.clustering.unwrap(), text),
      'one-way',
      'give one-way or two-way',
      'Station-nights are taken as independent.',
    ),
    hourBasis: read<ComparisonQuestion['hourBasis']>(
      'basis',
      (text) => within(shape.hourBasis.unwrap(), text),
      'utc',
      'give utc, sunset or sunrise',
      'The map counts UTC hours.',
    ),
  };
  if (draft.antennaA !== null && draft.antennaA === draft.antennaB) {
    draft.antennaB = null;
    problems.push('The address compares an antenna with itself: choose another one.');
  }
  return { draft, problems };
}

/** The draft as a question that can be asked; null while an antenna is missing. */
export function completeQuestion(draft: QuestionDraft): ComparisonQuestion | null {
  const { antennaA, antennaB } = draft;
  return antennaA === null || antennaB === null || antennaA === antennaB
    ? null
    : { ...draft, antennaA, antennaB };
}

/** Whether two drafts ask the same thing. */
export function sameQuestion(one: QuestionDraft, other: QuestionDraft): boolean {
  return JSON.stringify(encodeQuestion(one)) === JSON.stringify(encodeQuestion(other));
}

interface Limits<T> {
  safeParse: (value: unknown) => { success: true; data: T } | { success: false };
}

function within<T>(limits: Limits<T>, value: unknown): T | undefined {
  if (value === undefined) return undefined;
  const parsed = limits.safeParse(value);
  return parsed.success ? parsed.data : undefined;
}

function wholeNumber(text: string): number | undefined {
  return /^\d{1,10}$/.test(text) ? Number(text) : undefined;
}

/** Plain or with an exponent, as numbers are written by `String`. */
function decimal(text: string): number | undefined {
  return /^-?\d{1,20}(\.\d{1,25})?(e[+-]?\d{1,3})?$/.test(text) ? Number(text) : undefined;
}

function writeMark(mark: HourMark): string {
  return `${mark.reference}${mark.hours}`;
}

function readMark(text: string): HourMark | undefined {
  const [, reference, hours] = /^(utc|sunset|sunrise)(.+)$/.exec(text) ?? [];
  return hours === undefined ? undefined : within(hourMark, { reference, hours: decimal(hours) });
}

function readHours(text: string): HourRange | undefined {
  const [fromText, toText, ...more] = text.split('..');
  if (fromText === undefined || toText === undefined || more.length > 0) return undefined;
  const from = readMark(fromText);
  const to = readMark(toText);
  return from === undefined || to === undefined ? undefined : { from, to };
}

function readNights(text: string): Pick<QuestionDraft, 'fromNight' | 'toNight'> | undefined {
  const [fromText, toText, ...more] = text.split('..');
  if (fromText === undefined || toText === undefined || more.length > 0) return undefined;
  const fromNight = fromText === '' ? null : within(day, fromText);
  const toNight = toText === '' ? null : within(day, toText);
  if (fromNight === undefined || toNight === undefined) return undefined;
  if (fromNight !== null && toNight !== null && fromNight > toNight) return undefined;
  return { fromNight, toNight };
}

function readRules(text: string): PairingRulesInput | undefined {
  const [blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds, ...more] = text.split(',').map(decimal);
  if (more.length > 0) return undefined;
  return within(pairingRules, { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds });
}

function clip(text: string): string {
  return text.length > 40 ? `${text.slice(0, 40)}...` : text;
}
