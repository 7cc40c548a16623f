import type { HourMark, HourRange, PairingRulesInput } from './comparison.ts';
import type { QuestionDraft } from './comparison-url.ts';

/** What the sentence needs to know of the station. */
export interface QuestionNames {
  /** Name of an antenna; say "antenna 12" for one that is not known any more. */
  antenna: (antennaId: number) => string;
  receiver: (receiverId: number) => string;
  sectorCount: number;
}

/** The parts of the sentence that can be changed. */
export const questionBlanks = ['antennaA', 'antennaB', 'bands', 'sectors', 'hours', 'nights'] as const;
export type QuestionBlank = (typeof questionBlanks)[number];

export interface QuestionPhrase {
  blank: QuestionBlank;
  /** Words in front of the blank: "toward". */
  lead: string;
  /** The blank's own words: "0-60 degrees". */
  text: string;
}

/**
 * The question in the order in which it is said, one phrase a blank:
 * Does [North-east wire] hear better than [Vertical] on [160 m] toward [0-60 degrees] from
 * [2 h after sunset to sunrise] between [1 and 30 November 2026]?
 */
export function questionPhrases(question: QuestionDraft, names: QuestionNames): QuestionPhrase[] {
  const antenna = (antennaId: number | null) =>
    antennaId === null ? 'which antenna' : names.antenna(antennaId);
  return [
    { blank: 'antennaA', lead: 'Does', text: antenna(question.antennaA) },
    { blank: 'antennaB', lead: 'hear better than', text: antenna(question.antennaB) },
    { blank: 'bands', lead: 'on', text: bandsText(question.bandsMetres) },
    { blank: 'sectors', lead: 'toward', text: sectorsText(question.sectors, names.sectorCount) },
    question.hours === null
      ? { blank: 'hours', lead: 'at', text: 'any hour' }
      : { blank: 'hours', lead: 'from', text: hoursText(question.hours) },
    nightsPhrase(question.fromNight, question.toNight),
  ];
}

/** The question as one sentence; it heads the screen and every export. */
export function questionSentence(question: QuestionDraft, names: QuestionNames): string {
  const words = questionPhrases(question, names).map(({ lead, text }) => `${lead} ${text}`);
  return `${words.join(' ')}?`;
}

export interface QuestionTerm {
  term: string;
  text: string;
}

/** The second line: receivers, kinds and rules, in words. What is null asks for the station's own value. */
export function questionTerms(
  question: QuestionDraft,
  names: QuestionNames,
  standing: { rules: PairingRulesInput; marginDb: number },
): QuestionTerm[] {
  const rules = question.rules ?? standing.rules;
  const own = question.rules === null ? ', the rules of the station' : '';
  return [
    {
      term: 'Receivers',
      text: question.receivers.length === 0 ? 'all' : question.receivers.map(names.receiver).join(', '),
    },
    {
      term: 'Kinds of unit',
      text: question.kinds.length === 1 ? `${question.kinds[0]} only` : 'simultaneous and alternating',
    },
    { term: 'Rules', text: rulesText(rules) + own },
    { term: 'Margin', text: `${question.marginDb ?? standing.marginDb}\u2009dB` },
    {
      term: 'Zeros',
      text: question.zeros === 'pratt' ? "kept while ranking (Pratt's rule)" : 'dropped before ranking',
    },
    {
      term: 'Independent',
      text: question.clustering === 'two-way' ? 'stations and nights (two-way)' : 'station-nights',
    },
  ];
}

export function rulesText(rules: PairingRulesInput): string {
  return (
    `blocks of ${rules.blockMinutes}\u2009min, window ${rules.windowSeconds}\u2009s, ` +
    `tolerance ${rules.freqToleranceKhz}\u2009kHz, guard ${rules.guardSeconds}\u2009s`
  );
}

/** "160 and 80 m"; an empty list means every band. */
export function bandsText(bandsMetres: readonly number[]): string {
  return bandsMetres.length === 0 ? 'every band' : `${enumerate(bandsMetres.map(String))}\u2009m`;
}

