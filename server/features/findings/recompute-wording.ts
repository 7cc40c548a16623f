import type { ComparisonResult } from '../../../shared/comparison/index.ts';
import type { PairingRulesInput } from '../../../shared/contracts/comparison.ts';
import { enumerate } from '../../../shared/contracts/comparison-sentence.ts';
import type { Recomputation } from '../../../shared/contracts/finding.ts';
import {
  countOf,
  formatCount,
  formatDb,
  formatDbInterval,
  formatHeading,
  formatLevel,
  formatUtc,
  THIN_SPACE,
} from '../../../shared/format.ts';
import type { ImportEvent } from './circumstances.read-model.ts';
import type { DwellChange } from './dwell-changes.ts';
import type { NightChange } from './night-changes.ts';
import type { BearingChange, Renaming, StationFacts } from './recompute.ts';

type Told = Pick<ComparisonResult, 'verdict' | 'estimate' | 'antennas'>;
type Change = Recomputation['changes'][number];

export interface RecomputeFacts {
  then: Told;
  now: Pick<ComparisonResult, 'verdict' | 'estimate'>;
  unitsSame: boolean;
  /** The stored units still give the stored digest. */
  recordWhole: boolean;
  /** Parts of the answer that differ, in words: today's data, and the frozen units under today's program. */
  parts: string[];
  programParts: string[];
  versions: { then: string; now: string };
  nights: NightChange[];
  nightCount: number;
  dwells: DwellChange[];
  imports: ImportEvent[];
  bearings: BearingChange[];
  renamed: Renaming[];
  position: Renaming | null;
  frozenRules: { rules: PairingRulesInput; marginDb: number; sectorCount: number };
  station: StationFacts;
  nightsWaiting: number;
}

/** Things named one by one; of more, only how many there are. */
const namedAtMost = 4;

export function headSentence(facts: RecomputeFacts): string {
  const { nightsWaiting, nights, parts, programParts, versions } = facts;
  if (!facts.recordWhole) return 'The stored units do not give the stored digest: the record is damaged.';
  if (nightsWaiting > 0) {
    return `Not settled yet: the units of ${countOf(nightsWaiting, 'night')} wait to be made anew. Check again in a moment.`;
  }
  if (!facts.unitsSame) {
    const where =
      nights.length === 1 && nights[0]
        ? `the units of the night of ${nights[0].night} are not as they were`
        : `the units of ${formatCount(nights.length)} of ${countOf(facts.nightCount, 'night')} are not as they were`;
    return `Other data: ${where}. ${numbersSentence(facts)}`;
  }
  if (parts.length === 0) return 'Same data, same numbers.';
  if (programParts.length > 0) {
    return versions.then === versions.now
      ? `Same data, other numbers: ${enumerate(programParts)} changed, though the program calls itself the same.`
      : `Same data, other numbers: the program was ${versions.then} and is ${versions.now}.`;
  }
  return `Same units, and what is known about them changed: ${enumerate(parts)}.`;
}

/** Everything that changed, the most telling first; also what changed without moving a number. */
export function changesInWords(facts: RecomputeFacts): Change[] {
  return [
    ...numberChanges(facts),
    ...dwellSentences(facts),
    ...nightSentences(facts),
    ...importSentences(facts),
    ...bearingSentences(facts),
    ...positionSentences(facts),
    ...ruleSentences(facts),
    ...nameSentences(facts),
    ...programSentences(facts),
    ...waitingSentences(facts),
  ];
}

function numberChanges(facts: RecomputeFacts): Change[] {
  if (facts.parts.length === 0) return [];
  const moved = facts.parts.includes('the estimate') || facts.parts.includes('the verdict');
  return [
    ...(moved ? [about('numbers', numbersSentence(facts))] : []),
    about('numbers', `Not the same to the last digit: ${enumerate(facts.parts)}.`),
  ];
}

function numbersSentence({ then, now }: Pick<RecomputeFacts, 'then' | 'now'>): string {
  const before = numberWords(then);
  const after = numberWords(now);
  return before === after
    ? `The answer stays ${before}, to the digits shown.`
    : `It was ${before}; it is now ${after}.`;
}

function numberWords({ estimate, verdict }: Pick<ComparisonResult, 'verdict' | 'estimate'>): string {
  return estimate === null
    ? `"${verdict.code}" without an estimate`
    : `${formatDb(estimate.estimateDb, 2)} (95${THIN_SPACE}% interval ${formatDbInterval(estimate.interval95Db, 2)}), "${verdict.code}"`;
}

function dwellSentences({ dwells, then }: RecomputeFacts): Change[] {
  if (dwells.length <= namedAtMost) return dwells.map(({ sentence }) => about('dwells', sentence));
  const counted = (change: DwellChange['change']) => dwells.filter((each) => each.change === change).length;
  const { a, b } = then.antennas;
  return [
    about(
      'dwells',
      `${countOf(dwells.length, 'dwell')} of ${a.name} and ${b.name} in the switch log are not as they were: ` +
        `${formatCount(counted('changed'))} changed, ${formatCount(counted('added'))} new, ${formatCount(counted('removed'))} gone.`,
    ),
  ];
}

