import { formatCount, formatDb, formatDbInterval, formatShare } from '../format.ts';
import { ladder } from '../stats/index.ts';
import type { LadderResult } from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import { pWords } from './worked-answer.ts';

const names: Readonly<Record<number, string>> = {
  1: 'North-east wire',
  2: 'Vertical',
  3: 'South loop',
  4: 'West wire',
  5: 'Old loop',
};

interface Meeting {
  a: number;
  b: number;
  /** Receiver on a's and on b's side. */
  on: readonly [number, number];
  values: readonly number[];
}

/** The wire and the West wire never met: only the Vertical and the loop link them. */
const meetings: readonly Meeting[] = [
  { a: 1, b: 2, on: [1, 2], values: [1, 0.5, 1.5, 1] },
  { a: 1, b: 2, on: [2, 1], values: [3, 2.5, 3.5, 3] },
  { a: 2, b: 3, on: [1, 1], values: [1.5, 2, 1, 1.5] },
  { a: 1, b: 3, on: [1, 1], values: [3.5, 3, 2.5, 3] },
  { a: 3, b: 4, on: [2, 2], values: [0.5, -0.5, 1, 0] },
];
const apart: readonly Meeting[] = [{ a: 4, b: 5, on: [1, 1], values: [2, 1.5, 2.5, 2] }];

const rowsOf = (list: readonly Meeting[]) =>
  list.flatMap(({ a, b, on, values }) => values.map((db) => ({ a, b, ra: on[0], rb: on[1], db })));

function ladderOf(list: readonly Meeting[]): LadderResult {
  const rows = rowsOf(list);
  return ladder({
    antennaA: rows.map(({ a }) => a),
    antennaB: rows.map(({ b }) => b),
    receiverA: rows.map(({ ra }) => ra),
    receiverB: rows.map(({ rb }) => rb),
    difference: rows.map(({ db }) => db),
    clusters: rows.map((_, i) => i),
  });
}

const meetingsTable = (list: readonly Meeting[]) => ({
  caption: 'Units, dB, each from a station-night of its own',
  head: ['Antennas', 'Receivers', 'Units'],
  rows: list.map(({ a, b, on, values }) => [
    `${names[a]} \u2212 ${names[b]}`,
    on[0] === on[1] ? `${on[0]} on both` : `${on[0]} and ${on[1]}`,
    values.map((db) => formatDb(db).replace(/.dB$/, '')).join(', '),
  ]),
});

const byValue = (result: LadderResult) =>
  [...result.antennas].sort((x, y) => (y.value ?? -Infinity) - (x.value ?? -Infinity));

const ladderSources = [
  'Least squares on paired comparisons: Mosteller (1951), Psychometrika 16; errors by clusters as for the interval.',
  'Equals R: sandwich::vcovCL(lm(d ~ 0 + X), cluster, type = "HC1", cadjust = TRUE).',
];

export const ladderEntry: MethodEntry = {
  id: 'ladder',
  title: 'Ladder',
  asks: 'How do all our antennas rank, though most pairs never met?',
  text: [
    'If A is 2 dB above B and B 1 dB above C, then A is 3 dB above C, whether or not they met. The ladder finds the one value per antenna that fits all units of a band best, the receivers\u2019 offsets taken out in the same fit.',
    'Values are against the mean of the antennas on the same ladder, or against one that you choose; the mean is zero, and the differences are the same either way. Intervals come from station-nights, as everywhere.',
    'Receivers get a small ladder of their own.',
  ],
  formula: ['d = value(A) \u2212 value(B) + offset(receiver on A) \u2212 offset(receiver on B) + error'],
  example: () => {
    const result = ladderOf(meetings);
    return {
      words:
        'Four antennas, two receivers, five kinds of meeting. The North-east wire and the West wire never met.',
      tables: [
        meetingsTable(meetings),
        {
          caption: 'The ladder',
          head: ['Antenna', 'Value', '95 % interval', 'Units'],
          rows: byValue(result).map(({ id, value, interval, rows }) => [
            names[id]!,
            formatDb(value, 2),
            interval ? formatDbInterval(interval, 2) : 'not known',
            String(rows),
          ]),
        },
      ],
      scale: {
        rows: byValue(result).map(({ id, value, interval }) => ({
          ...{ label: names[id]!, at: value!, interval: interval! },
        })),
      },
      results: result.receivers.map(({ id, value }) => ({
        label: `Receiver ${id} against the mean of both`,
        value: formatDb(value, 2),
      })),
    };
  },
  sources: ladderSources,
  related: ['chance-best', 'direct-indirect', 'components', 'receiver-offsets'],
};

const close: readonly Meeting[] = [
  { a: 1, b: 2, on: [1, 1], values: [1, -0.5, 0.5, 0.5, -1, 1] },
  { a: 2, b: 3, on: [1, 1], values: [2.5, 3, 2, 3.5, 2.5, 3] },
];

