import { meanGainDb, patternGainDb, type AntennaPattern } from './antenna-pattern.ts';
import type { Scenario } from './scenario.ts';

/**
 * What nature knows and the program does not: each antenna's pattern and each receiver's offset. Only the
 * simulator and `truth.ts` read it (a lint rule): a comparison that could peek here would prove nothing.
 */
export interface HiddenValues {
  /** By antenna name. */
  patterns: Readonly<Record<string, AntennaPattern>>;
  /** By receiver call sign, then band in metres: dB added to every report. */
  offsetsDb: Readonly<Record<string, Readonly<Record<number, number>>>>;
}

export const demoHiddenValues: HiddenValues = {
  patterns: {
    'North-east wire': {
      headingDeg: 55,
      shape: { lobe: 'single', rearDb: 11, sharpness: 1 },
      peakDb: { 160: 5.2, 80: 6.4, 40: 6, 30: 4.5 },
    },
    'West wire': {
      headingDeg: 285,
      shape: { lobe: 'single', rearDb: 10, sharpness: 1 },
      peakDb: { 160: 4.6, 80: 6, 40: 6.2, 30: 4.8 },
    },
    'South wire': {
      headingDeg: 165,
      shape: { lobe: 'double', sideDb: 6, sharpness: 1 },
      peakDb: { 160: 2.4, 80: 3.6, 40: 4, 30: 3.2 },
    },
    Vertical: { headingDeg: 0, shape: { lobe: 'round' }, peakDb: { 160: 0, 80: 0, 40: 0, 30: 0 } },
    'Small loop south': {
      headingDeg: 160,
      shape: { lobe: 'single', rearDb: 7, sharpness: 0.8 },
      peakDb: { 160: 3.4, 80: 3.1, 40: 1.2, 30: -1 },
    },
    'Small loop west': {
      headingDeg: 295,
      shape: { lobe: 'single', rearDb: 7, sharpness: 0.8 },
      // Close to the barn: about a dB worse than its twin on the lower bands.
      peakDb: { 160: 2.3, 80: 2.2, 40: 1, 30: -1.2 },
    },
    'Phased pair': {
      headingDeg: 80,
      shape: { lobe: 'single', rearDb: 9, sharpness: 0.9 },
      peakDb: { 160: 3.6, 80: 5, 40: 5.2, 30: 3 },
    },
    'Ground wire': {
      headingDeg: 20,
      shape: { lobe: 'double', sideDb: 3, sharpness: 1 },
      peakDb: { 160: -0.4, 80: 0.2, 40: -1.4, 30: -3 },
    },
  },
  offsetsDb: {
    EI7QSA: { 160: 0.4, 80: 0.3, 40: 0.1, 30: 0.2 },
    EI7QSC: { 160: -1, 80: -1.3, 40: -1.6, 30: -1.2 },
    EI7QSD: { 160: 1.1, 80: 0.8, 40: 0.9, 30: 1.3 },
  },
};

/**
 * Refuses a scenario with an antenna or receiver that has no hidden value, before a night is half made.
 *
 * @throws RangeError naming the antenna, or the receiver and band
 */
export function checkHiddenValues(hidden: HiddenValues, scenario: Scenario): void {
  for (const { name } of scenario.antennas) {
    const pattern = hidden.patterns[name];
    if (!pattern) throw new RangeError(`antenna "${name}" has no pattern`);
    for (const bandMetres of scenario.bandsMetres) {
      if (pattern.peakDb[bandMetres] === undefined) {
        throw new RangeError(`antenna "${name}" has no gain for the ${bandMetres} m band`);
      }
    }
  }
  for (const { callSign } of scenario.receivers) {
    for (const bandMetres of scenario.bandsMetres) {
      if (hidden.offsetsDb[callSign]?.[bandMetres] === undefined) {
        throw new RangeError(`receiver ${callSign} has no offset for the ${bandMetres} m band`);
      }
    }
  }
}

/**
 * The same station with the direction taken out: every antenna hears all round with its pattern's mean
 * gain. For the ideal study, where the difference of two antennas must be one number.
 */
export function withoutDirections(hidden: HiddenValues): HiddenValues {
  const patterns = Object.entries(hidden.patterns).map(([name, pattern]): [string, AntennaPattern] => {
    const bands = Object.keys(pattern.peakDb).map(Number);
    const peakDb = Object.fromEntries(
      bands.map((bandMetres) => [bandMetres, meanGainDb(pattern, bandMetres)]),
    );
    return [name, { headingDeg: pattern.headingDeg, shape: { lobe: 'round' }, peakDb }];
  });
  return { ...hidden, patterns: Object.fromEntries(patterns) };
}

/**
 * The gain of an antenna toward an azimuth, dB of signal-to-noise ratio.
 *
 * @throws RangeError for an unknown antenna or band
 */
export function antennaGainDb(
  hidden: HiddenValues,
  antenna: string,
  bandMetres: number,
  azimuthDeg: number,
): number {
  const pattern = hidden.patterns[antenna];
  if (!pattern) throw new RangeError(`antenna "${antenna}" has no pattern`);
  return patternGainDb(pattern, bandMetres, azimuthDeg);
}
