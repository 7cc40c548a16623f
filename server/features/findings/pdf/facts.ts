import type { z } from 'zod';
import { questionTerms, rulesText } from '../../../../shared/contracts/comparison-sentence.ts';
import type { ComparisonAnswer, ComparisonQuestion } from '../../../../shared/contracts/comparison.ts';
import type { finding } from '../../../../shared/contracts/finding.ts';
import {
  countOf,
  formatBand,
  formatCount,
  formatDb,
  formatDbInterval,
  formatNumber,
  formatShare,
  formatUtc,
  THIN_SPACE,
} from '../../../../shared/format.ts';
import { halfWeightWords, heardOnlyWords, pText } from '../../../../shared/pictures/fairness-words.ts';

export type PrintedFinding = z.input<typeof finding>;
/** A line of a table: what, and how much. */
export type Fact = [what: string, value: string];

export function answerOf(printed: PrintedFinding): ComparisonAnswer {
  return printed.answer as ComparisonAnswer;
}

export function receiverNames(printed: PrintedFinding): (id: number) => string {
  const names = new Map(printed.receivers.map((receiver) => [Number(receiver.id), receiver.callSign]));
  return (id) => names.get(id) ?? `receiver ${id}`;
}

export function leftOutFacts(answer: ComparisonAnswer): Fact[] {
  const { exclusions } = answer.fairness;
  return [
    ['Spots within the guard after a switch', formatCount(exclusions.guardedSpots)],
    ['Spots while the switch log is empty', formatCount(exclusions.untaggedSpots)],
    ['Doubled spots', formatCount(exclusions.doubledSpots)],
    ['Units with an unsure bearing', formatCount(exclusions.bearingUnsureUnits)],
    ['Units outside the hours', formatCount(exclusions.outsideHoursUnits)],
    ['Units of other receivers', formatCount(exclusions.otherReceiverUnits)],
    ['Units of the other kind', formatCount(exclusions.otherKindUnits)],
  ];
}

export function evidenceFacts(answer: ComparisonAnswer): Fact[] {
  const { counts, fairness } = answer;
  const { a, b } = answer.antennas;
  const hours = (value: number) => `${formatNumber(value)}${THIN_SPACE}h`;
  return [
    ['Station-nights', formatCount(counts.clusters)],
    ['Simultaneous units', formatCount(counts.simultaneous)],
    ['Alternating units', formatCount(counts.alternating)],
    ['Matches', formatCount(counts.matches)],
    [`Listened on ${a.name}`, hours(fairness.listening.aHours)],
    [`Listened on ${b.name}`, hours(fairness.listening.bHours)],
    ['Stations with half of the units', formatCount(fairness.halfWeightStations)],
  ];
}

export function otherViewFacts(answer: ComparisonAnswer): Fact[] {
  const { estimate, rank, equivalence, marginDb, antennas, censored } = answer;
  const facts: Fact[] = [];
  if (estimate) {
    facts.push(
      ['Narrower interval (90\u2009%)', formatDbInterval(estimate.interval90Db)],
      [
        'Cost of repeats (design effect)',
        estimate.designEffect === null ? 'not known' : `${formatNumber(estimate.designEffect)} times`,
      ],
      ['Chance of such a difference by luck (p)', pText(estimate.p)],
    );
  }
  if (equivalence) {
    facts.push([
      `Proven smaller than ${formatNumber(marginDb)}${THIN_SPACE}dB`,
      `${equivalence.equivalent ? 'yes' : 'no'} (p ${pText(equivalence.p)})`,
    ]);
  }
  if (rank) {
    facts.push(
      ['Typical difference by ranks', withInterval(rank.hodgesLehmannDb, rank.hodgesLehmannIntervalDb)],
      ['Rank test (p)', pText(rank.signedRankP)],
      ['Counting only who was ahead (p)', pText(rank.signTestP)],
      ['Mean of station-nights', `${formatDb(rank.clusterMeanDb)} (p ${pText(rank.pairedTP)})`],
      [`Chance that ${antennas.a.name} hears a station better`, formatShare(rank.chanceAHearsBetter)],
    );
  }
  if (censored) {
    facts.push(['With stations heard on one only', withInterval(censored.estimateDb, censored.intervalDb)]);
  }
  return facts;
}

