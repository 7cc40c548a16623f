import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { countOf, formatNumber, THIN_SPACE } from '../format.ts';

/** A p value as people can use it: small ones as a limit, never as zero. */
export function pText(p: number | null): string {
  if (p === null) return 'not known';
  return p < 0.001 ? 'below 0.001' : p.toFixed(3);
}

type HeardOnly = NonNullable<ComparisonAnswer['fairness']['heardOnly']>;

/** What the heard-only counts say, in words. */
export function heardOnlyWords(heardOnly: HeardOnly, antennas: ComparisonAnswer['antennas']): string {
  const { onA, onB, oddsRatio, oddsRatioInterval } = heardOnly;
  const { a, b } = antennas;
  const counts = `Heard on ${a.name} only: ${countOf(onA, 'time')}; on ${b.name} only: ${countOf(onB, 'time')}`;
  if (onA + onB === 0) return 'Nothing was heard on one antenna only.';
  if (oddsRatio === null) return `${counts}.`;
  const [stronger, odds] = oddsRatio >= 1 ? [a, oddsRatio] : [b, 1 / oddsRatio];
  const interval = oddsWords(oddsRatioInterval, oddsRatio < 1);
  if (oddsRatio === 1) return `${counts}. Both were equally often the only one${interval}.`;
  return `${counts}. By station and night, ${stronger.name} was ${
    Number.isFinite(odds) ? `${formatNumber(odds)} times as often the only one` : 'always the only one'
  }${interval}.`;
}

/** Station-nights that one antenna alone heard, by majority, in one direction or in all. */
export interface AloneCounts {
  onlyA: number;
  onlyB: number;
  /** null: without limit, B was never alone. */
  oddsRatio: number | null;
  intervalRatio: readonly [number, number | null] | null;
  /** null: nothing to test. */
  p: number | null;
}

/** What such counts say. */
export function aloneWords(
  { onlyA, onlyB, oddsRatio, intervalRatio, p }: AloneCounts,
  { a, b }: ComparisonAnswer['antennas'],
  pName: string,
): string {
  const counts = `${a.name} alone in ${countOf(onlyA, 'station-night')}, ${b.name} alone in ${onlyB}`;
  if (p === null) return `${counts}.`;
  const turned = oddsRatio !== null && oddsRatio < 1;
  const odds = oddsRatio === null || oddsRatio === 0 ? null : turned ? 1 / oddsRatio : oddsRatio;
  const times =
    odds === null
      ? 'never the other way round'
      : `${(turned ? b : a).name} ${formatNumber(odds)} times as often`;
  return `${counts}: ${times}${oddsWords(intervalRatio, turned)}, ${pName} ${pText(p)}.`;
}

function oddsWords(interval: AloneCounts['intervalRatio'], upsideDown: boolean): string {
  if (interval === null) return '';
  const [low, high] = interval;
  const write = (value: number | null) =>
    value === null || !Number.isFinite(value) ? 'no limit' : formatNumber(value, value < 10 ? 1 : 0);
  const turned = (value: number | null) => (value === null ? 0 : value === 0 ? null : 1 / value);
  const ends = upsideDown ? [turned(high), turned(low)] : [low, high];
  return ` (95${THIN_SPACE}% interval ${write(ends[0]!)} to ${write(ends[1] ?? null)})`;
}

/** "14 of 96 stations carry half of all units." */
export function halfWeightWords(answer: ComparisonAnswer): string {
  const { halfWeightStations } = answer.fairness;
  return `${halfWeightStations} of ${countOf(answer.counts.stations, 'station')} ${
    halfWeightStations === 1 ? 'carries' : 'carry'
  } half of all units.`;
}
