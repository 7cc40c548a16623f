/**
 * Azimuth patterns of the simulated receive antennas, in dB of signal-to-noise ratio. On the low bands the
 * noise comes from outside, so what counts is directivity, not efficiency: a small loop may beat a large
 * vertical. Smooth, with one or two lobes by kind; a model of the right shape, not of any built antenna.
 */
export type PatternShape =
  /** The same in all directions. */
  | { lobe: 'round' }
  /** One lobe toward the heading; `rearDb` is how much weaker the back is. */
  | { lobe: 'single'; rearDb: number; sharpness: number }
  /** Two equal lobes, ahead and behind; `sideDb` is how much weaker the sides are. */
  | { lobe: 'double'; sideDb: number; sharpness: number };

export interface AntennaPattern {
  headingDeg: number;
  shape: PatternShape;
  /** Signal-to-noise gain in the best direction by band (metres), dB against a perfect round antenna. */
  peakDb: Readonly<Record<number, number>>;
}

/**
 * The pattern's gain toward an azimuth.
 *
 * @param azimuthDeg degrees from true north, any real number
 * @returns dB; at most the band's peak
 * @throws RangeError when the pattern has no value for the band
 */
export function patternGainDb(pattern: AntennaPattern, bandMetres: number, azimuthDeg: number): number {
  const peakDb = pattern.peakDb[bandMetres];
  if (peakDb === undefined) throw new RangeError(`no pattern for the ${bandMetres} m band`);
  const { shape } = pattern;
  if (shape.lobe === 'round') return peakDb;
  const off = ((azimuthDeg - pattern.headingDeg) * Math.PI) / 180;
  if (shape.lobe === 'single') {
    return peakDb - shape.rearDb * ((1 - Math.cos(off)) / 2) ** (1 / shape.sharpness);
  }
  return peakDb - shape.sideDb * Math.abs(Math.sin(off)) ** (2 / shape.sharpness);
}

/** Mean gain over all azimuths, dB averaged in dB. */
export function meanGainDb(pattern: AntennaPattern, bandMetres: number): number {
  let sum = 0;
  for (let azimuthDeg = 0; azimuthDeg < 360; azimuthDeg++)
    sum += patternGainDb(pattern, bandMetres, azimuthDeg);
  return sum / 360;
}
