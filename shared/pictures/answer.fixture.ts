import type { ComparisonAnswer, ComparisonCell } from '../contracts/comparison.ts';
import type { ChartTokens } from './chart-tokens.ts';

/** An invented answer for tests and screenshots: shaped like a real one, computed by no statistics. */
export function fixtureAnswer(overrides: Partial<ComparisonAnswer> = {}): ComparisonAnswer {
  const nights = Array.from({ length: 14 }, (_, index) => `2026-11-${String(index + 1).padStart(2, '0')}`);
  return {
    question: {
      antennaA: 1,
      antennaB: 2,
      fromNight: '2026-11-01',
      toNight: '2026-11-14',
      bandsMetres: [160, 80],
      hours: null,
      sectors: [],
      receivers: [],
      kinds: [],
      rules: null,
      marginDb: null,
      zeros: 'drop',
      clustering: 'one-way',
      hourBasis: 'utc',
    },
    antennas: {
      a: { id: 1, name: 'North-east wire', marker: 'N', headingDeg: 45 },
      b: { id: 2, name: 'Vertical', marker: 'V', headingDeg: null },
    },
    rules: { blockMinutes: 15, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
    marginDb: 1,
    sectorCount: 12,
    verdict: {
      code: 'a clearly better',
      sentence:
        'North-east wire hears 1.8\u2009dB better than Vertical on 160 and 80\u2009m, 95\u2009% interval 1.1 to 2.5\u2009dB, from 412 units of 96 stations in 14 nights.',
      cures: [],
    },
    estimate: {
      estimateDb: 1.8,
      seDb: 0.35,
      df: 211,
      interval95Db: [1.1, 2.5],
      interval90Db: [1.2, 2.4],
      p: 0.0000006,
      designEffect: 1.7,
    },
    counts: {
      units: 412,
      matches: 3120,
      clusters: 212,
      stations: 96,
      nights: 14,
      simultaneous: 371,
      alternating: 41,
    },
    offsets: [
      { receiverId: 1, againstReceiverId: 2, bandMetres: 160, offsetDb: 0.7, intervalDb: [0.3, 1.1] },
      { receiverId: 1, againstReceiverId: 2, bandMetres: 80, offsetDb: -0.2, intervalDb: null },
    ],
    rank: {
      clusterMeanDb: 1.75,
      hodgesLehmannDb: 1.7,
      hodgesLehmannIntervalDb: [1.1, 2.3],
      signedRankP: 0.0000012,
      signTestP: 0.00003,
      pairedTP: 0.0000006,
      effectSizeDz: 0.41,
      chanceAHearsBetter: 0.66,
    },
    equivalence: { p: 0.98, equivalent: false },
    censored: {
      estimateDb: 2.9,
      seDb: 0.4,
      intervalDb: [2.1, 3.7],
      spreadDb: 5.2,
      both: 412,
      onlyA: 160,
      onlyB: 92,
      limits: [
        { receiverId: 1, bandMetres: 160, limitDb: 3 },
        { receiverId: 2, bandMetres: 160, limitDb: 4 },
      ],
      disagrees: true,
      sentence:
        'Counting those 160 heard on North-east wire only and 92 on Vertical only moves the difference from 1.8 to 2.9\u2009dB, more than the margin of 1.0\u2009dB: the plain estimate takes only stations that both heard, which pulls it toward zero.',
    },
    peekProof: {
      tunedForClusters: 200,
      points: nights.map((night, index) => ({
        night,
        clusters: 15 * (index + 1),
        estimateDb: 1.8 + Math.sin(index) / (index + 1),
        intervalDb: index < 2 ? null : [1.8 - 9 / (index + 1), 1.8 + 9 / (index + 1)],
      })),
      sentence:
        'North-east wire hears better, and that may be said however often you look: since the night of 2026-11-05 the peek-proof interval has left zero out (now 1.2 to 2.4\u2009dB).',
    },
    planning: {
      spreadDb: 5.1,
      clustersPerNight: 15.1,
      halfWidthNowDb: 0.7,
      detectableDb: 1,
      precision: [
        { halfWidthDb: 2, clusters: 28, moreNights: 0 },
        { halfWidthDb: 1, clusters: 103, moreNights: 0 },
        { halfWidthDb: 0.5, clusters: 402, moreNights: 13 },
        { halfWidthDb: 0.25, clusters: 1601, moreNights: 92 },
      ],
      power: { clusters: 207, moreNights: 0 },
      sentence:
        'With the data so far a true difference of 1.0\u2009dB would have been found in 80 of 100 cases. That is enough for the margin of 1.0\u2009dB.',
    },
    views: { censored: null, peekProof: null, planning: null },
    histogram: {
      binWidthDb: 1,
      // Two far tails, which the pictures gather at the edges of the axis.
      bins: Array.from({ length: 45 }, (_, index) => {
        const fromDb = index - 22.5;
        const distance = (fromDb + 0.5 - 1.8) / 4.6;
        return { fromDb, units: Math.round(36 * Math.exp(-0.5 * distance * distance)) };
      }).filter((bin) => bin.units > 0),
    },
    sectors: Array.from({ length: 12 }, (_, sector) =>
      cell({
        sector,
        estimateDb: 0.5 + 4 * Math.cos(((sector * 30 + 15 - 45) * Math.PI) / 180),
        clusters: sector === 5 || sector === 8 ? 3 : 12 + sector,
        nights: sector === 5 ? 2 : 9,
      }),
    ).filter((one) => one.sector !== 6),
    bandHours: {
      basis: 'utc',
      cells: [160, 80].flatMap((bandMetres) =>
        [17, 18, 19, 20, 21, 22, 23, 0, 1, 2, 3, 4, 5, 6, 7].map((hour, index) =>
          cell({
            bandMetres,
            hour,
            estimateDb: (bandMetres === 160 ? 2.2 : 0.3) + 1.6 * Math.sin(index / 2),
            clusters: index < 2 || (bandMetres === 80 && hour === 7) ? 4 : 9 + index,
            nights: index < 2 ? 2 : 8,
          }),
        ),
      ),
    },
    nights: nights.map((night, index) =>
      cell({
        night,
        estimateDb: 1.8 + 1.9 * Math.sin(index * 1.7),
        clusters: index === 4 ? 3 : 10 + (index % 5),
        nights: 1,
        halfWidthDb: index === 9 ? 16 : 1.8 + (index % 4) * 0.5,
      }),
    ),
    pooling: {
      sectors: {
        cells: 9,
        meanDb: 0.9,
        intervalDb: [-0.8, 2.6],
        tauDb: 2.6,
        q: 31.2,
        df: 8,
        p: 0.0001,
        iSquared: 0.74,
        sentence:
          'The directions truly differ, by about 2.6\u2009dB around their mean: 74\u2009% of the spread between them is more than chance.',
      },
      bandHours: null,
      nights: null,
    },
    heardOnlySectors: [
      {
        sector: 1,
        onlyA: 14,
        onlyB: 3,
        oddsRatio: 4.67,
        intervalRatio: [1.3, 25.3],
        midP: 0.008,
        pAdjusted: 0.02,
      },
      {
        sector: 9,
        onlyA: 5,
        onlyB: 0,
        oddsRatio: null,
        intervalRatio: [0.92, null],
        midP: 0.03,
        pAdjusted: 0.03,
      },
    ],
    fairness: {
      exclusions: {
        guardedSpots: 812,
        untaggedSpots: 40,
        doubledSpots: 3,
        bearingUnsureUnits: 27,
        outsideHoursUnits: 0,
        otherReceiverUnits: 0,
        otherKindUnits: 0,
      },
      receiverBalance: [
        { receiverId: 1, unitsOnA: 190, unitsOnB: 181 },
        { receiverId: 2, unitsOnA: 181, unitsOnB: 190 },
      ],
      listening: { aHours: 71.5, bHours: 69.25 },
      separable: true,
      heardOnly: {
        onA: 160,
        onB: 92,
        stationsOnlyA: 41,
        stationsOnlyB: 22,
        oddsRatio: 1.86,
        oddsRatioInterval: [1.09, 3.24],
        exactP: 0.022,
        midP: 0.018,
      },
      halfWeightStations: 14,
      warnings: ['One station, EA8QSH, carries 11\u2009% of all units.'],
    },
    stations: [
      row('EA8QSH', 'Canary Islands', 203, 2790, 45, 1.2),
      row('W1QTB', 'United States', 285, 4710, 31, -0.6),
      row('UA4QRC', 'Russia', 62, 3480, 22, 4.1),
      row('G4QUM/P', null, null, null, 9, 2.25),
    ],
    stationsTruncated: false,
    preparation: {
      rulesKey: 'standing',
      standing: true,
      nightsWaiting: 0,
      firstNight: '2026-11-01',
      lastNight: '2026-11-14',
    },
    ...overrides,
  };
}

/** One cell; whether it speaks follows from its clusters and nights as the contract says. */
export function cell(
  given: Partial<ComparisonCell> & { estimateDb: number; clusters: number; halfWidthDb?: number },
): ComparisonCell {
  const { halfWidthDb = 6 / Math.sqrt(given.clusters), ...rest } = given;
  return {
    bandMetres: null,
    sector: null,
    hour: null,
    night: null,
    units: given.clusters * 2,
    nights: 1,
    intervalDb: [given.estimateDb - halfWidthDb, given.estimateDb + halfWidthDb],
    p: 0.04,
    pAdjusted: 0.09,
    pooledDb: null,
    pooledIntervalDb: null,
    speaks: given.clusters >= 8 && (given.night != null || (given.nights ?? 1) >= 3),
    ...rest,
  };
}

function row(
  call: string,
  country: string | null,
  azimuthDeg: number | null,
  distanceKm: number | null,
  units: number,
  meanDb: number,
): ComparisonAnswer['stations'][number] {
  return {
    call,
    country,
    azimuthDeg,
    distanceKm,
    units,
    nights: Math.ceil(units / 4),
    meanDb,
    onlyA: 3,
    onlyB: 1,
  };
}

/** Colours that no two tokens share, so that a test can tell what was painted with what. */
export const fixtureTokens: ChartTokens = {
  theme: 'dark',
  ground: '#010101',
  surface: '#101010',
  raised: '#202020',
  line: '#303030',
  edge: '#707070',
  text: '#f0f0f0',
  muted: '#a0a0a0',
  accent: '#ffff00',
  ok: '#00ff00',
  caution: '#fff000',
  danger: '#ff0000',
  'diff-a': '#ff8000',
  'diff-b': '#0080ff',
  'diff-zero': '#101010',
  hatch: '#606162',
  font: 'sans-serif',
  antennaLine: (colour) => `#00000${colour}`,
  smallPx: 13,
  bodyPx: 15,
};
