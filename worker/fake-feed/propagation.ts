import type { BandMetres } from '../../shared/radio/bands.ts';

/**
 * A plain model of low-band paths: darkness opens them, daylight at either end soaks them up, distance
 * thins them out. The shape is textbook ionospheric lore (D-layer absorption falls with frequency and with
 * the sun's altitude); the figures are set so that the levels look like those of a winter night.
 */
interface BandPath {
  /** Median level of a 100 W station 1,000 km away in the dark on a round antenna, dB over noise. */
  levelDb: number;
  /** Loss for each thousand kilometres beyond spreading. */
  lossPerMegametreDb: number;
  /** Loss at one end of a long path in full daylight. */
  daylightLossDb: number;
}

const paths: ReadonlyMap<BandMetres, BandPath> = new Map([
  [160, { levelDb: 25, lossPerMegametreDb: 0.9, daylightLossDb: 60 }],
  [80, { levelDb: 27.5, lossPerMegametreDb: 0.7, daylightLossDb: 45 }],
  [40, { levelDb: 29, lossPerMegametreDb: 0.5, daylightLossDb: 24 }],
  [30, { levelDb: 28, lossPerMegametreDb: 0.45, daylightLossDb: 10 }],
]);

/** 0 in the dark, 1 in full day, for the layer that absorbs: it lies high and sees the sun before we do. */
export function daylight(sunAltitudeDeg: number): number {
  const rise = (sunAltitudeDeg + 7) / 17;
  if (rise <= 0) return 0;
  if (rise >= 1) return 1;
  return rise * rise * (3 - 2 * rise);
}

/**
 * Median level of a 100 W station over the noise at one moment, on a perfect round antenna.
 *
 * @param altitudesDeg the sun's altitude at home and at the station
 * @returns dB; well below zero when the path is closed
 * @throws RangeError for a band the model does not know
 */
export function pathLevelDb(
  bandMetres: BandMetres,
  distanceKm: number,
  altitudesDeg: readonly [home: number, away: number],
): number {
  const path = paths.get(bandMetres);
  if (!path) throw new RangeError(`the simulator knows no ${bandMetres} m band`);
  const megametres = Math.max(0.15, distanceKm / 1000);
  // Below one hop both ends lie under the same patch of the layer: the loss counts about once.
  const lengthShare = Math.min(1, 0.35 + distanceKm / 3000);
  const [home, away] = altitudesDeg;
  let levelDb =
    path.levelDb -
    10 * Math.log10(megametres) -
    path.lossPerMegametreDb * megametres -
    path.daylightLossDb * lengthShare * (daylight(home) + daylight(away));
  // The highest band closes on short paths when the layer has thinned out late in the night.
  if (bandMetres === 30 && home < -30 && away < -30) levelDb -= 18 * Math.max(0, 1 - distanceKm / 4000);
  return levelDb;
}
