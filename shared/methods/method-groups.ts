import * as answer from './answer-entries.ts';
import * as counted from './counted-entries.ts';
import * as other from './other-view-entries.ts';
import * as findings from './finding-entries.ts';
import * as ladders from './ladder-entries.ts';
import * as pictures from './picture-entries.ts';
import * as watching from './watching-entries.ts';
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
    ],
  },
  {
    key: 'pictures',
    title: 'Where and when',
    entries: [other.histogramEntry, pictures.mapCells, pictures.adjustedP, pictures.poolingEntry],
  },
  {
    key: 'watching',
    title: 'Watching, planning, doubting',
    entries: [watching.peekProof, watching.planning, watching.detectable, watching.sensitivity],
  },
  {
    key: 'ladder',
    title: 'The ladder',
    entries: [ladders.ladderEntry, ladders.chanceBest, ladders.directIndirect, ladders.components],
  },
  { key: 'findings', title: 'Findings', entries: [findings.finding, findings.digest] },
];
