import type { ComparisonQuestion, VerdictCode } from '../contracts/comparison.ts';
import { bandsText, enumerate, sectorsText } from '../contracts/comparison-sentence.ts';
import { formatCount } from '../format.ts';
import type { SelectedUnits } from './selection.ts';

const minus = '\u2212';
const thin = '\u2009';

/** "1.8", "−0.4": one decimal, a real minus sign, never "−0.0". */
export function decibels(value: number): string {
  const text = Math.abs(value).toFixed(1);
  return value < 0 && text !== '0.0' ? `${minus}${text}` : text;
}

const plural = (n: number, one: string, many = `${one}s`) => `${formatCount(n)} ${n === 1 ? one : many}`;

export interface VerdictWords {
  code: VerdictCode;
  nameA: string;
  nameB: string;
  question: Pick<ComparisonQuestion, 'bandsMetres' | 'sectors'>;
  sectorCount: number;
  estimate: { estimateDb: number; interval95Db: readonly [number, number] } | null;
  counts: { units: number; stations: number; nights: number };
  marginDb: number;
  /** Why the antennas cannot be told from the receivers; used by that verdict only. */
  tangle: string;
}

/** The answer as a sentence that can be acted on: estimate, interval, units, stations and nights always in it. */
export function verdictSentence(words: VerdictWords): string {
  const { code, nameA, nameB, estimate, counts } = words;
  const where =
    ` on ${bandsText(words.question.bandsMetres)}` +
    (words.question.sectors.length > 0
      ? ` toward ${sectorsText(words.question.sectors, words.sectorCount)}`
      : '');
  const evidence = `${plural(counts.units, 'unit')} of ${plural(counts.stations, 'station')} in ${plural(counts.nights, 'night')}`;
  if (code === 'cannot be separated') {
    return `${nameA} and ${nameB} cannot be separated from their receivers${where}: ${words.tangle} (${evidence}).`;
  }
  if (!estimate) {
    return counts.units === 0
      ? `No station was heard on both ${nameA} and ${nameB} at the same time${where}.`
      : `Not enough yet to compare ${nameA} with ${nameB}${where}: ${evidence}.`;
  }
  const turned = estimate.estimateDb < 0;
  const [better, other] = turned ? [nameB, nameA] : [nameA, nameB];
  const size = Math.abs(estimate.estimateDb);
  const [lo, hi] = turned
    ? [-estimate.interval95Db[1], -estimate.interval95Db[0]]
    : [estimate.interval95Db[0], estimate.interval95Db[1]];
  const interval = `95${thin}% interval ${decibels(lo)} to ${decibels(hi)}${thin}dB`;
  switch (code) {
    case 'no practical difference':
      return (
        `No practical difference between ${nameA} and ${nameB}${where}: ${better} is ${decibels(size)}${thin}dB ahead, ` +
        `less than the margin of ${decibels(words.marginDb)}${thin}dB, ${interval}, from ${evidence}.`
      );
    case 'not settled':
      return (
        `Not settled between ${nameA} and ${nameB}${where}: ${better} is ${decibels(size)}${thin}dB ahead so far, ` +
        `${interval}, from ${evidence}.`
      );
    case 'not enough yet':
      return (
        `Not enough yet to compare ${nameA} with ${nameB}${where}: ${better} is ${decibels(size)}${thin}dB ahead, ` +
        `${interval}, from only ${evidence}.`
      );
    default:
      return `${better} hears ${decibels(size)}${thin}dB better than ${other}${where}, ${interval}, from ${evidence}.`;
  }
}

/** Says which antenna was only ever on which receiver, and what would link them for the least effort. */
export function explainTangle(
  units: SelectedUnits,
  names: { a: string; b: string; receiver: (id: number) => string },
): { tangle: string; cures: string[] } {
  const onA = new Set<number>();
  const onB = new Set<number>();
  for (let i = 0; i < units.n; i++) {
    onA.add(units.receiverA[i]!);
    onB.add(units.receiverB[i]!);
  }
  const list = (ids: Set<number>) => enumerate([...ids].sort((x, y) => x - y).map(names.receiver));
  const tangle =
    `${names.a} was only ever on ${list(onA)} and ${names.b} only on ${list(onB)}, ` +
    `and nothing links these receivers`;
  return {
    tangle,
    cures: [
      `Swap the two antennas for about 40 minutes: ${names.a} on ${list(onB)} and ${names.b} on ${list(onA)}.`,
      `Or put the receivers ${list(new Set([...onA, ...onB]))} on one and the same antenna for about 40 minutes.`,
      `Or let one receiver alternate between ${names.a} and ${names.b}, a few minutes each.`,
    ],
  };
}
