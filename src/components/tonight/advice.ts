import type { TonightAnswer } from '../../../shared/contracts/tonight.ts';
import { formatDb, formatDbInterval } from '../../../shared/format.ts';

export type BandAdvice = TonightAnswer['bands'][number];

/** One axis for all bands, so that they can be compared: whole dB either side of zero, at least 6. */
export function adviceLimitDb(bands: readonly BandAdvice[]): number {
  const reach = bands.flatMap(({ advantageDb, intervalDb }) => [
    Math.abs(advantageDb ?? 0),
    ...(intervalDb ?? []).map(Math.abs),
  ]);
  return Math.ceil(Math.max(6, ...reach));
}

/** The advice as one word and a figure: what to do before why. */
export function adviceHeadline(band: BandAdvice, nameOf: (id: number) => string): string {
  if (band.inUseAntennaId === null || band.bestAntennaId === null) return 'Not known';
  if (band.bestAntennaId === band.inUseAntennaId) return `Stay on ${nameOf(band.inUseAntennaId)}`;
  return `${nameOf(band.bestAntennaId)} ${formatDb(band.advantageDb)}`;
}

/** What the scale shows, in words. */
export function scaleWords(band: BandAdvice, nameOf: (id: number) => string): string {
  if (band.advantageDb === null || band.intervalDb === null || band.bestAntennaId === null) return '';
  return `${nameOf(band.bestAntennaId)} against ${nameOf(band.inUseAntennaId!)}: ${formatDb(band.advantageDb)}, 95\u2009% interval ${formatDbInterval(band.intervalDb)}`;
}
