/**
 * Amateur bands from 2200 m to 6 m.
 *
 * Limits in kHz per ITU Region from the Table of Frequency Allocations, ITU Radio Regulations
 * (edition of 2020), Article 5, with the footnotes named below. Both limits belong to the band.
 */

export const BAND_METRES = [2200, 630, 160, 80, 60, 40, 30, 20, 17, 15, 12, 10, 6] as const;

/** An amateur band by its customary wavelength in metres. */
export type BandMetres = (typeof BAND_METRES)[number];

/** 1: Europe, Africa, Middle East, northern Asia. 2: the Americas. 3: the rest of Asia, Oceania. */
export type ItuRegion = 1 | 2 | 3;

type LimitsKhz = readonly [lowest: number, highest: number];

export interface Band {
  band: BandMetres;
  /** "160 m" */
  label: string;
  /** Lowest and highest kHz over all three Regions and the national footnotes: where a receiver may hear it. */
  worldKhz: LimitsKhz;
  regionKhz: Readonly<Record<ItuRegion, LimitsKhz>>;
  /** What differs between Regions or countries; null where the whole world shares one allocation. */
  note: string | null;
}

function band(
  metres: BandMetres,
  region1: LimitsKhz,
  region2: LimitsKhz = region1,
  region3: LimitsKhz = region1,
  note: string | null = null,
  national: readonly LimitsKhz[] = [],
): Band {
  const all = [region1, region2, region3, ...national];
  return {
    band: metres,
    label: `${metres} m`,
    worldKhz: [Math.min(...all.map(([low]) => low)), Math.max(...all.map(([, high]) => high))],
    regionKhz: { 1: region1, 2: region2, 3: region3 },
    note,
  };
}

/** From the longest wave to the shortest. */
export const BANDS: readonly Band[] = [
  band(2200, [135.7, 137.8]),
  band(630, [472, 479]),
  band(
    160,
    [1810, 1850],
    [1800, 2000],
    [1800, 2000],
    'Region 1 has 1810 to 1850 kHz; many of its countries add part of 1850 to 2000 kHz (footnotes 5.96, 5.98). Regions 2 and 3 have 1800 to 2000 kHz.',
  ),
  band(
    80,
    [3500, 3800],
    [3500, 4000],
    [3500, 3900],
    'The band ends at 3800 kHz in Region 1, 4000 kHz in Region 2 and 3900 kHz in Region 3.',
  ),
  band(
    60,
    [5351.5, 5366.5],
    [5351.5, 5366.5],
    [5351.5, 5366.5],
    'The shared allocation is 5351.5 to 5366.5 kHz; single channels and national bands lie between 5250 and 5450 kHz (footnotes 5.133B and article 4.4).',
    [[5250, 5450]],
  ),
  band(
    40,
    [7000, 7200],
    [7000, 7300],
    [7000, 7200],
    'The band ends at 7200 kHz in Regions 1 and 3 and at 7300 kHz in Region 2.',
  ),
  band(30, [10100, 10150]),
  band(20, [14000, 14350]),
  band(17, [18068, 18168]),
  band(15, [21000, 21450]),
  band(12, [24890, 24990]),
  band(10, [28000, 29700]),
  band(
    6,
    [50000, 52000],
    [50000, 54000],
    [50000, 54000],
    'Region 1 has 50 to 52 MHz, some of its countries up to 54 MHz; Regions 2 and 3 have 50 to 54 MHz.',
  ),
];

const bandByMetres = new Map<number, Band>(BANDS.map((entry) => [entry.band, entry]));

/**
 * The band of a frequency in kHz, or null outside every amateur band.
 *
 * Without a region the world's limits apply: a receiver in Region 1 hears Region 2 stations at
 * 1805 or 7250 kHz, and calling those "no band" would lose real spots, while no two bands come near
 * enough to be mixed up. With a region only that Region's own allocation counts (for questions such
 * as "may our transmitter be here?"), without the national footnotes. A frequency that is not a
 * finite number is in no band.
 */
export function bandOfKhz(freqKhz: number, region?: ItuRegion): BandMetres | null {
  for (const entry of BANDS) {
    const [lowest, highest] = region === undefined ? entry.worldKhz : entry.regionKhz[region];
    if (freqKhz >= lowest && freqKhz <= highest) return entry.band;
  }
  return null;
}

/** Whether a number is one of the bands' customary wavelengths in metres. */
export function isBandMetres(metres: number): metres is BandMetres {
  return bandByMetres.has(metres);
}

/** The full entry of a band. Throws a RangeError for a wavelength that is not in `BAND_METRES`. */
export function bandByLength(metres: number): Band {
  const entry = bandByMetres.get(metres);
  if (entry === undefined) {
    throw new RangeError(`band must be one of ${BAND_METRES.join(', ')} metres, was ${metres}`);
  }
  return entry;
}