export const chanceBest: MethodEntry = {
  id: 'chance-best',
  title: 'Chance of being best',
  asks: 'How sure is it that the top one belongs there?',
  text: [
    'The fitted values are not exact, and they move together: if the Vertical is a little better than we think, so is everything measured against it. The program draws 20,000 sets of values from what the fit allows and counts how often each antenna comes out highest.',
    'The draws are seeded: the same data give the same chances. Two antennas at 50 % each are a tie, whatever their order on the ladder.',
  ],
  formula: ['chance = draws in which it is the highest / all draws'],
  example: () => {
    const result = ladderOf(close);
    return {
      words: 'Two antennas that are nearly alike and a third well below:',
      tables: [
        meetingsTable(close),
        {
          caption: 'Values and chances',
          head: ['Antenna', 'Value', '95 % interval', 'Chance of being best'],
          rows: byValue(result).map(({ id, value, interval, chanceBest: chance }) => [
            names[id]!,
            formatDb(value, 2),
            formatDbInterval(interval!, 2),
            formatShare(chance),
          ]),
        },
      ],
      scale: {
        rows: byValue(result).map(({ id, value, interval }) => ({
          ...{ label: names[id]!, at: value!, interval: interval! },
        })),
      },
      results: [{ label: 'Draws', value: formatCount(result.draws) }],
    };
  },
  sources: [
    'Draws from the fitted normal distribution; the method is common practice in network comparisons.',
  ],
  related: ['ladder', 'chance-better'],
};

export const directIndirect: MethodEntry = {
  id: 'direct-indirect',
  title: 'Direct and indirect evidence',
  asks: 'Do the pairs that met agree with the way round?',
  text: [
    'What two antennas say of each other comes from units of just these two, and from all ways round over other antennas. The direct share says how much of the difference rests on the former.',
    'The two are estimated apart and held against each other: a small p says that they disagree. Then something is not the same on both ways, such as the season, the directions or the receivers. The p is adjusted over all pairs that can be tested.',
    'The weight of a pair is the share of the whole ladder that hangs on its units. A lone bridge between two halves carries much, however many units it has.',
  ],
  formula: ['inconsistency = direct \u2212 indirect, one more column in the fit'],
  example: () => {
    const { pairs } = ladderOf(meetings);
    const db = (part: { estimate: number } | null) => (part ? formatDb(part.estimate, 2) : 'none');
    const tested = pairs.find(({ a, b }) => a === 1 && b === 2)!;
    return {
      words: 'The ladder\u2019s example, pair by pair:',
      tables: [
        meetingsTable(meetings),
        {
          caption: 'Pairs',
          head: ['Pair', 'Direct', 'Indirect', 'Together', 'Direct share', 'Weight'],
          rows: pairs.map((pair) => [
            `${names[pair.a]} \u2212 ${names[pair.b]}`,
            db(pair.direct),
            db(pair.indirect),
            formatDb(pair.estimate, 2),
            pair.directShare === null ? 'none' : formatShare(pair.directShare),
            formatShare(pair.weightShare),
          ]),
        },
      ],
      results: [
        {
          label: `Direct \u2212 indirect, ${names[1]} and ${names[2]}`,
          value: tested.inconsistency
            ? `${formatDb(tested.inconsistency.estimate, 2)}, p ${pWords(tested.inconsistency.p)}`
            : 'cannot be tested',
        },
      ],
    };
  },
  sources: [
    'Dias, Welton, Caldwell and Ades (2010), Checking consistency in mixed treatment comparison meta-analysis, Statistics in Medicine 29, 932\u2013944.',
  ],
  related: ['ladder', 'components', 'adjusted-p'],
};

export const components: MethodEntry = {
  id: 'components',
  title: 'Antennas that nothing links',
  asks: 'Why are there two ladders?',
  text: [
    'Antennas that never met, directly or round others, have no common scale. They stand on ladders of their own, and the program says what would join them for the least effort: usually one evening in which a receiver alternates between one antenna of each.',
    'An antenna that was linked only through receivers that nothing else links is apart as well: its value and the receiver\u2019s cannot be separated.',
  ],
  example: () => {
    const two: readonly Meeting[] = [...meetings.slice(0, 4), ...apart];
    const joined: readonly Meeting[] = [...two, { a: 3, b: 4, on: [1, 1], values: [0.5, 0, 1] }];
    const groups = (list: readonly Meeting[]) =>
      ladderOf(list).groups.map((ids, k) => [String(k + 1), ids.map((id) => names[id]).join(', ')]);
    return {
      words: 'The West wire and the Old loop have met only each other:',
      tables: [
        meetingsTable(two),
        { caption: 'Ladders', head: ['Ladder', 'Antennas, highest first'], rows: groups(two) },
        {
          caption: 'After one evening of South loop against West wire',
          head: ['Ladder', 'Antennas, highest first'],
          rows: groups(joined),
        },
      ],
      results: [],
    };
  },
  sources: ['Connected components of the graph of meetings, and the null space of the fit.'],
  related: ['separability', 'ladder'],
};
