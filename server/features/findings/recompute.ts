import { answerComparison } from '../../../shared/comparison/index.ts';
import type { ComparisonInput, ComparisonResult } from '../../../shared/comparison/index.ts';
import type { ComparisonAnswer, PairingRulesInput } from '../../../shared/contracts/comparison.ts';
import type { Recomputation } from '../../../shared/contracts/finding.ts';
import type { ImportEvent } from './circumstances.read-model.ts';
import { digestOf } from './digest.ts';
import { dwellChanges } from './dwell-changes.ts';
import type { DwellAuthor } from './dwell-changes.ts';
import { canonical } from './evidence.ts';
import type { FrozenDwell } from './evidence.ts';
import { unpackEvidence } from './evidence-codec.ts';
import { nightChanges } from './night-changes.ts';
import { changedParts } from './number-changes.ts';
import { changesInWords, headSentence } from './recompute-wording.ts';

export interface StationFacts {
  locator: string;
  latitudeDeg: number;
  longitudeDeg: number;
  rules: PairingRulesInput;
  marginDb: number;
  sectorCount: number;
}

export interface RecomputeInput {
  /** The evidence of the finding, as packed by evidence-codec.ts. */
  packed: Uint8Array;
  then: {
    answer: ComparisonAnswer;
    digest: string;
    programVersion: string;
    locator: string;
    nights: number;
  };
  now: {
    /** Today's data for the frozen nights, under the frozen rules. */
    input: ComparisonInput;
    dwells: FrozenDwell[];
    authors: DwellAuthor[];
    imports: ImportEvent[];
    station: StationFacts;
    programVersion: string;
    nightsWaiting: number;
  };
  checkedAt: string;
}

/** Lists in a reply end here; their counts are whole. */
const longestList = 200;

/**
 * Asks the frozen question of today's data and holds it against the frozen answer. What the program makes of
 * the frozen units today stands between the two, so that a change of the program is told from a change of the
 * data. Pure.
 */
export function recomputeAnswer(given: RecomputeInput): Recomputation {
  const { then, now } = given;
  const frozen = unpackEvidence(given.packed);
  const today = canonical(underFrozenNames(frozen.input, now.input));
  const answerNow = answerComparison(today);
  const frozenUnitsNow = answerComparison(frozen.input);

  const linesThen = digestOf(frozen.input);
  const linesNow = digestOf(today);
  const unitsSame = linesNow.digest === then.digest;
  const parts = changedParts(then.answer, answerNow);
  const programParts = changedParts(then.answer, frozenUnitsNow);
  const nights = unitsSame ? [] : nightChanges(linesThen.nights, linesNow.nights);
  const { a, b } = frozen.input.antennas;
  const dwells = dwellChanges(frozen.dwells, now.dwells, [a.id, b.id], now.authors);

  const facts = {
    then: then.answer,
    now: answerNow,
    unitsSame,
    recordWhole: linesThen.digest === then.digest,
    parts,
    programParts,
    versions: { then: then.programVersion, now: now.programVersion },
    nights,
    nightCount: then.nights,
    dwells,
    imports: now.imports,
    bearings: bearingChanges(frozen.input, now.input),
    renamed: renamed(frozen.input, now.input),
    position: positionChange(frozen.input, then.locator, now.station),
    frozenRules: {
      rules: frozen.input.rules,
      marginDb: frozen.input.marginDb,
      sectorCount: frozen.input.sectorCount,
    },
    station: now.station,
    nightsWaiting: now.nightsWaiting,
  };
  return {
    same: unitsSame && parts.length === 0 && now.nightsWaiting === 0 && facts.recordWhole,
    sentence: headSentence(facts),
    checkedAt: given.checkedAt,
    units: { same: unitsSame, digestThen: then.digest, digestNow: linesNow.digest },
    program: {
      same: then.programVersion === now.programVersion,
      versionThen: then.programVersion,
      versionNow: now.programVersion,
      sameNumbers: programParts.length === 0,
    },
    then: numbersOf(then.answer),
    now: numbersOf(answerNow),
    frozenUnitsNow: numbersOf(frozenUnitsNow),
    changes: changesInWords(facts),
    nights: nights.slice(0, longestList),
    dwells: dwells.slice(0, longestList),
    truncated: nights.length > longestList || dwells.length > longestList,
  };
}

/** Today's data under the question, margin, sectors and names of the finding: a new name is no new number. */
function underFrozenNames(frozen: ComparisonInput, now: ComparisonInput): ComparisonInput {
  const called = new Map(frozen.receivers.map((receiver) => [receiver.id, receiver.callSign]));
  return {
    ...now,
    question: frozen.question,
    antennas: frozen.antennas,
    marginDb: frozen.marginDb,
    sectorCount: frozen.sectorCount,
    receivers: now.receivers.map(({ id, callSign }) => ({ id, callSign: called.get(id) ?? callSign })),
  };
}

export interface BearingChange {
  call: string;
  thenDeg: number | null;
  nowDeg: number | null;
}

/** Calls of both sets of data whose bearing, or its certainty, is another. */
function bearingChanges(frozen: ComparisonInput, now: ComparisonInput): BearingChange[] {
  const today = new Map([...now.calls.values()].map((facts) => [facts.call, facts]));
  return [...frozen.calls.values()].flatMap((before) => {
    const after = today.get(before.call);
    if (!after) return [];
    if (before.azimuthDeg === after.azimuthDeg && before.spreadDeg === after.spreadDeg) return [];
    return [{ call: before.call, thenDeg: before.azimuthDeg, nowDeg: after.azimuthDeg }];
  });
}

export interface Renaming {
  then: string;
  now: string;
}

function renamed(frozen: ComparisonInput, now: ComparisonInput): Renaming[] {
  const today = new Map(now.receivers.map((receiver) => [receiver.id, receiver.callSign]));
  const pairs = [
    { then: frozen.antennas.a.name, now: now.antennas.a.name },
    { then: frozen.antennas.b.name, now: now.antennas.b.name },
    ...frozen.receivers.map(({ id, callSign }) => ({ then: callSign, now: today.get(id) ?? callSign })),
  ];
  return pairs.filter((pair) => pair.then !== pair.now);
}

function positionChange(frozen: ComparisonInput, locator: string, station: StationFacts): Renaming | null {
  const { latitude, longitude } = frozen.station;
  return latitude === station.latitudeDeg && longitude === station.longitudeDeg
    ? null
    : { then: locator, now: station.locator };
}

function numbersOf({ verdict, estimate, counts }: Pick<ComparisonResult, 'verdict' | 'estimate' | 'counts'>) {
  return { verdict, estimate, counts };
}
