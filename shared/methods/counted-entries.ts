import {
  countOf,
  formatBand,
  formatDb,
  formatDegrees,
  formatDuration,
  formatHeading,
  formatKm,
  formatLevel,
  formatNumber,
  formatUtc,
  formatUtcTime,
  THIN_SPACE,
} from '../format.ts';
import {
  ALTERNATING,
  STANDING_RULES,
  dwellColumns,
  heardOnlyRowsOf,
  pairSpots,
  spotColumns,
} from '../pairing/index.ts';
import type { SpotRow } from '../pairing/index.ts';
import { pathWithSpread, sectorOf, sectorUnsure } from '../radio/geodesic.ts';
import { isRefusal } from '../radio/place.ts';
import type { Place } from '../radio/place.ts';
import { parseLocator } from '../radio/locator.ts';
import { nightDate, nightIndexOf } from '../radio/night.ts';
import { pathSun, Sun, StationNights } from '../radio/sun.ts';
import { clusterIds } from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import {
  antennaNames,
  antennaOf,
  callOf,
  clock,
  exampleDwells,
  exampleSpots,
  exampleWindow,
  paired,
  receiverNames,
  tagged,
} from './worked-spots.ts';

const spotHead = ['Time', 'Receiver', 'Call', 'kHz', 'SNR'];
const spotCells = (row: SpotRow) => [
  clock(row.timeMs),
  receiverNames[row.receiver]!,
  callOf(row.call),
  (row.freq100Hz / 10).toFixed(1),
  formatLevel(row.snrDb),
];
const spotTable = {
  caption: `Thirteen spots on ${formatBand(160)}, 14 November 2026`,
  head: spotHead,
  rows: exampleSpots.map(spotCells),
};
const dwellTable = {
  caption: 'The switch log of that hour',
  head: ['Receiver', 'Antenna', 'From', 'To'],
  rows: exampleDwells.map((row) => [
    receiverNames[row.receiver]!,
    antennaOf(row.antenna),
    formatUtcTime(row.startMs),
    formatUtcTime(row.endMs),
  ]),
};

const inSeconds = (seconds: number) => `${seconds}${THIN_SPACE}s`;

function locatorPlace(locator: string): Place & { radiusKm: number } {
  const cell = parseLocator(locator);
  if (isRefusal(cell)) throw new RangeError(cell.reason);
  return cell;
}
const home = locatorPlace('IO53');

export const spot: MethodEntry = {
  id: 'spot',
  title: 'Spot',
  asks: 'Which antenna was this station heard on?',
  text: [
    'A spot is one report of a skimmer: this receiver heard this call sign on this frequency, at this time, with this SNR in whole dB.',
    'The switch log says which antenna the receiver was on at that moment, and that antenna becomes the spot\u2019s tag. A spot in the guard after a switch is kept but never counted; so is a spot at a time for which the log is empty.',
    'Two spots of one receiver that agree in second, call sign and frequency are one spot. A time that is known to the minute only carries an uncertainty of 60 seconds: when a switch falls inside it, the spot is treated as in the guard.',
  ],
  example: () => ({
    words:
      'The Corrib Low Band Group, two receivers, one switch at 20:08. Each spot takes the antenna of the dwell that it falls into.',
    tables: [
      dwellTable,
      {
        caption: spotTable.caption,
        head: [...spotHead, 'Antenna', 'Tag'],
        rows: tagged().map((row) => [...spotCells(row), antennaOf(row.antenna), row.tag]),
      },
    ],
    results: ['counts', 'guard', 'no dwell'].map((tag) => ({
      label: tag,
      value: countOf(tagged().filter((row) => row.tag === tag).length, 'spot'),
    })),
  }),
  sources: ['Our own rule.'],
  related: ['dwell', 'guard', 'unit'],
};

