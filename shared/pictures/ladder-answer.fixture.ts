import type { LadderAnswer, LadderAntenna, LadderPair } from '../contracts/ladder.ts';
import { openLadder } from '../contracts/ladder-url.ts';

function antenna(id: number, name: string, marker: string, given: Partial<LadderAntenna>): LadderAntenna {
  return {
    ...{ id, name, marker, headingDeg: null, inService: true, rank: null, chanceBest: null },
    ...{ valueDb: null, intervalDb: null, units: 300, clusters: 90, nights: 14, stations: 60, speaks: true },
    ...given,
  };
}

function pair(a: number, b: number, differenceDb: number, given: Partial<LadderPair> = {}): LadderPair {
  return {
    ...{
      a,
      b,
      differenceDb,
      intervalDb: [differenceDb - 0.6, differenceDb + 0.6],
      p: 0.001,
      pAdjusted: 0.002,
    },
    ...{ units: 120, clusters: 60, nights: 12, stations: 40, weightShare: 0.2, directShare: 0.7 },
    direct: { estimateDb: differenceDb + 0.1, intervalDb: [differenceDb - 0.6, differenceDb + 0.8] },
    indirect: { estimateDb: differenceDb - 0.2, intervalDb: [differenceDb - 1.4, differenceDb + 1] },
    inconsistency: { estimateDb: 0.3, intervalDb: [-1, 1.6] },
    ...{ consistencyP: 0.62, consistent: true },
    ...given,
  };
}

/** A pair that was never heard together: all that is known comes round other antennas. */
const indirectOnly = {
  ...{ units: 0, clusters: 0, nights: 0, stations: 0, weightShare: 0, directShare: null },
  ...{ direct: null, inconsistency: null, consistencyP: null, consistent: null },
} satisfies Partial<LadderPair>;

/**
 * Invented: four antennas on one scale (the fourth out of service, thin and hung on a lone bridge, one pair
 * inconsistent), two on another that nothing links to it, one without units, and two receivers.
 */