function nightSentences({ nights }: RecomputeFacts): Change[] {
  if (nights.length <= namedAtMost) return nights.map((night) => about('nights', nightSentence(night)));
  const sum = (read: (night: NightChange) => number) => nights.reduce((total, n) => total + read(n), 0);
  return [
    about(
      'nights',
      `${countOf(nights.length, 'night')} changed: ${formatCount(sum((n) => n.added))} units more, ` +
        `${formatCount(sum((n) => n.removed))} fewer, ${formatCount(sum((n) => n.changed))} with other values.`,
    ),
  ];
}

function nightSentence(night: NightChange): string {
  const units = [
    night.added > 0 ? `${formatCount(night.added)} more` : '',
    night.removed > 0 ? `${formatCount(night.removed)} fewer` : '',
    night.changed > 0 ? `${formatCount(night.changed)} with other values` : '',
  ].filter((part) => part !== '');
  const told =
    units.length === 0
      ? `${countOf(night.unitsNow, 'unit')} as before`
      : `units: ${units.join(', ')} (${formatCount(night.unitsThen)} then, ${formatCount(night.unitsNow)} now)`;
  const heardOnly = `heard on one antenna only: ${formatCount(night.heardOnlyThen)} then, ${formatCount(night.heardOnlyNow)} now`;
  return `Night of ${night.night}: ${told}; ${heardOnly}.`;
}

function importSentences({ imports }: RecomputeFacts): Change[] {
  if (imports.length > namedAtMost)
    return [about('imports', `Files of these nights were read or undone ${imports.length} times since.`)];
  return imports.map(({ fileName, action, who, at }) =>
    about(
      'imports',
      `The import of ${fileName} was ${action === 'undone' ? 'undone' : 'started'} (${who}, ${formatUtc(at)}).`,
    ),
  );
}

function bearingSentences({ bearings }: RecomputeFacts): Change[] {
  if (bearings.length === 0) return [];
  const named = bearings
    .slice(0, namedAtMost)
    .map(({ call, thenDeg, nowDeg }) => `${call} ${formatHeading(thenDeg)} to ${formatHeading(nowDeg)}`);
  const more = bearings.length > namedAtMost ? ' and others' : '';
  return [
    about(
      'bearings',
      `The bearing of ${countOf(bearings.length, 'call')} is taken otherwise today: ${named.join(', ')}${more}.`,
    ),
  ];
}

function positionSentences({ position }: RecomputeFacts): Change[] {
  return position
    ? [
        about(
          'position',
          `The station's position was ${position.then} and is ${position.now}: bearings and hours of sunset and sunrise follow it.`,
        ),
      ]
    : [];
}

function ruleSentences({ frozenRules, station }: RecomputeFacts): Change[] {
  const was = frozenRules.rules;
  const is = station.rules;
  const unit = (value: number, name: string) => `${value}${THIN_SPACE}${name}`;
  const differences = [
    ['block', unit(was.blockMinutes, 'min'), unit(is.blockMinutes, 'min')],
    ['window', unit(was.windowSeconds, 's'), unit(is.windowSeconds, 's')],
    ['frequency tolerance', unit(was.freqToleranceKhz, 'kHz'), unit(is.freqToleranceKhz, 'kHz')],
    ['guard', unit(was.guardSeconds, 's'), unit(is.guardSeconds, 's')],
    ['margin', formatLevel(frozenRules.marginDb, 1), formatLevel(station.marginDb, 1)],
    ['sectors', String(frozenRules.sectorCount), String(station.sectorCount)],
  ].filter(([, then, now]) => then !== now);
  if (differences.length === 0) return [];
  const told = differences.map(([name, then, now]) => `${name} ${now} instead of ${then}`);
  return [
    about(
      'rules',
      `The station's own rules are others than the finding's (${told.join(', ')}); it was asked again under its own.`,
    ),
  ];
}

function nameSentences({ renamed }: RecomputeFacts): Change[] {
  return renamed.map(({ then, now }) => about('names', `${then} is called ${now} today.`));
}

function programSentences({ versions, programParts }: RecomputeFacts): Change[] {
  if (versions.then === versions.now && programParts.length === 0) return [];
  const effect =
    programParts.length === 0
      ? 'it makes the same numbers of the frozen units'
      : `of the frozen units it makes other numbers in ${enumerate(programParts)}`;
  return [about('program', `The program was ${versions.then} and is ${versions.now}; ${effect}.`)];
}

function waitingSentences({ nightsWaiting }: RecomputeFacts): Change[] {
  return nightsWaiting > 0
    ? [about('preparation', `The units of ${countOf(nightsWaiting, 'night')} wait to be made anew.`)]
    : [];
}

function about(what: Change['about'], sentence: string): Change {
  return { about: what, sentence };
}