export const dwell: MethodEntry = {
  id: 'dwell',
  title: 'Dwell and switch log',
  asks: 'What was this receiver connected to, and when?',
  text: [
    'A dwell is one stretch of time during which one receiver was on one antenna. It holds its first moment and leaves out its last, so that two dwells can meet without a moment that belongs to both.',
    'All dwells together are the switch log. Two dwells of one receiver can never overlap: the database refuses it.',
    'When the log is corrected, the spots of that stretch are tagged anew and every answer that used them is worked out again.',
  ],
  example: () => ({
    words: 'The log of the example, with its gaps: receiver 2 has no dwell after 20:15.',
    tables: [
      {
        ...dwellTable,
        head: [...dwellTable.head, 'Length'],
        rows: exampleDwells.map((row, i) => [
          ...dwellTable.rows[i]!,
          formatDuration((row.endMs - row.startMs) / 1000),
        ]),
      },
    ],
    results: [
      {
        label: `Spot of 20:16:00 on ${receiverNames[2]}`,
        value: tagged().at(-1)!.tag,
      },
    ],
  }),
  sources: ['Our own rule.'],
  related: ['spot', 'guard'],
};

export const guard: MethodEntry = {
  id: 'guard',
  title: 'Guard',
  asks: 'Why does a spot right after a switch not count?',
  text: [
    'A skimmer decodes for some seconds before it reports. A spot right after a switch may therefore still tell of the antenna before.',
    `The guard is the stretch after each switch whose spots are left out: ${STANDING_RULES.guardSeconds} seconds unless the station sets another.`,
    'Guarded spots stay in the list with their tag, and every answer says how many it left out. A longer guard is safer and costs spots; the sensitivity panel shows whether it changes the answer.',
  ],
  formula: ['left out when t < start of the dwell + guard'],
  example: () => {
    const kept = (seconds: number) => {
      const ofDwell = tagged(seconds).filter(
        (row) => row.receiver === 1 && row.timeMs >= exampleDwells[1]!.startMs,
      );
      return ofDwell.map((row) => [
        inSeconds(seconds),
        clock(row.timeMs),
        inSeconds((row.timeMs - exampleDwells[1]!.startMs) / 1000),
        row.tag,
      ]);
    };
    return {
      words: 'Receiver 1 was switched to the Vertical at 20:08:00. The same three spots under two guards:',
      tables: [
        {
          caption: 'Spots after the switch',
          head: ['Guard', 'Spot', 'After the switch', 'Tag'],
          rows: [...kept(STANDING_RULES.guardSeconds), ...kept(120)],
        },
      ],
      results: [
        {
          label: `Left out by a guard of ${inSeconds(STANDING_RULES.guardSeconds)}`,
          value: countOf(tagged().filter(({ tag }) => tag === 'guard').length, 'spot'),
        },
        {
          label: `Left out by a guard of ${inSeconds(120)}`,
          value: countOf(
            tagged(120).filter(({ tag, receiver }) => tag === 'guard' && receiver === 1).length,
            'spot',
          ),
        },
      ],
    };
  },
  sources: ['Our own rule.'],
  related: ['spot', 'sensitivity'],
};

export const block: MethodEntry = {
  id: 'block',
  title: 'Block',
  asks: 'How close in time must two reports be to be comparable?',
  text: [
    `A block is a slice of the clock, ${STANDING_RULES.blockMinutes} minutes long unless changed (5, 10, 15, 20, 30 or 60), starting on the full hour in UTC. Two antennas are only ever compared inside one block.`,
    'Short blocks follow the fading better, long blocks collect more. A match of two spots belongs to the block of the moment half-way between them.',
  ],
  example: () => {
    const lengths = [5, 15, 30];
    return {
      words: 'The same thirteen spots, cut into blocks of three lengths.',
      tables: [
        {
          caption: 'Units by block length',
          head: ['Block', 'Units', 'of them alternating'],
          rows: lengths.map((blockMinutes) => {
            const { units } = paired({ blockMinutes });
            return [
              formatDuration(blockMinutes * 60),
              String(units.length),
              String(units.filter(({ kind }) => kind === ALTERNATING).length),
            ];
          }),
        },
      ],
      results: [
        {
          label: 'Block of the spot of 20:12:45',
          value: `${formatUtcTime(exampleSpots[0]!.timeMs - (exampleSpots[0]!.timeMs % 900_000))} to 20:15Z`,
        },
      ],
    };
  },
  sources: ['Our own rule.'],
  related: ['unit', 'sensitivity'],
};