export function fixtureLadder(given: Partial<LadderAnswer> = {}): LadderAnswer {
  return {
    question: { ...openLadder, bandMetres: 160 },
    bandMetres: 160,
    bands: [
      { bandMetres: 160, units: 904 },
      { bandMetres: 80, units: 311 },
    ],
    rules: { blockMinutes: 15, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
    marginDb: 1,
    sectorCount: 12,
    sentence:
      'On 160\u2009m North-east wire hears best: 0.6\u2009dB above the next, Vertical, from 904 units of 140 stations in 14 nights.',
    components: [
      {
        referenceAntennaId: null,
        antennas: [
          antenna(1, 'North-east wire', 'N', {
            ...{ headingDeg: 62, valueDb: 1.9, intervalDb: [1.4, 2.4], rank: 1, chanceBest: 0.93 },
          }),
          antenna(2, 'Vertical', 'V', {
            ...{ valueDb: 1.3, intervalDb: [0.7, 1.9], rank: 2, chanceBest: 0.07 },
          }),
          antenna(3, 'South loop', 'S', {
            ...{ headingDeg: 180, valueDb: -0.9, intervalDb: [-1.6, -0.2], rank: 3, chanceBest: 0 },
          }),
          antenna(4, 'Old loop', 'O', {
            ...{ inService: false, valueDb: -2.3, intervalDb: [-5.9, 1.3], rank: 4, chanceBest: 0 },
            ...{ units: 9, clusters: 5, nights: 2, stations: 5, speaks: false },
          }),
        ],
        pairs: [
          pair(1, 4, 4.2, { ...indirectOnly, intervalDb: [0.5, 7.9], p: 0.03, pAdjusted: 0.06 }),
          pair(2, 4, 3.6, { ...indirectOnly, intervalDb: [-0.1, 7.3], p: 0.06, pAdjusted: 0.08 }),
          pair(1, 3, 2.8, {
            direct: { estimateDb: 3.6, intervalDb: [2.9, 4.3] },
            indirect: { estimateDb: 1.1, intervalDb: [0.2, 2] },
            inconsistency: { estimateDb: 2.5, intervalDb: [1.3, 3.7] },
            ...{ consistencyP: 0.0002, consistent: false, weightShare: 0.31 },
          }),
          pair(2, 3, 2.2),
          pair(3, 4, 1.4, {
            ...{
              intervalDb: [-2.2, 5],
              p: 0.4,
              pAdjusted: 0.4,
              units: 9,
              clusters: 5,
              nights: 2,
              stations: 5,
            },
            ...{ weightShare: 0.24, directShare: 1, indirect: null, inconsistency: null },
            ...{ direct: { estimateDb: 1.4, intervalDb: [-2.2, 5] }, consistencyP: null, consistent: null },
          }),
          pair(1, 2, 0.6, { intervalDb: [-0.1, 1.3], p: 0.08, pAdjusted: 0.11 }),
        ],
      },
      {
        referenceAntennaId: null,
        antennas: [
          antenna(5, 'West wire', 'W', { valueDb: 0.8, intervalDb: [0.3, 1.3], rank: 1, chanceBest: 0.99 }),
          antenna(6, 'Low dipole', 'D', {
            ...{ valueDb: -0.8, intervalDb: [-1.3, -0.3], rank: 2, chanceBest: 0.01 },
          }),
        ],
        pairs: [
          pair(5, 6, 1.6, {
            ...{ indirect: null, inconsistency: null, consistencyP: null, consistent: null, directShare: 1 },
          }),
        ],
      },
    ],
    receivers: [
      {
        receivers: [
          {
            ...{ receiverId: 1, callSign: 'EI7QSB-1', label: 'Left' },
            ...{ offsetDb: 0.7, intervalDb: [0.3, 1.1], units: 700, clusters: 200 },
          },
          {
            ...{ receiverId: 2, callSign: 'EI7QSB-2', label: 'Right' },
            ...{ offsetDb: -0.7, intervalDb: [-1.1, -0.3], units: 700, clusters: 200 },
          },
        ],
      },
      {
        receivers: [
          {
            ...{ receiverId: 3, callSign: 'EI7QSB-3', label: 'Fixed' },
            ...{ offsetDb: null, intervalDb: null, units: 0, clusters: 0 },
          },
        ],
      },
    ],
    obstacles: [
      {
        kind: 'unlinked',
        antennaIds: [5, 6],
        receiverIds: [],
        sentence:
          'No unit links West wire and Low dipole to North-east wire, Vertical, South loop and Old loop on 160\u2009m: they were never heard at the same time.',
        cures: [
          'Put Vertical on EI7QSB-1 and West wire on EI7QSB-2 for about 40 minutes.',
          'Or let one receiver alternate between Vertical and West wire, a few minutes each.',
        ],
      },
      {
        kind: 'no units',
        antennaIds: [7],
        receiverIds: [],
        sentence: 'Test loop has no units on 160\u2009m.',
        cures: ['Put Vertical on EI7QSB-1 and Test loop on EI7QSB-2 for about 40 minutes.'],
      },
    ],
    counts: {
      ...{ units: 904, clusters: 260, stations: 140, nights: 14, simultaneous: 700, alternating: 204 },
      ...{ df: 259, draws: 20000 },
    },
    leftOut: {
      ...{ outsideHoursUnits: 0, otherReceiverUnits: 0, otherKindUnits: 0 },
      ...{ bearingUnsureUnits: 41, otherSectorUnits: 0 },
    },
    warnings: [
      'Old loop stands on fewer than 8 station-nights or 3 nights: take the place on the ladder as a hint.',
    ],
    preparation: {
      ...{ rulesKey: 'standing', standing: true, nightsWaiting: 0 },
      ...{ firstNight: '2026-11-01', lastNight: '2026-11-30' },
    },
    ...given,
  };
}
