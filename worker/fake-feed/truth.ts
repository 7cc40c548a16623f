import { antennaGainDb, demoHiddenValues, withoutDirections, type HiddenValues } from './hidden-values.ts';
import { createStationPopulation, type SimulatedStation } from './station-population.ts';
import type { Scenario } from './scenario.ts';

/**
 * The truth behind the simulated nights. Only tests may import this file (a lint rule holds the program
 * to it): an answer that could peek at the truth would prove nothing.
 */
export interface Truth {
  /** An antenna's gain toward an azimuth, dB of signal-to-noise ratio. */
  trueGainDb(antenna: string, bandMetres: number, azimuthDeg: number): number;
  /** What a receiver adds to every report on a band, dB. */
  receiverOffsetDb(receiver: string, bandMetres: number): number;
  /**
   * How much better `antennaA` truly hears than `antennaB`, dB.
   *
   * In the ideal study it is one number a band. In the demo it depends on who was heard, so that a
   * comparison over many directions has a truth only for its own mix of stations: give the calls of its
   * units with their counts (`calls`), or one direction (`azimuthDeg`). With neither, all stations of the
   * population count the same, which no real night does.
   */
  trueDifferenceDb(antennaA: string, antennaB: string, bandMetres: number, mix?: TruthMix): number;
}

export interface TruthMix {
  azimuthDeg?: number;
  /** Weight by call sign, such as the number of its units. Calls that no station has throw a RangeError. */
  calls?: ReadonlyMap<string, number>;
}

export function createTruth(options: {
  seed: number;
  scenario: Scenario;
  hidden?: HiddenValues;
  study?: boolean;
}): Truth {
  const { seed, scenario, study = false } = options;
  const given = options.hidden ?? demoHiddenValues;
  const hidden = study ? withoutDirections(given) : given;
  const stations = createStationPopulation(seed, scenario.place, scenario.bandsMetres);
  const byCall = new Map(stations.map((station) => [station.call, station]));
  const trueGainDb = (antenna: string, bandMetres: number, azimuthDeg: number): number =>
    antennaGainDb(hidden, antenna, bandMetres, azimuthDeg);

  const weighted = (calls: ReadonlyMap<string, number>): [SimulatedStation, number][] =>
    [...calls].map(([call, weight]) => {
      const station = byCall.get(call);
      if (!station) throw new RangeError(`no simulated station has the call ${call}`);
      return [station, weight];
    });

  return {
    trueGainDb,
    receiverOffsetDb(receiver, bandMetres) {
      const offsetDb = hidden.offsetsDb[receiver]?.[bandMetres];
      if (offsetDb === undefined)
        throw new RangeError(`receiver ${receiver} has no offset on ${bandMetres} m`);
      return offsetDb;
    },
    trueDifferenceDb(antennaA, antennaB, bandMetres, mix = {}) {
      const differenceDb = (azimuthDeg: number): number =>
        trueGainDb(antennaA, bandMetres, azimuthDeg) - trueGainDb(antennaB, bandMetres, azimuthDeg);
      if (mix.azimuthDeg !== undefined) return differenceDb(mix.azimuthDeg);
      const shares: [SimulatedStation, number][] = mix.calls
        ? weighted(mix.calls)
        : stations.map((station) => [station, 1]);
      const total = shares.reduce((sum, [, weight]) => sum + weight, 0);
      if (!(total > 0)) throw new RangeError('calls must hold at least one call with a weight above 0');
      return shares.reduce(
        (sum, [station, weight]) => sum + (weight / total) * differenceDb(station.azimuthDeg),
        0,
      );
    },
  };
}
