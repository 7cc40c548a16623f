import type {
  DwellMapping,
  ImportKind,
  ImportMapping,
  SpotMapping,
  TimeFormat,
} from '../contracts/import.ts';
import { spotMode } from '../contracts/spot.ts';
import { bandOfKhz } from '../radio/bands.ts';
import { parseCallSign } from '../radio/call-sign.ts';
import { isRefusal } from '../radio/place.ts';
import { guessFormat, type GuessedFormat } from './guess-format.ts';
import { guessClockFormat, guessTimeFormat, saysMinutesOnly } from './guess-time.ts';
import { bareReceiverCall, type ReadingContext } from './reading.ts';

type SpotColumn = keyof SpotMapping['columns'];
type DwellColumn = keyof DwellMapping['columns'];

/** Words that name a column, most telling first; a header counts when it holds one as a word of its own. */
const spotWords: Readonly<Record<SpotColumn, readonly string[]>> = {
  time: ['utc', 'datetime', 'timestamp', 'heard at', 'time', 'clock', 'epoch'],
  date: ['date', 'day'],
  receiver: ['receiver', 'rx', 'skimmer', 'spotter', 'de', 'reporter', 'rx call'],
  call: ['call', 'callsign', 'call sign', 'dx', 'station', 'heard', 'tx'],
  freq: ['khz', 'mhz', 'freq', 'frequency', 'qrg', 'hz'],
  snr: ['snr', 'db', 'snr db', 'report', 's/n'],
  mode: ['mode'],
  speed: ['wpm', 'speed', 'bps'],
};
const dwellWords: Readonly<Record<DwellColumn, readonly string[]>> = {
  receiver: ['receiver', 'rx', 'skimmer', 'radio'],
  antenna: ['antenna', 'ant', 'aerial'],
  startsAt: [
    'start',
    'starts',
    'starts at',
    'from',
    'begin',
    'begins',
    'on',
    'utc',
    'time',
    'timestamp',
    'datetime',
  ],
  endsAt: ['end', 'ends', 'ends at', 'to', 'until', 'till', 'off'],
  note: ['note', 'notes', 'comment', 'remark', 'remarks'],
};

/** Guesses how a file is to be read, by its header's words and by what its columns hold. */
export function guessMapping(start: Buffer, kind: ImportKind, context: ReadingContext): ImportMapping {
  const guessed = guessFormat(start);
  return kind === 'spots' ? guessSpotMapping(guessed, context) : guessDwellMapping(guessed, context);
}

function guessSpotMapping(guessed: GuessedFormat, context: ReadingContext): SpotMapping {
  const base: SpotMapping = {
    kind: 'spots',
    layout: guessed.layout,
    format: guessed.format,
    time: { kind: 'iso', zone: 'UTC' },
    columns: {},
    freqUnit: 'kHz',
    receiverNames: {},
    otherReceivers: 'refuse',
    timeKnownTo: 'second',
  };
  if (guessed.layout === 'spot lines') return { ...base, timeKnownTo: 'minute' };
  const at = byHeader(guessed.header, spotWords);
  const cells = (column: SpotColumn) => (at[column] === undefined ? [] : columnOf(guessed, at[column]!));
  const width = guessed.rows[0]?.length ?? 0;
  const free = () => range(width).filter((i) => !Object.values(at).includes(i));

  const unit = guessFreqUnit(guessed, at, free());
  const time = guessSpotTime(guessed, at, free, context.nowMs);
  if (at.receiver === undefined) {
    const known = new Set(context.receivers.map(({ callSign }) => callSign));
    at.receiver = free().find((i) =>
      mostly(columnOf(guessed, i), (text) => known.has(bareReceiverCall(text))),
    );
  }
  at.call ??= free().find((i) => mostly(columnOf(guessed, i), (text) => !isRefusal(parseCallSign(text))));
  at.mode ??= free().find((i) => mostly(columnOf(guessed, i), isMode));
  at.snr ??= free().find((i) =>
    mostly(columnOf(guessed, i), (text) => /^[+-]?\d{1,2}(?: ?dB)?$/i.test(text.trim())),
  );

  const only = context.receivers.length === 1 ? context.receivers[0] : undefined;
  return {
    ...base,
    format: {
      ...guessed.format,
      decimalComma: mostly(cells('freq'), (text) => /^\d+,\d+$/.test(text.trim())),
    },
    time: time.format,
    columns: named(at, guessed.header),
    freqUnit: unit,
    timeKnownTo: time.minutesOnly ? 'minute' : 'second',
    ...(at.receiver === undefined && only !== undefined ? { fixedReceiverId: only.id } : {}),
  };
}

