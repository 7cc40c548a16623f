import type { BandMetres, ItuRegion } from '../../shared/radio/bands.ts';
import { nightDate, nightIndexOf, nightIndexOfDate } from '../../shared/radio/night.ts';
import type { Place } from '../../shared/radio/place.ts';

/**
 * The demo station as its owners would describe it: what stands in the field and what the switch did. All
 * of it is known to the program. What the antennas really do is in `hidden-values.ts`, which the program
 * must never read.
 */
export interface ScenarioAntenna {
  name: string;
  /** Short mark for charts. */
  marker: string;
  kind: 'long wire' | 'loop' | 'vertical' | 'phased pair' | 'dipole' | 'other';
  /** Degrees from true north; null for an antenna without a direction. */
  headingDeg: number | null;
  beamwidthDeg: number | null;
  lengthM: number;
  heightM: number;
  /** First and last night's date in service (both included), `YYYY-MM-DD`; null: no such date. */
  inServiceFrom: string | null;
  inServiceTo: string | null;
  notes: string;
}

export interface ScenarioReceiver {
  /** Call sign under which the receiver reports. */
  callSign: string;
  label: string;
  notes: string;
  /** Name of the antenna it is wired to; null when it hangs on the switch. */
  fixedAntenna: string | null;
}

/** A stretch of time of one receiver (or all on the switch), as clock minutes after the night's noon. */
export interface ScenarioMishap {
  /** Nights after the first. */
  night: number;
  receivers: readonly string[];
  /** Minutes after local solar noon, half-open. */
  fromMinute: number;
  toMinute: number;
  /** `unlogged`: switching went on, nobody wrote it down. `off`: the receiver itself was down. */
  kind: 'unlogged' | 'off';
  note: string;
}

export interface Scenario {
  stationName: string;
  callSign: string;
  locator: string;
  /** The middle of the locator's square. */
  place: Place;
  timeZone: string;
  ituRegion: ItuRegion;
  /** UTC date on which the first night begins, `YYYY-MM-DD`. */
  firstNight: string;
  antennas: readonly ScenarioAntenna[];
  receivers: readonly ScenarioReceiver[];
  /** Bands worked, metres. */
  bandsMetres: readonly BandMetres[];
  /** Minutes each antenna stays on a receiver while the switching plan runs. */
  dwellMinutes: number;
  /** The switching plan runs from this long before sunset to this long after sunrise. */
  planMarginMinutes: number;
  /** Where the switched receivers rest by day. */
  restingAntennas: readonly string[];
  mishaps: readonly ScenarioMishap[];
}

export const demoSeed = 4077;
export const demoNights = 30;
const demoPlace: Place = { latitude: 53.5, longitude: -9 };

function dateAfter(date: string, days: number): string {
  return nightDate(nightIndexOfDate(date) + days);
}

/**
 * The date of the demo's first night, when `nights` whole nights shall lie before the night of `nowMs`.
 *
 * @param nowMs UTC, milliseconds
 * @returns `YYYY-MM-DD`
 */
export function demoFirstNight(nowMs: number, nights = demoNights): string {
  return nightDate(nightIndexOf(nowMs, demoPlace.longitude) - nights);
}

/**
 * The demo scenario: the invented Corrib Low Band Group.
 *
 * @param firstNight `YYYY-MM-DD`, see `demoFirstNight`
 */
