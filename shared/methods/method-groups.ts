import * as answer from './answer-entries.ts';
import * as counted from './counted-entries.ts';
import * as other from './other-view-entries.ts';
import type { MethodGroup } from './method-entry.ts';

/** The Methods page in reading order. */
export const methodGroups: readonly MethodGroup[] = [
  {
    key: 'counted',
    title: 'What is counted',
    entries: [
      counted.spot,
      counted.dwell,
      counted.guard,
      counted.block,
      counted.unit,
      counted.heardOnly,
      counted.night,
      counted.stationNight,
      counted.bearing,
      counted.hours,
    ],
  },
  {
    key: 'answer',
    title: 'The answer',
    entries: [
      answer.estimate,
      answer.interval,
      answer.receiverOffsets,
      answer.separability,
      answer.designEffect,
      answer.twoWay,
      answer.p,
      answer.verdictEntry,
      answer.equivalenceEntry,
    ],
  },
  {
    key: 'otherwise',
    title: 'The same, seen otherwise',
    entries: [
      other.signedRankEntry,
      other.hodgesLehmannEntry,
      other.pairedTEntry,
      other.effectSize,
      other.chanceBetter,
      other.signTestEntry,
      other.oddsRatio,
      other.censored,
      other.halfWeight,
      other.histogramEntry,
    ],
  },
];