function guessDwellMapping(guessed: GuessedFormat, context: ReadingContext): DwellMapping {
  const at = byHeader(guessed.header, dwellWords);
  const width = guessed.rows[0]?.length ?? 0;
  const free = () => range(width).filter((i) => !Object.values(at).includes(i));
  const isTime = (i: number) => guessTimeFormat(columnOf(guessed, i), context.nowMs) !== null;
  at.startsAt ??= free().find(isTime);
  at.endsAt ??= free().find(isTime);
  const receivers = new Set(context.receivers.map(({ callSign }) => callSign));
  const isCall = (text: string) => receivers.has(bareReceiverCall(text)) || !isRefusal(parseCallSign(text));
  at.receiver ??= free().find((i) => mostly(columnOf(guessed, i), isCall));
  const antennas = new Set(context.antennas.map(({ name }) => name.toLowerCase()));
  at.antenna ??= free().find((i) =>
    mostly(columnOf(guessed, i), (text) => antennas.has(text.trim().toLowerCase())),
  );
  at.antenna ??= free()[0] ?? 0;
  at.startsAt ??= free()[0] ?? 0;
  const columns = named(at, guessed.header);
  return {
    kind: 'dwells',
    layout: 'table',
    format: guessed.format,
    time: guessTimeFormat(columnOf(guessed, at.startsAt), context.nowMs) ?? { kind: 'iso', zone: 'UTC' },
    columns: { ...columns, antenna: columns.antenna!, startsAt: columns.startsAt! },
    receiverNames: {},
    antennaNames: {},
    unknownNames: 'refuse',
  };
}

type Places<Column extends string> = Partial<Record<Column, number | undefined>>;

/** Each header goes to the column whose words tell most of it; none to two. */
function byHeader<Column extends string>(
  header: readonly string[] | null,
  words: Readonly<Record<Column, readonly string[]>>,
): Places<Column> {
  const scored: { column: Column; index: number; score: number }[] = [];
  for (const [index, text] of (header ?? []).entries()) {
    const plain = text
      .trim()
      .toLowerCase()
      .replace(/[^a-z0-9/]+/g, ' ')
      .trim();
    for (const [column, list] of Object.entries(words) as [Column, readonly string[]][]) {
      const rank = list.findIndex((word) => plain === word);
      const inside = list.findIndex((word) => ` ${plain} `.includes(` ${word} `));
      if (rank >= 0) scored.push({ column, index, score: 100 - rank });
      else if (inside >= 0) scored.push({ column, index, score: 50 - inside });
    }
  }
  const places: Places<Column> = {};
  const taken = new Set<number>();
  for (const { column, index } of scored.sort((a, b) => b.score - a.score || a.index - b.index)) {
    if (places[column] !== undefined || taken.has(index)) continue;
    places[column] = index;
    taken.add(index);
  }
  return places;
}

/** Where the times stand and how they are written: in one column, or date and clock in two. */
function guessSpotTime(
  guessed: GuessedFormat,
  at: Places<SpotColumn>,
  free: () => number[],
  nowMs: number,
): { format: TimeFormat; minutesOnly: boolean } {
  const found = (texts: string[], format: TimeFormat) => ({
    format,
    minutesOnly: saysMinutesOnly(texts, format),
  });
  if (at.time !== undefined && at.date !== undefined) {
    const [dates, clocks] = [columnOf(guessed, at.date), columnOf(guessed, at.time)];
    const joined = dates.map((date, i) => `${date.trim()} ${clocks[i]!.trim()}`);
    const format = guessTimeFormat(joined, nowMs);
    if (format !== null) return found(joined, format);
    at.date = undefined;
  }
  for (const place of [at.time, at.date, ...free()]) {
    if (place === undefined) continue;
    const texts = columnOf(guessed, place);
    const format = guessTimeFormat(texts, nowMs);
    if (format === null) continue;
    at.time = place;
    at.date = undefined;
    return found(texts, format);
  }
  const clocks = at.time === undefined ? [] : columnOf(guessed, at.time);
  const format = guessClockFormat(clocks);
  return format === null
    ? { format: { kind: 'iso', zone: 'UTC' }, minutesOnly: false }
    : found(clocks, format);
}

const unitFactors = [
  ['kHz', 1],
  ['MHz', 1000],
  ['Hz', 0.001],
] as const;

/** Finds the frequency column where the header does not tell it; the unit is the one that gives bands. */
function guessFreqUnit(
  guessed: GuessedFormat,
  at: Places<SpotColumn>,
  free: number[],
): SpotMapping['freqUnit'] {
  for (const place of at.freq === undefined ? free : [at.freq]) {
    for (const [unit, factor] of unitFactors) {
      const isInBand = (text: string) => bandOfKhz(Number(text.trim().replace(',', '.')) * factor) !== null;
      if (!mostly(columnOf(guessed, place), isInBand)) continue;
      at.freq = place;
      return unit;
    }
  }
  return 'kHz';
}

function isMode(text: string): boolean {
  const upper = text.trim().toUpperCase();
  return spotMode.options.some((name) => name !== 'other' && name === upper);
}

function columnOf(guessed: GuessedFormat, index: number): string[] {
  return guessed.rows.map((cells) => cells[index] ?? '');
}

function mostly(texts: readonly string[], is: (text: string) => boolean): boolean {
  const filled = texts.filter((text) => text.trim() !== '');
  return filled.length > 0 && filled.filter(is).length >= filled.length * 0.8;
}

function range(length: number): number[] {
  return Array.from({ length }, (_, i) => i);
}

/** As a mapping names columns: by the header's own words, unless two are alike, else by number. */
function named<Column extends string>(
  at: Places<Column>,
  header: readonly string[] | null,
): Partial<Record<Column, string | number>> {
  const columns: Partial<Record<Column, string | number>> = {};
  const names = header?.map((text) => text.trim());
  for (const [column, index] of Object.entries(at) as [Column, number | undefined][]) {
    if (index === undefined) continue;
    const name = names?.[index] ?? '';
    columns[column] = name !== '' && name.length <= 200 && names!.indexOf(name) === index ? name : index + 1;
  }
  return columns;
}
