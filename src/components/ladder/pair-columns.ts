import type { LadderPair } from '../../../shared/contracts/ladder.ts';
import { formatDb, formatShare } from '../../../shared/format.ts';
import { pText } from '../../../shared/pictures/fairness-words.ts';
import { isLoneBridge } from '../../../shared/pictures/ladder-words.ts';
import type { DataColumn } from '../base/data-table.ts';

type Column = DataColumn<LadderPair>;

/** Columns of every table of pairs; the first one names the pair. */
export function pairColumns(nameOf: (antennaId: number) => string): Column[] {
  const db = (
    key: string,
    label: string,
    hint: string,
    read: (pair: LadderPair) => number | null,
  ): Column => ({
    ...{ key, label, hint, unit: 'dB', align: 'end', sortable: true },
    value: read,
    text: (pair) => (read(pair) === null ? 'none' : formatDb(read(pair))),
  });
  const count = (
    key: 'units' | 'clusters' | 'nights' | 'stations',
    label: string,
    hidden: boolean,
  ): Column => ({
    ...{ key, label, hidden, align: 'end', sortable: true },
    value: (pair) => pair[key],
  });
  return [
    {
      ...{ key: 'pair', label: 'Pair', isRowHeader: true, sortable: true },
      value: ({ a, b }) => `${nameOf(a)} \u2212 ${nameOf(b)}`,
    },
    db('difference', 'Difference', 'The first named minus the second', ({ differenceDb }) => differenceDb),
    ...(['Low', 'High'] as const).map((label, end) =>
      db(label, label, 'Ends of the 95\u2009% interval', ({ intervalDb }) => intervalDb?.[end] ?? null),
    ),
    {
      ...{ key: 'p', label: 'Adjusted p', align: 'end', sortable: true },
      hint: 'Adjusted over all pairs (Benjamini-Hochberg)',
      value: ({ pAdjusted }) => pAdjusted,
      text: ({ pAdjusted }) => (pAdjusted === null ? 'none' : pText(pAdjusted)),
    },
    db('direct', 'Direct', 'From units of just these two', ({ direct }) => direct?.estimateDb ?? null),
    db('indirect', 'Indirect', 'Round other antennas', ({ indirect }) => indirect?.estimateDb ?? null),
    {
      ...{ key: 'agreement', label: 'Do they agree?', sortable: true },
      value: (pair) =>
        pair.consistent === null
          ? isLoneBridge(pair)
            ? 'lone bridge'
            : 'not testable'
          : pair.consistent
            ? 'agree'
            : 'disagree',
    },
    count('units', 'Units', false),
    {
      ...{ key: 'weight', label: 'Weight', align: 'end', sortable: true },
      hint: 'Share of the whole ladder that hangs on the units of this pair',
      value: ({ weightShare }) => weightShare,
      text: ({ weightShare }) => formatShare(weightShare, 1),
    },
    count('clusters', 'Station-nights', true),
    count('nights', 'Nights', true),
    count('stations', 'Stations', true),
  ];
}