/** "0-60 and 180-210 degrees", neighbours joined, also across north; an empty list means every direction. */
export function sectorsText(sectors: readonly number[], sectorCount: number): string {
  const chosen = new Set(sectors.filter((sector) => sector < sectorCount));
  if (sectors.length === 0) return 'every direction';
  if (chosen.size === 0) return 'no direction that the station has';
  if (chosen.size === sectorCount) return '0-360 degrees';
  const widthDeg = 360 / sectorCount;
  const runs: string[] = [];
  for (let first = 0; first < sectorCount; first += 1) {
    const before = (first + sectorCount - 1) % sectorCount;
    if (!chosen.has(first) || chosen.has(before)) continue;
    let length = 1;
    while (chosen.has((first + length) % sectorCount)) length += 1;
    const end = first + length;
    const endDeg = (end > sectorCount ? end - sectorCount : end) * widthDeg;
    runs.push(`${first * widthDeg}-${endDeg}`);
  }
  return `${enumerate(runs)} degrees`;
}

/** "2 h after sunset to sunrise", "22:00 to 04:00 UTC". */
export function hoursText({ from, to }: HourRange): string {
  return from.reference === 'utc' && to.reference === 'utc'
    ? `${clock(from.hours)} to ${clock(to.hours)} UTC`
    : `${hourMarkText(from)} to ${hourMarkText(to)}`;
}

/** "2 h after sunset", "sunrise", "22:00 UTC". */
export function hourMarkText({ reference, hours }: HourMark): string {
  if (reference === 'utc') return `${clock(hours)} UTC`;
  const minutes = Math.round(Math.abs(hours) * 60);
  if (minutes === 0) return reference;
  const span = [
    minutes >= 60 ? `${Math.floor(minutes / 60)}\u2009h` : '',
    minutes % 60 > 0 ? `${minutes % 60}\u2009min` : '',
  ];
  return `${span.filter((part) => part !== '').join(' ')} ${hours > 0 ? 'after' : 'before'} ${reference}`;
}

function nightsPhrase(fromNight: string | null, toNight: string | null): QuestionPhrase {
  const blank = 'nights';
  if (fromNight === null && toNight === null) return { blank, lead: 'over', text: 'all nights' };
  if (toNight === null) return { blank, lead: 'since', text: dateText(fromNight!) };
  if (fromNight === null) return { blank, lead: 'up to', text: dateText(toNight) };
  if (fromNight === toNight) return { blank, lead: 'in the night of', text: dateText(toNight) };
  const sameYear = fromNight.slice(0, 4) === toNight.slice(0, 4);
  const sameMonth = sameYear && fromNight.slice(5, 7) === toNight.slice(5, 7);
  const start = dateText(fromNight).split(' ');
  const shown = sameMonth ? start.slice(0, 1) : sameYear ? start.slice(0, 2) : start;
  return { blank, lead: 'between', text: `${shown.join(' ')} and ${dateText(toNight)}` };
}

const months = [
  ['January', 'February', 'March', 'April', 'May', 'June'],
  ['July', 'August', 'September', 'October', 'November', 'December'],
].flat();

/** "1 November 2026" from "2026-11-01". */
export function dateText(day: string): string {
  const [year, month, date] = day.split('-').map(Number);
  return `${date} ${months[month! - 1]} ${year}`;
}

function clock(hours: number): string {
  const minutes = ((Math.round(hours * 60) % 1440) + 1440) % 1440;
  return `${String(Math.floor(minutes / 60)).padStart(2, '0')}:${String(minutes % 60).padStart(2, '0')}`;
}

/** "1", "1 and 2", "1, 2 and 3". */
export function enumerate(items: readonly string[]): string {
  return items.length < 2
    ? (items[0] ?? '')
    : `${items.slice(0, -1).join(', ')} and ${items[items.length - 1]}`;
}
