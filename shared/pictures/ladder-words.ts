import { enumerate } from '../contracts/comparison-sentence.ts';
import type { LadderAnswer, LadderAntenna, LadderComponent, LadderPair } from '../contracts/ladder.ts';
import { countOf, formatDb, formatDbInterval, formatLevel, formatShare, formatSigned } from '../format.ts';
import { pText } from './fairness-words.ts';

type NameOf = (antennaId: number) => string;

/** Adjusted over all pairs, the difference is no luck. */
export function tells({ pAdjusted }: Pick<LadderPair, 'pAdjusted'>): boolean {
  return pAdjusted !== null && pAdjusted < 0.05;
}

/** Nothing else joins the two sides of this pair: without its own units the ladder falls apart. */
export function isLoneBridge({ units, indirect }: Pick<LadderPair, 'units' | 'indirect'>): boolean {
  return units > 0 && indirect === null;
}

/** The pair of these two, whichever is named first. */
export function findPair(
  components: readonly LadderComponent[],
  [one, other]: readonly [number, number],
): LadderPair | null {
  const is = ({ a, b }: LadderPair) => (a === one && b === other) || (a === other && b === one);
  return components.flatMap(({ pairs }) => pairs).find(is) ?? null;
}

/** What the pair says seen from `from`: how much better (below zero: worse) `to` hears. */
export function seenFrom(pair: LadderPair, from: number): { to: number; differenceDb: number } {
  return pair.a === from
    ? { to: pair.b, differenceDb: -pair.differenceDb }
    : { to: pair.a, differenceDb: pair.differenceDb };
}

/** What values are counted from: "the mean of these 4 antennas", "Vertical". */
export function zeroWords({ referenceAntennaId, antennas }: LadderComponent): string {
  const reference = antennas.find(({ id }) => id === referenceAntennaId);
  if (reference) return reference.name;
  // An antenna that one station-night carries has no share in the mean.
  const counted = antennas.filter(({ chanceBest }) => chanceBest !== null).length;
  return counted === 0 || counted === antennas.length
    ? `the mean of these ${countOf(antennas.length, 'antenna')}`
    : `the mean of the ${countOf(counted, 'antenna')} with enough evidence`;
}

/** Beside the value: its interval, or why there is none. */
export function intervalWords(antenna: LadderAntenna, component: LadderComponent): string {
  if (antenna.id === component.referenceAntennaId) return 'the reference';
  if (antenna.valueDb === null) return 'nothing to measure against';
  return antenna.intervalDb === null
    ? 'no interval: one station-night carries it'
    : formatDbInterval(antenna.intervalDb);
}

/** What makes an antenna's place doubtful or useless tonight; empty where nothing does. */
export function doubtWords(antenna: LadderAntenna): string[] {
  const doubts: string[] = [];
  if (!antenna.inService) doubts.push('out of service');
  if (!antenna.speaks) {
    const short = [
      ...(antenna.clusters < 8 ? [countOf(antenna.clusters, 'station-night')] : []),
      ...(antenna.nights < 3 ? [countOf(antenna.nights, 'night')] : []),
    ];
    doubts.push(`thin: ${short.length > 0 ? short.join(', ') : 'no interval'}`);
  }
  return doubts;
}

/** One rung in a sentence. */
export function rungWords(antenna: LadderAntenna, component: LadderComponent): string {
  const { name, valueDb, chanceBest, rank } = antenna;
  const parts = [
    valueDb === null
      ? `${name}: ${intervalWords(antenna, component)}`
      : `${name}, rank ${rank}: ${formatDb(valueDb)} against ${zeroWords(component)} (${intervalWords(antenna, component)})`,
    ...(chanceBest === null ? [] : [`chance of being best ${chanceText(chanceBest)}`]),
    `${countOf(antenna.units, 'unit')} of ${countOf(antenna.stations, 'station')} in ${countOf(antenna.nights, 'night')}`,
    ...doubtWords(antenna),
  ];
  return `${parts.join('; ')}.`;
}

/** "93 %"; the draws cannot tell a certainty, so neither end is said to be one. */
export function chanceText(chance: number): string {
  if (chance >= 0.995) return 'above 99\u2009%';
  if (chance < 0.005) return 'below 1\u2009%';
  return formatShare(chance);
}

