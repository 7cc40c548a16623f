import { decibels } from '../comparison/wording.ts';
import { bandsText, enumerate, sectorsText } from '../contracts/comparison-sentence.ts';
import { formatCount } from '../format.ts';
import type { LadderAnswer, LadderAntenna, LadderComponent, LadderPair } from '../contracts/ladder.ts';

const thin = '\u2009';
const counted = (n: number, one: string) => `${formatCount(n)} ${n === 1 ? one : `${one}s`}`;
const chance = (share: number) => (share >= 0.995 ? 'above 0.99' : share.toFixed(2));

/** " on 160 m toward 0-60 degrees". */
export function whereText(
  bandMetres: number | null,
  sectors: readonly number[],
  sectorCount: number,
): string {
  const band = bandMetres === null ? '' : ` on ${bandsText([bandMetres])}`;
  return sectors.length === 0 ? band : `${band} toward ${sectorsText(sectors, sectorCount)}`;
}

interface SentenceFacts extends Pick<LadderAnswer, 'bandMetres' | 'components' | 'counts' | 'marginDb'> {
  where: string;
}

/** The ladder's answer in words: what hears best, by how much, how sure, and from what. */
export function ladderSentence(facts: SentenceFacts): string {
  const { components, counts, where } = facts;
  if (counts.units === 0) {
    return facts.bandMetres === null
      ? 'There are no units in these nights: two antennas have to be heard at the same time first.'
      : `No station was heard on two antennas at the same time${where}.`;
  }
  const evidence = `${counted(counts.units, 'unit')} of ${counted(counts.stations, 'station')} in ${counted(counts.nights, 'night')}`;
  const main = components.find(({ antennas }) => antennas.length > 1);
  if (!main) return `No two antennas can be set beside each other${where} yet (${evidence}).`;
  const speaking = main.antennas.filter(({ speaks }) => speaks);
  const [best, next] = speaking;
  if (!best || !next) return `Not enough yet to rank the antennas${where}: ${evidence}.`;
  return `${leader(best, next, main, facts.where)}, from ${evidence}.${either(best, next, main, facts.marginDb)}${availability(best, speaking, main)}`;
}

const differenceOf = (component: LadderComponent, above: LadderAntenna, below: LadderAntenna): LadderPair =>
  component.pairs.find(({ a, b }) => a === above.id && b === below.id)!;

function leader(best: LadderAntenna, next: LadderAntenna, main: LadderComponent, whereWords: string): string {
  const { differenceDb, intervalDb } = differenceOf(main, best, next);
  const where = whereWords.trimStart();
  const start = where === '' ? '' : `${where[0]!.toUpperCase()}${where.slice(1)} `;
  const lead = `${decibels(differenceDb)}${thin}dB above the next, ${next.name}`;
  const interval = intervalDb
    ? ` (95${thin}% interval ${decibels(intervalDb[0])} to ${decibels(intervalDb[1])}${thin}dB)`
    : '';
  const sure = best.chanceBest === null ? '' : `, chance of being best ${chance(best.chanceBest)}`;
  const settled = intervalDb !== null && intervalDb[0] > 0;
  return `${start}${best.name} ${settled ? 'hears best' : 'leads, but it is not settled'}: ${lead}${interval}${sure}`;
}

/** Whether the first two are as good as each other for listening. */
function either(best: LadderAntenna, next: LadderAntenna, main: LadderComponent, marginDb: number): string {
  const { intervalDb } = differenceOf(main, best, next);
  return intervalDb && intervalDb[1] < marginDb
    ? ` The two differ by less than the margin of ${decibels(marginDb)}${thin}dB: either will do.`
    : '';
}

/** What to listen on when the best antenna is down. */
function availability(best: LadderAntenna, speaking: LadderAntenna[], main: LadderComponent): string {
  if (best.inService) return '';
  const standing = speaking.find(({ inService }) => inService);
  if (!standing) return ` ${best.name} is out of service.`;
  const below = decibels(differenceOf(main, best, standing).differenceDb);
  return ` ${best.name} is out of service; of those in service ${standing.name} stands highest, ${below}${thin}dB below it.`;
}

/** Where the ladder itself gives reason for doubt, in sentences. */
export function ladderWarnings(components: readonly LadderComponent[]): string[] {
  const warnings: string[] = [];
  for (const { antennas, pairs } of components) {
    const nameOf = (id: number) => antennas.find((antenna) => antenna.id === id)!.name;
    const ranked = antennas.filter(({ valueDb }) => valueDb !== null);
    const thinOnes = ranked.filter(({ speaks }) => !speaks).map(({ name }) => name);
    if (thinOnes.length > 0) {
      warnings.push(
        `${enumerate(thinOnes)} ${thinOnes.length === 1 ? 'stands' : 'stand'} on fewer than 8 station-nights or 3 nights: ` +
          'take the place on the ladder as a hint.',
      );
    }
    for (const { a, b, direct, indirect, consistent } of pairs) {
      if (consistent !== false || !direct || !indirect) continue;
      warnings.push(
        `Direct and indirect evidence disagree on ${nameOf(a)} and ${nameOf(b)}: ${decibels(direct.estimateDb)}${thin}dB from their own ` +
          `units, ${decibels(indirect.estimateDb)}${thin}dB round other antennas. They may have been paired at other hours or directions.`,
      );
    }
  }
  return warnings;
}
