import { id } from './common.ts';
import { decodeQuestion, encodeQuestion, openQuestion } from './comparison-url.ts';
import type { AddressQuery, QuestionDraft } from './comparison-url.ts';
import type { LadderQuestion } from './ladder.ts';

/** What the address of a ladder holds: the question, and the two antennas whose card is open. */
export interface LadderAddress {
  question: LadderQuestion;
  /** Antenna ids, the first one's side first. null: none chosen. */
  pair: readonly [number, number] | null;
}

export interface DecodedLadder extends LadderAddress {
  /** One sentence for each part of the address that could not be used, and what stands in its place. */
  problems: string[];
}

/** The question that asks for everything; the server chooses the band. */
export const openLadder: Readonly<LadderQuestion> = Object.freeze({
  bandMetres: null,
  fromNight: null,
  toNight: null,
  sectors: [],
  hours: null,
  kinds: [],
  receivers: [],
  rules: null,
  referenceAntennaId: null,
  marginDb: null,
});

/** Parts that read as they do in the address of a comparison. */
const sharedKeys = ['sectors', 'hours', 'nights', 'receivers', 'kinds', 'rules', 'margin'] as const;
/** Keys of the address, in the order in which they are written. */
export const ladderKeys = ['band', ...sharedKeys, 'reference', 'pair'] as const;
type LadderKey = (typeof ladderKeys)[number];

/** The ladder's question in the shape that the blanks of a comparison edit; the band is its only one. */
export function asComparisonDraft(question: LadderQuestion): QuestionDraft {
  const { bandMetres, fromNight, toNight, sectors, hours, kinds, receivers, rules, marginDb } = question;
  return {
    ...openQuestion,
    bandsMetres: bandMetres === null ? [] : [bandMetres],
    ...{ fromNight, toNight, sectors, hours, kinds, receivers, rules, marginDb },
  };
}

/** What an editor of a comparison's blanks changed, put back into the ladder's question. */
export function withDraft(question: LadderQuestion, draft: QuestionDraft): LadderQuestion {
  const { fromNight, toNight, sectors, hours, kinds, receivers, rules, marginDb } = draft;
  return { ...question, fromNight, toNight, sectors, hours, kinds, receivers, rules, marginDb };
}

/**
 * A ladder as address parts; whatever is at its default is left out. `band=160`, `reference=3` (an antenna),
 * `pair=3,7` (the card that is open); the rest is written as for a comparison.
 */
export function encodeLadder({ question, pair }: LadderAddress): Partial<Record<LadderKey, string>> {
  const { bandMetres, referenceAntennaId } = question;
  const shared = encodeQuestion(asComparisonDraft(question));
  const parts: Partial<Record<LadderKey, string>> = {
    ...(bandMetres === null ? {} : { band: String(bandMetres) }),
    ...Object.fromEntries(
      sharedKeys.flatMap((key) => (shared[key] === undefined ? [] : [[key, shared[key]]])),
    ),
    ...(referenceAntennaId === null ? {} : { reference: String(referenceAntennaId) }),
    ...(pair === null ? {} : { pair: pair.join(',') }),
  };
  return parts;
}

/**
 * Reads a ladder from an address. Never throws: a part that is broken, out of range or unknown falls back to
 * its default, and a sentence says so. Keys in `otherKeys` belong to the page and are left alone.
 */
export function decodeLadder(query: AddressQuery, otherKeys: readonly string[] = []): DecodedLadder {
  const own: readonly string[] = [...ladderKeys, ...otherKeys];
  const unknown = Object.keys(query).filter((key) => !own.includes(key));
  const shared = Object.fromEntries(
    sharedKeys.flatMap((key) => (query[key] === undefined ? [] : [[key, query[key]]])),
  );
  const { draft, problems: sharedProblems } = decodeQuestion(shared);
  const problems = [
    ...unknown.map((key) => `The address says "${clip(key)}", which means nothing here; it was left out.`),
    ...sharedProblems,
  ];

  function read<T>(
    key: Exclude<LadderKey, (typeof sharedKeys)[number]>,
    parse: (text: string) => T | null,
    wanted: string,
  ): T | null {
    const given = query[key];
    const text = typeof given === 'string' || given == null ? given : given[0];
    if (given != null && typeof given !== 'string' && given.length > 1) {
      problems.push(`The address gives "${key}" more than once; the first one counts.`);
    }
    if (text == null || text === '') return null;
    const value = parse(text);
    if (value === null)
      problems.push(`The address says ${key}=${clip(text)}, which cannot be read: ${wanted}`);
    return value;
  }

  const bandMetres = read(
    'band',
    (text) => (/^[1-9]\d{0,3}$/.test(text) ? Number(text) : null),
    'give one wavelength in metres such as 160. The band with the most units is shown.',
  );
  const referenceAntennaId = read(
    'reference',
    antennaId,
    "give an antenna's number. Values are against the mean.",
  );
  const pair = read('pair', readPair, "give two antennas' numbers such as 3,7. No pair is chosen.");
  return {
    question: withDraft({ ...openLadder, bandMetres, referenceAntennaId }, draft),
    pair,
    problems,
  };
}

/** Whether two questions ask the same. */
export function sameLadder(one: LadderQuestion, other: LadderQuestion): boolean {
  const written = (question: LadderQuestion) => JSON.stringify(encodeLadder({ question, pair: null }));
  return written(one) === written(other);
}

/** Two rungs as a question for the Compare page: the same band, directions, hours, nights and rules. */
export function pairQuestion(
  question: LadderQuestion,
  bandMetres: number | null,
  [antennaA, antennaB]: readonly [number, number],
): QuestionDraft {
  return { ...asComparisonDraft({ ...question, bandMetres }), antennaA, antennaB };
}

function antennaId(text: string): number | null {
  const parsed = /^\d{1,10}$/.test(text) ? id.safeParse(Number(text)) : null;
  return parsed?.success ? parsed.data : null;
}

function readPair(text: string): readonly [number, number] | null {
  const [first, second, ...more] = text.split(',').map(antennaId);
  if (first == null || second == null || first === second || more.length > 0) return null;
  return [first, second];
}

function clip(text: string): string {
  return text.length > 40 ? `${text.slice(0, 40)}...` : text;
}