function withInterval(db: number, interval: readonly [number, number] | null): string {
  return interval ? `${formatDb(db)} (${formatDbInterval(interval)})` : formatDb(db);
}

export function offsetFacts(printed: PrintedFinding): Fact[] {
  const name = receiverNames(printed);
  return answerOf(printed).offsets.map((offset) => [
    `${formatBand(offset.bandMetres)}: ${name(offset.receiverId)} against ${name(offset.againstReceiverId)}`,
    withInterval(offset.offsetDb, offset.intervalDb),
  ]);
}

export function ruleFacts(printed: PrintedFinding): Fact[] {
  const question = printed.question as ComparisonQuestion;
  const answer = answerOf(printed);
  const terms = questionTerms(
    question,
    { antenna: String, receiver: receiverNames(printed), sectorCount: answer.sectorCount },
    { rules: answer.rules, marginDb: answer.marginDb },
  );
  return [
    ...terms.map(({ term, text }): Fact => [term, term === 'Rules' ? rulesText(answer.rules) : text]),
    ['Sectors', `${answer.sectorCount} of ${formatNumber(360 / answer.sectorCount, 0)} degrees`],
  ];
}

export function recordFacts(printed: PrintedFinding): Fact[] {
  return [
    ['Frozen', `${formatUtc(printed.frozenAt)} by ${printed.frozenBy}`],
    ...(printed.trial ? [['Trial', printed.trial.name] satisfies Fact] : []),
    ['Nights', `${printed.firstNight} to ${printed.lastNight}`],
    ...(printed.leftOutNight
      ? [['Left out', `the night of ${printed.leftOutNight}, which was still going on`] satisfies Fact]
      : []),
    ['Program', `Whichwire ${printed.programVersion}`],
    [
      'Position',
      `${printed.station.locator} (${formatNumber(printed.station.latitudeDeg, 3)}, ${formatNumber(printed.station.longitudeDeg, 3)})`,
    ],
    ['Switch log', `${countOf(printed.dwells, 'dwell')} kept with it`],
    ['Digest (SHA-256)', printed.digest],
  ];
}

/** What the fairness checks say in sentences. */
export function fairnessSentences(answer: ComparisonAnswer): string[] {
  const { fairness, antennas, censored } = answer;
  return [
    ...(fairness.separable
      ? []
      : ['No data tells the antennas from the receivers they were on: they cannot be separated.']),
    ...(fairness.heardOnly ? [heardOnlyWords(fairness.heardOnly, antennas)] : []),
    ...(censored?.disagrees ? [censored.sentence] : []),
    halfWeightWords(answer),
    ...fairness.warnings,
  ];
}

/** The words for a reader who has never seen one of these. */
export function howToRead(answer: ComparisonAnswer): string[] {
  const { a, b } = answer.antennas;
  return [
    `A unit is one station on one band in one block of ${answer.rules.blockMinutes}${THIN_SPACE}minutes, heard on both antennas: one difference in dB. Above zero, ${a.name} heard it stronger against the noise; below zero, ${b.name} did.`,
    `The estimate is the mean difference with the receivers' own differences taken out. The 95${THIN_SPACE}% interval says how far it could be off by chance: of a hundred such intervals about ninety-five hold the true value. Units of one station in one night hang together and count as one piece of evidence.`,
    `The margin of ${formatNumber(answer.marginDb)}${THIN_SPACE}dB is what would matter in practice. "Clearly better" means that the whole interval lies beyond it; "no practical difference" that the 90${THIN_SPACE}% interval lies inside it; "not settled" that the data allow both.`,
    'Hatched parts of a picture have too little evidence to speak: fewer than 8 station-nights, or fewer than 3 nights.',
    'The digest is a fingerprint of the units behind this page. Asked again on the same data, the program gives the same digest and the same numbers; if it does not, it lists what changed.',
  ];
}