export const unit: MethodEntry = {
  id: 'unit',
  title: 'Unit',
  asks: 'By how many dB did one antenna hear this station better, just now?',
  text: [
    'A unit is one station on one band in one block, heard on both antennas: one difference in dB, above zero when the first antenna hears better. Everything else is built from units.',
    `Simultaneous units come from two receivers, one on each antenna. Each spot is matched with the other receiver\u2019s spot of the same station that is nearest in time, if each is the other\u2019s nearest, they are at most ${STANDING_RULES.windowSeconds} seconds and ${STANDING_RULES.freqToleranceKhz} kHz apart; the unit is the mean of these differences.`,
    'Alternating units come from one receiver that was on both antennas within the block: the mean SNR on one less the mean SNR on the other. They know no receiver difference, but the fading between the two listens goes into them.',
  ],
  formula: [
    'simultaneous: d = mean of (SNR on A \u2212 SNR on B) over the matches of the block',
    'alternating: d = mean SNR on A \u2212 mean SNR on B',
  ],
  example: () => {
    const { units, matches } = paired();
    return {
      words:
        'The first antenna is the North-east wire. Thirteen spots make these units in the block from 20:00:',
      tables: [
        spotTable,
        {
          caption: 'Units',
          head: ['Call', 'Kind', 'Spots on wire', 'on Vertical', 'Difference'],
          rows: units.map((row) => [
            callOf(row.call),
            row.kind === ALTERNATING
              ? `alternating, ${receiverNames[row.receiverA]}`
              : `simultaneous, ${receiverNames[row.receiverA]} and ${row.receiverB}`,
            String(row.countA),
            String(row.countB),
            formatDb(row.differenceDb),
          ]),
        },
      ],
      results: [
        { label: 'Matches of two receivers', value: String(matches) },
        { label: 'Units', value: String(units.length) },
      ],
      close:
        'EA8QSH by two receivers: (24 \u2212 19) and (22 \u2212 20), on average 3.5. UA9QSM was heard on one antenna only and makes no unit.',
    };
  },
  sources: ['Our own rule; matching by mutual nearest neighbours is common practice in data matching.'],
  related: ['block', 'heard-only', 'estimate', 'receiver-offsets'],
};

const listeningDwells = [
  { receiver: 1, antenna: 1, startMs: exampleDwells[0]!.startMs, endMs: exampleDwells[1]!.endMs },
  { receiver: 2, antenna: 2, startMs: exampleDwells[0]!.startMs, endMs: exampleDwells[1]!.endMs },
];

export const heardOnly: MethodEntry = {
  id: 'heard-only',
  title: 'Heard-only',
  asks: 'What about stations that only one of the antennas heard?',
  text: [
    'A weak station that only the better antenna pulls out of the noise leaves no difference behind, but it says which antenna heard it. Such a station counts once per block as heard-only.',
    'It counts only in blocks in which both antennas were listened to, outside guards, for at least two minutes each and for times that differ by at most 20 per cent: otherwise the longer listen would win by its length.',
    'The time of an antenna is the sum over its receivers, because two receivers have two chances.',
  ],
  formula: [
    'listened alike: |time on A \u2212 time on B| \u2264 0.2 \u00d7 the longer time, both \u2265 2 min',
  ],
  example: () => {
    const result = pairSpots(
      spotColumns(exampleSpots.filter((row) => row.timeMs < exampleDwells[1]!.startMs)),
      dwellColumns(listeningDwells),
      STANDING_RULES,
      exampleWindow,
    );
    const short = paired();
    return {
      words:
        'The first eight spots of the example, had neither receiver been switched: receiver 1 on the wire and receiver 2 on the Vertical for the whole block.',
      tables: [
        {
          caption: 'Heard on one antenna only',
          head: ['Call', 'Heard on', 'Spots'],
          rows: heardOnlyRowsOf(result.heardOnly).map((row) => [
            callOf(row.call),
            row.side === 0 ? antennaNames[1]! : antennaNames[2]!,
            String(row.count),
          ]),
        },
      ],
      results: [
        { label: 'Heard-only, both listened to all the time', value: String(result.heardOnly.call.length) },
        { label: 'Heard-only as it really was, switched at 20:08', value: String(short.heardOnly.length) },
      ],
      close:
        'With the switch, the wire was listened to for 8 minutes and the Vertical for more than twice as long: the block says nothing about who was missed.',
    };
  },
  sources: ['Our own rule.'],
  related: ['odds-ratio', 'censored'],
};

