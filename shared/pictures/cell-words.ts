import type { ComparisonAnswer, ComparisonCell } from '../contracts/comparison.ts';
import { dateText, sectorsText } from '../contracts/comparison-sentence.ts';
import { countOf, formatBand, formatDb, formatDbInterval, formatNumber, formatSigned } from '../format.ts';

type HourBasis = ComparisonAnswer['bandHours']['basis'];

/** "30-60 degrees", "160 m, 22:00 to 23:00 UTC", "night of 3 November 2026". */
export function cellTitle(cell: ComparisonCell, answer: ComparisonAnswer): string {
  const parts: string[] = [];
  if (cell.bandMetres !== null) parts.push(formatBand(cell.bandMetres));
  if (cell.hour !== null) parts.push(hourWords(cell.hour, answer.bandHours.basis));
  if (cell.sector !== null) parts.push(sectorsText([cell.sector], answer.sectorCount));
  if (cell.night !== null) parts.push(`night of ${dateText(cell.night)}`);
  return parts.join(', ');
}

/** One hour of the band-by-hour map in words. */
export function hourWords(hour: number, basis: HourBasis): string {
  if (basis === 'utc') {
    const clock = (at: number) => `${String(((at % 24) + 24) % 24).padStart(2, '0')}:00`;
    return `${clock(hour)} to ${clock(hour + 1)} UTC`;
  }
  const [near, far] = hour >= 0 ? [hour, hour + 1] : [-hour - 1, -hour];
  return `${near} to ${far}\u2009h ${hour >= 0 ? 'after' : 'before'} ${basis}`;
}

/** Short form for axes: "22", "+3". */
export function hourLabel(hour: number, basis: HourBasis): string {
  return basis === 'utc' ? String(hour).padStart(2, '0') : formatSigned(hour, 0);
}

/** What the picture says of one cell, the same by hover, focus and tap. */
export function cellWords(cell: ComparisonCell, answer: ComparisonAnswer): string {
  const evidence = `${countOf(cell.units, 'unit')}, ${countOf(cell.clusters, 'station-night')}${
    cell.night === null ? ` in ${countOf(cell.nights, 'night')}` : ''
  }`;
  if (!cell.speaks || cell.estimateDb === null) {
    const needed = cell.night === null ? '8 station-nights from 3 nights' : '8 stations';
    return `Not enough evidence: ${evidence}; ${needed} are needed.`;
  }
  const interval =
    cell.intervalDb === null ? '' : `, 95\u2009% interval ${formatDbInterval(cell.intervalDb)}`;
  return `${betterWords(cell.estimateDb, answer)}${interval}; ${evidence}.`;
}

/** "North-east wire hears better by 1.8 dB"; nothing between the two that shows at one decimal is "no difference". */
export function betterWords(estimateDb: number, answer: ComparisonAnswer): string {
  const shown = formatNumber(Math.abs(estimateDb));
  if (!/[1-9]/.test(shown)) return 'No difference';
  const { a, b } = answer.antennas;
  return `${(estimateDb > 0 ? a : b).name} hears better by ${shown}\u2009dB`;
}

/** One row of a picture's data table. */
export function cellRow(cell: ComparisonCell): Record<string, string | number | boolean | null> {
  return {
    estimateDb: cell.estimateDb,
    lowDb: cell.intervalDb?.[0] ?? null,
    highDb: cell.intervalDb?.[1] ?? null,
    units: cell.units,
    clusters: cell.clusters,
    nights: cell.nights,
    pAdjusted: cell.pAdjusted,
    speaks: cell.speaks,
  };
}

/** Whether hovering one cell lights up another: they share a band, an hour, a sector or a night. */
export function lightsUp(lit: ComparisonCell | null, cell: ComparisonCell): boolean {
  if (lit === null) return false;
  return (['bandMetres', 'hour', 'sector', 'night'] as const).some(
    (part) => lit[part] !== null && lit[part] === cell[part],
  );
}

/** What a picture as a whole says, for those who cannot see it. */
export function pictureSummary(
  cells: readonly ComparisonCell[],
  answer: ComparisonAnswer,
  one: string,
): string {
  const speaking = cells.filter((cell) => cell.speaks && cell.estimateDb !== null);
  if (speaking.length === 0) return `No ${one} has enough evidence yet.`;
  const sorted = [...speaking].sort((x, y) => x.estimateDb! - y.estimateDb!);
  const low = sorted[0]!;
  const high = sorted[sorted.length - 1]!;
  const count = `${speaking.length} of ${countOf(cells.length, one)} with units ${
    speaking.length === 1 ? 'has' : 'have'
  } enough evidence.`;
  if (low === high) return `${count} For ${cellTitle(low, answer)}: ${betterWords(low.estimateDb!, answer)}.`;
  return `${count} From ${formatDb(low.estimateDb)} (${cellTitle(low, answer)}) to ${formatDb(high.estimateDb)} (${cellTitle(high, answer)}); positive means that ${answer.antennas.a.name} hears better.`;
}