/** "North-east wire hears 2.8 dB better than South loop". */
export function pairWords({ a, b, differenceDb }: LadderPair, nameOf: NameOf): string {
  // a stands above b on the ladder, so that the difference is never below zero.
  return /[1-9]/.test(differenceDb.toFixed(1))
    ? `${nameOf(a)} hears ${formatLevel(Math.abs(differenceDb), 1)} better than ${nameOf(b)}`
    : `${nameOf(a)} and ${nameOf(b)} hear alike`;
}

/** How sure that is. */
export function sureWords({ intervalDb, p, pAdjusted }: LadderPair): string {
  if (intervalDb === null) return 'No interval: too little evidence carries it.';
  const adjusted = `p ${pText(p)}, adjusted over all pairs ${pText(pAdjusted)}`;
  const told = tells({ pAdjusted }) ? '' : ' Not told apart: it may be luck.';
  return `95\u2009% interval ${formatDbInterval(intervalDb)}; ${adjusted}.${told}`;
}

export type Consistency = 'agree' | 'disagree' | 'untested';

/** Whether direct and indirect evidence agree, and what to make of it. */
export function consistencyWords(pair: LadderPair): { state: Consistency; words: string } {
  const { consistent, consistencyP, inconsistency, units } = pair;
  if (consistent === null || inconsistency === null) {
    const words =
      units === 0
        ? 'The two were never heard together. All that is known comes round other antennas.'
        : isLoneBridge(pair)
          ? 'A lone bridge: nothing but their own units links the two, so nothing can be held against them.'
          : 'There is too little evidence to hold the direct against the indirect.';
    return { state: 'untested', words };
  }
  const apart = `${formatSigned(inconsistency.estimateDb)}\u2009dB apart`;
  return consistent
    ? {
        state: 'agree',
        // A small p of one among many is what luck gives; the adjusted one has cleared it.
        words:
          consistencyP !== null && consistencyP < 0.05
            ? `Direct and indirect evidence differ no more than luck allows among so many pairs: ${apart}, p ${pText(consistencyP)} before adjustment.`
            : `Direct and indirect evidence agree: ${apart}, p ${pText(consistencyP)}.`,
      }
    : {
        state: 'disagree',
        words: `Direct and indirect evidence disagree: ${apart}, p ${pText(consistencyP)}. Something was not the same on both ways, such as the hours, the directions or the receivers. Look at both before you rely on the total.`,
      };
}

/** The picture of one scale for whoever cannot see it. */
export function ladderSummary(
  component: LadderComponent,
  { marginDb }: Pick<LadderAnswer, 'marginDb'>,
): string {
  const best = component.antennas.find(({ speaks }) => speaks) ?? component.antennas[0]!;
  const near = component.antennas.filter(
    ({ id, valueDb }) =>
      id !== best.id && valueDb !== null && best.valueDb !== null && best.valueDb - valueDb <= marginDb,
  );
  const within =
    near.length === 0
      ? `None of the others is within the margin of ${formatLevel(marginDb, 1)} below ${best.name}.`
      : `Within the margin of ${formatLevel(marginDb, 1)} below ${best.name}: ${enumerate(near.map(({ name }) => name))}.`;
  return `${countOf(component.antennas.length, 'antenna')} from the best down. ${component.antennas
    .map((antenna) => rungWords(antenna, component))
    .join(' ')} ${within}`;
}

/** Why these antennas have a scale of their own. */
export function apartWords(component: LadderComponent, others: readonly LadderComponent[]): string {
  const names = (list: readonly LadderAntenna[]) => enumerate(list.map(({ name }) => name));
  const rest = names(others.flatMap(({ antennas }) => antennas));
  return component.antennas.length === 1
    ? `${names(component.antennas)} cannot be set beside ${rest}: the data do not tell how far apart they are.`
    : `A scale of its own: the data do not tell how far apart these antennas and ${rest} are. A value here says nothing about a value there.`;
}

/** Units that the choice leaves out, by reason; empty when there are none. */
export function leftOutWords(leftOut: LadderAnswer['leftOut'], sectorsChosen: boolean): string[] {
  const reasons: [number, string][] = [
    [leftOut.outsideHoursUnits, 'outside the hours'],
    [leftOut.otherReceiverUnits, 'on other receivers'],
    [leftOut.otherKindUnits, 'of the other kind'],
    [leftOut.otherSectorUnits, 'toward other directions'],
    [sectorsChosen ? leftOut.bearingUnsureUnits : 0, 'with an unsure bearing'],
  ];
  return reasons.flatMap(([units, why]) => (units > 0 ? [`${countOf(units, 'unit')} ${why}`] : []));
}