export const night: MethodEntry = {
  id: 'night',
  title: 'Night',
  asks: 'To which night does one in the morning belong?',
  text: [
    'A night runs from local solar noon to the next, so that an evening and the morning after it stay together. It carries the date of its evening.',
    'Mean solar time is used: UTC plus the longitude divided by 15 degrees an hour. A block belongs to the night in which it starts.',
  ],
  formula: ['date of the night = date of (UTC + longitude / 15 h \u2212 12 h)'],
  example: () => {
    const moments = ['2026-11-14T12:30Z', '2026-11-14T20:00Z', '2026-11-15T01:00Z', '2026-11-15T12:45Z'];
    return {
      words: `The station of the example lies at ${formatNumber(Math.abs(home.longitude), 0)}\u00b0 west.`,
      tables: [
        {
          caption: 'Moments and their nights',
          head: ['UTC', 'Night'],
          rows: moments.map((text) => [
            formatUtc(text),
            nightDate(nightIndexOf(Date.parse(text), home.longitude)),
          ]),
        },
      ],
      results: [
        {
          label: 'Solar noon at the station',
          value: formatUtcTime(Date.UTC(2026, 10, 14, 12) - home.longitude * 240_000),
        },
      ],
    };
  },
  sources: ['Our own rule.'],
  related: ['station-night', 'hours'],
};

const clusterRows = [
  ['EA8QSH', '2026-11-14', 3],
  ['EA8QSH', '2026-11-14', 4],
  ['EA8QSH', '2026-11-14', 3.5],
  ['EA8QSH', '2026-11-15', 1],
  ['K1QRB', '2026-11-14', 2],
  ['K1QRB', '2026-11-14', 1],
] as const;

export const stationNight: MethodEntry = {
  id: 'station-night',
  title: 'Station-night',
  asks: 'How many independent witnesses are there, really?',
  text: [
    'The units of one station in one night share its antenna, its power, its path and the weather of that night. Twenty of them are not twenty witnesses, more like one that repeats itself.',
    'All units of one call sign in one night are therefore one cluster, the station-night. Intervals and tests take station-nights as independent of each other, never single units.',
  ],
  example: () => {
    const keys = clusterRows.map(([call, date]) => `${call} ${date}`);
    const { ids, count } = clusterIds(keys);
    return {
      words: 'Six units of two stations in two nights:',
      tables: [
        {
          caption: 'Units and their station-nights',
          head: ['Call', 'Night', 'Difference', 'Station-night'],
          rows: clusterRows.map(([call, date, db], i) => [call, date, formatDb(db), String(ids[i]! + 1)]),
        },
      ],
      results: [
        { label: 'Units', value: String(clusterRows.length) },
        { label: 'Station-nights', value: String(count) },
      ],
    };
  },
  sources: [
    'Liang and Zeger (1986), Longitudinal data analysis using generalized linear models, Biometrika 73.',
    'Cameron and Miller (2015), A practitioner\u2019s guide to cluster-robust inference, Journal of Human Resources 50.',
  ],
  related: ['interval', 'design-effect', 'two-way', 'night'],
};

const far: readonly { name: string; place: Place & { radiusKm: number } }[] = [
  { name: 'A locator, FN42', place: locatorPlace('FN42') },
  { name: 'A country 250 km across, 2,400 km away', place: { latitude: 46.8, longitude: 23, radiusKm: 125 } },
  { name: 'A country 1,000 km across, as near', place: { latitude: 46.8, longitude: 23, radiusKm: 500 } },
  { name: 'A country 1,900 km across', place: { latitude: 39.5, longitude: -3.5, radiusKm: 950 } },
];