export function createDemoScenario(firstNight: string): Scenario {
  const both = ['EI7QSA', 'EI7QSC'];
  return {
    stationName: 'Corrib Low Band Group',
    callSign: 'EI7QSB',
    locator: 'IO53',
    place: demoPlace,
    timeZone: 'Europe/Dublin',
    ituRegion: 1,
    firstNight,
    bandsMetres: [160, 80, 40, 30],
    dwellMinutes: 5,
    planMarginMinutes: 90,
    restingAntennas: ['Vertical', 'West wire'],
    receivers: [
      { callSign: 'EI7QSA', label: 'Switch port 1', notes: 'In the rack, left.', fixedAntenna: null },
      { callSign: 'EI7QSC', label: 'Switch port 2', notes: 'In the rack, right.', fixedAntenna: null },
      {
        callSign: 'EI7QSD',
        label: 'Reference',
        notes: 'Wired to the vertical through a splitter, never switched.',
        fixedAntenna: 'Vertical',
      },
    ],
    antennas: [
      {
        name: 'North-east wire',
        marker: 'N',
        kind: 'long wire',
        headingDeg: 55,
        beamwidthDeg: 75,
        lengthM: 176,
        heightM: 1.8,
        inServiceFrom: dateAfter(firstNight, -760),
        inServiceTo: null,
        notes: 'Terminated at the far end by the stream. Sheep keep the grass down.',
      },
      {
        name: 'West wire',
        marker: 'W',
        kind: 'long wire',
        headingDeg: 285,
        beamwidthDeg: 80,
        lengthM: 160,
        heightM: 2,
        inServiceFrom: dateAfter(firstNight, -752),
        inServiceTo: null,
        notes: 'Terminated. Runs along the bog wall.',
      },
      {
        name: 'South wire',
        marker: 'S',
        kind: 'long wire',
        headingDeg: 165,
        beamwidthDeg: 70,
        lengthM: 120,
        heightM: 1.5,
        inServiceFrom: dateAfter(firstNight, -411),
        inServiceTo: null,
        notes: 'Open at the far end, so it hears both ways.',
      },
      {
        name: 'Vertical',
        marker: 'V',
        kind: 'vertical',
        headingDeg: null,
        beamwidthDeg: null,
        lengthM: 9,
        heightM: 9,
        inServiceFrom: dateAfter(firstNight, -1103),
        inServiceTo: null,
        notes: 'The reference. Eight short radials, splitter at the foot feeds the reference receiver.',
      },
      {
        name: 'Small loop south',
        marker: 'L',
        kind: 'loop',
        headingDeg: 160,
        beamwidthDeg: 140,
        lengthM: 13,
        heightM: 4.5,
        inServiceFrom: dateAfter(firstNight, -388),
        inServiceTo: null,
        notes: 'Resistor in the side away from the feed point.',
      },
      {
        name: 'Small loop west',
        marker: 'O',
        kind: 'loop',
        headingDeg: 295,
        beamwidthDeg: 140,
        lengthM: 13,
        heightM: 4.5,
        inServiceFrom: dateAfter(firstNight, -380),
        inServiceTo: null,
        notes: 'Twin of the southern loop, forty metres from the barn.',
      },
      {
        name: 'Phased pair',
        marker: 'P',
        kind: 'phased pair',
        headingDeg: 80,
        beamwidthDeg: 110,
        lengthM: 7.5,
        heightM: 7.5,
        inServiceFrom: dateAfter(firstNight, 6),
        inServiceTo: null,
        notes: 'Two short verticals 20 m apart. New this season.',
      },
      {
        name: 'Ground wire',
        marker: 'G',
        kind: 'long wire',
        headingDeg: 20,
        beamwidthDeg: null,
        lengthM: 75,
        heightM: 0,
        inServiceFrom: dateAfter(firstNight, -1040),
        inServiceTo: dateAfter(firstNight, 24),
        notes: 'Laid on the grass. Taken up when the field was let.',
      },
    ],
    mishaps: [
      {
        night: 4,
        receivers: both,
        fromMinute: 804,
        toMinute: 859,
        kind: 'unlogged',
        note: 'The log page was left open on the last line.',
      },
      {
        night: 9,
        receivers: ['EI7QSD'],
        fromMinute: 1289,
        toMinute: 1303,
        kind: 'off',
        note: 'Reference receiver restarted after an update.',
      },
      {
        night: 11,
        receivers: both,
        fromMinute: 120,
        toMinute: 545,
        kind: 'unlogged',
        note: 'Nobody kept the log this evening.',
      },
      {
        night: 17,
        receivers: ['EI7QSC'],
        fromMinute: 504,
        toMinute: 575,
        kind: 'off',
        note: 'Second receiver hung; restarted from the house.',
      },
    ],
  };
}
