/**
 * Half an hour at the invented station: two receivers, two antennas, thirteen spots. Most examples of how spots become
 * units are this one, run through the program's own pairing.
 */
import { formatUtcTime } from '../format.ts';
import {
  GUARDED,
  STANDING_RULES,
  UNTAGGED,
  dwellColumns,
  heardOnlyRowsOf,
  pairSpots,
  spotColumns,
  tagSpots,
  unitRowsOf,
} from '../pairing/index.ts';
import type { DwellRow, PairingRules, SpotRow } from '../pairing/index.ts';

const startMs = Date.UTC(2026, 10, 14, 20);
const minute = 60_000;
const at = (minutes: number, seconds = 0) => startMs + minutes * minute + seconds * 1000;

/** The blocks that start in the half hour. */
export const exampleWindow = { startMs, endMs: startMs + 30 * minute };

export const antennaNames: Readonly<Record<number, string>> = { 1: 'North-east wire', 2: 'Vertical' };
export const receiverNames: Readonly<Record<number, string>> = { 1: 'receiver 1', 2: 'receiver 2' };
const callSigns: Readonly<Record<number, string>> = { 1: 'EA8QSH', 2: 'K1QRB', 3: 'UA9QSM' };

export const exampleDwells: readonly DwellRow[] = [
  { receiver: 1, antenna: 1, startMs: at(-30), endMs: at(8) },
  { receiver: 1, antenna: 2, startMs: at(8), endMs: at(40) },
  { receiver: 2, antenna: 2, startMs: at(-30), endMs: at(15) },
];

const spot = (receiver: number, call: number, timeMs: number, freqKhz: number, snrDb: number): SpotRow => ({
  ...{ receiver, call, timeMs, snrDb, band: 160 },
  freq100Hz: Math.round(freqKhz * 10),
});

export const exampleSpots: readonly SpotRow[] = [
  spot(1, 1, at(1, 10), 1822.3, 24),
  spot(2, 1, at(1, 14), 1822.3, 19),
  spot(1, 2, at(2, 5), 1825.1, 14),
  spot(2, 2, at(2, 31), 1825.2, 12),
  spot(1, 1, at(4, 40), 1822.3, 22),
  spot(2, 1, at(4, 41), 1822.4, 20),
  spot(1, 3, at(5, 50), 1830, 7),
  spot(1, 2, at(6, 30), 1825.1, 16),
  spot(1, 1, at(8, 12), 1822.3, 18),
  spot(1, 1, at(9, 30), 1822.3, 18),
  spot(1, 2, at(11), 1825.1, 13),
  spot(2, 1, at(12, 45), 1822.3, 17),
  spot(2, 1, at(16), 1822.3, 18),
];

export const callOf = (call: number): string => callSigns[call]!;
export const antennaOf = (antenna: number): string => antennaNames[antenna] ?? 'none';
export const clock = (timeMs: number): string => formatUtcTime(timeMs, true);

export function tagged(guardSeconds = STANDING_RULES.guardSeconds) {
  const tags = tagSpots(spotColumns(exampleSpots), dwellColumns(exampleDwells), guardSeconds);
  return exampleSpots.map((row, i) => ({
    ...row,
    antenna: tags.antenna[i]!,
    tag: tags.tag[i] === GUARDED ? 'guard' : tags.tag[i] === UNTAGGED ? 'no dwell' : 'counts',
  }));
}

export function paired(rules: Partial<PairingRules> = {}) {
  const result = pairSpots(
    spotColumns(exampleSpots),
    dwellColumns(exampleDwells),
    { ...STANDING_RULES, ...rules },
    exampleWindow,
  );
  return {
    matches: result.matches,
    units: unitRowsOf(result.units),
    heardOnly: heardOnlyRowsOf(result.heardOnly),
  };
}