export const bearing: MethodEntry = {
  id: 'bearing',
  title: 'Bearing and \u201cbearing unsure\u201d',
  asks: 'From which direction did this station come, and do we know it well enough?',
  text: [
    'The bearing is the first direction of the shortest path on the earth\u2019s ellipsoid, from the station to the best known place of the other: a locator that somebody entered, else the call area, else the country. Each comes with a radius inside which the station must be.',
    'Seen from here that circle fills an angle. Where the angle is wider than a sector, the sector is a guess: the station is marked \u201cbearing unsure\u201d and makes no unit in a question of direction. It still counts in questions that ask for all directions.',
    'Stations at sea or in the air have no bearing.',
  ],
  formula: ['angle = 2 arcsin(sin(radius) / sin(distance)), both as angles at the earth\u2019s centre'],
  example: () => ({
    words: 'From IO53, with twelve sectors of 30\u00b0:',
    tables: [
      {
        caption: 'Bearings and how wide they are',
        head: ['Known is', 'Bearing', 'Distance', 'Radius', 'Angle', 'Sector'],
        rows: far.map(({ name, place }) => {
          const path = pathWithSpread(home, place, place.radiusKm);
          const from = sectorOf(path.azimuthDeg, 12) * 30;
          return [
            name,
            formatHeading(path.azimuthDeg),
            formatKm(path.distanceKm),
            formatKm(place.radiusKm),
            formatDegrees(path.bearingSpreadDeg),
            sectorUnsure(path.bearingSpreadDeg, 12) ? 'bearing unsure' : `${from} to ${from + 30}\u00b0`,
          ];
        }),
      },
    ],
    results: [],
  }),
  sources: [
    'Karney (2013), Algorithms for geodesics, Journal of Geodesy 87 (GeographicLib).',
    'ITU Radio Regulations, Appendix 42 (call sign series), joined to open country data.',
  ],
  related: ['map-cells', 'spot'],
};

export const hours: MethodEntry = {
  id: 'hours',
  title: 'Hours, sunset and darkness',
  asks: 'Was it dark on the path, and how long after sunset was it?',
  text: [
    'Sunset and sunrise are the moments when the centre of the sun stands 0.833 degrees below the horizon. Hours can be counted in UTC or from the station\u2019s own sunset or sunrise, which keeps a November and a February evening comparable.',
    'A path is both dark, one dark or both light, by the sun at its two ends. Greyline means that the sun at either end stands between 6 degrees below and 3 degrees above the horizon.',
  ],
  example: () => {
    const sun = new Sun();
    const nights = new StationNights(home);
    const there = locatorPlace('FN42');
    const moments = ['2026-11-14T17:00Z', '2026-11-14T20:00Z', '2026-11-15T02:00Z', '2026-11-15T08:00Z'];
    return {
      words: 'From IO53 to FN42 in the night of 14 November 2026:',
      tables: [
        {
          caption: 'The sun on the path',
          head: ['UTC', 'Sun here', 'Sun there', 'Path', 'Greyline', 'From sunset'],
          rows: moments.map((text) => {
            const timeMs = Date.parse(text);
            const [here, away] = [sun.altitudeDeg(timeMs, home), sun.altitudeDeg(timeMs, there)];
            const { state, greyline } = pathSun(here, away);
            const fromSunset = nights.hoursFromSunset(timeMs);
            return [
              formatUtc(text),
              formatDegrees(here, 1),
              formatDegrees(away, 1),
              state,
              greyline ? 'yes' : 'no',
              fromSunset === null ? 'no sunset' : `${formatNumber(fromSunset)} h`,
            ];
          }),
        },
      ],
      results: [
        {
          label: 'Sunset here',
          value: formatUtcTime(nights.night(nightIndexOf(Date.parse(moments[1]!), home.longitude)).sunsetMs),
        },
      ],
    };
  },
  sources: [
    'Meeus (1998), Astronomical Algorithms, chapters 12 and 25; sunset at \u22120.833\u00b0 by custom.',
  ],
  related: ['night', 'map-cells'],
};
