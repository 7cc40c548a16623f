import type { Station } from '../../../shared/contracts/station.ts';
import type { StationDraft } from './station-drafts.ts';
import { THIN_SPACE, formatNumber } from '../../../shared/format.ts';

type RuleKey =
  'guardSeconds' | 'blockMinutes' | 'windowSeconds' | 'freqToleranceKhz' | 'marginDb' | 'sectorCount';

export interface RuleWords {
  key: RuleKey & keyof StationDraft;
  word: string;
  unit?: string;
  /** What it means, for somebody who has never read about the method. */
  explains: string;
  value: (station: Station) => string;
}

const withUnit = (value: number, unit: string, decimals = 0) =>
  `${formatNumber(value, decimals)}${THIN_SPACE}${unit}`;

/** The standing rules, in the order in which they act on a spot. */
export const ruleWords: readonly RuleWords[] = [
  {
    key: 'guardSeconds',
    word: 'Guard',
    unit: 's',
    explains:
      'Seconds after a switch whose spots are left out: nobody knows yet which antenna they came from.',
    value: (station) => withUnit(station.guardSeconds, 's'),
  },
  {
    key: 'blockMinutes',
    word: 'Block',
    unit: 'min',
    explains:
      'Slice of time in which two antennas are compared. Short blocks keep fading and drift out; long ones find more pairs.',
    value: (station) => withUnit(station.blockMinutes, 'min'),
  },
  {
    key: 'windowSeconds',
    word: 'Time window',
    unit: 's',
    explains: 'How far apart two receivers may have heard a station for it to count as the same moment.',
    value: (station) => withUnit(station.windowSeconds, 's'),
  },
  {
    key: 'freqToleranceKhz',
    word: 'Frequency tolerance',
    unit: 'kHz',
    explains: 'How far apart in frequency two spots may be for them to count as the same transmission.',
    value: (station) => withUnit(station.freqToleranceKhz, 'kHz', 1),
  },
  {
    key: 'marginDb',
    word: 'Margin',
    unit: 'dB',
    explains: 'A difference below this makes no practical difference: either antenna will do.',
    value: (station) => withUnit(station.marginDb, 'dB', 1),
  },
  {
    key: 'sectorCount',
    word: 'Sectors',
    explains: 'How many slices the compass is cut into. More slices say more, and need more nights.',
    value: (station) => `${station.sectorCount} of ${withUnit(360 / station.sectorCount, 'degrees')}`,
  },
];
