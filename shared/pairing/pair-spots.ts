import { blockSummary } from './block-summary.ts';
import { blocksOf, listeningTimes, type BlockRange } from './blocks.ts';
import {
  sharedLength,
  type DwellColumns,
  type PairingResult,
  type PairingWindow,
  type SpotColumns,
} from './columns.ts';
import { indexDwells, type DwellIndex } from './dwell-index.ts';
import { emptyGroup, numberSides, type Group } from './group.ts';
import { levelCounts, type LevelCounts } from './levels.ts';
import { orderSpots, settleTies } from './order.ts';
import { heardOnlyRows, unitRows } from './rows.ts';
import { checkRules, type PairingRules } from './rules.ts';
import { simultaneousMatcher } from './simultaneous.ts';
import { GUARDED, TAGGED, locateSpots } from './tag.ts';
import { tagTallies, type TagTallies } from './tallies.ts';

/**
 * Pairs the spots of one station: units and heard-only rows of all its antenna pairs, for the blocks
 * that start in `window`, with counts of what was left out.
 *
 * Spots may come in any order and the answer does not depend on it; in order of time they save sorting
 * passes. They must reach beyond the window by what `spotsNeeded` says, or units at its edges can differ
 * from those of a run over everything. Adjoining windows then give, together, the units of one run over
 * both. Dwells that touch that stretch must be given whole: one cut off at the stretch's start would get
 * a guard there that no switch caused. An open dwell ends at Infinity, or at the present time while the
 * last block is still running.
 *
 * Simultaneous units: see `simultaneousMatcher`. Alternating units and heard-only: see `blockSummary`.
 * Of spots equal in receiver, second, call and frequency the earliest (then the strongest) stands.
 * Time O(n) for n spots and a handful of receivers, memory about 30 bytes a spot beside the answer. A
 * season night after night takes half the time of one run, since a night fits the processor's cache.
 * Throws RangeError for columns of unequal length, a time that is no number, or unusable dwells, rules
 * or window.
 */
export function pairSpots(
  input: SpotColumns,
  dwells: DwellColumns,
  rules: PairingRules,
  window: PairingWindow,
): PairingResult {
  const n = sharedLength('spots', { ...input });
  for (let i = 0; i < n; i++) {
    if (!Number.isFinite(input.timeMs[i]!)) throw new RangeError(`Spot ${i} has no usable time.`);
  }
  checkRules(rules);
  const range = blocksOf(window, rules.blockMinutes);
  const index = indexDwells(dwells);
  const tags = locateSpots(input, index, rules.guardSeconds);
  const order = orderSpots(input);
  const groupEnds = endsOfGroups(order, input);
  const capacity = longestGroup(groupEnds);

  const sides = numberSides(index);
  const listening = listeningTimes(index, sides.antenna, sides.antennas.length, range, rules.guardSeconds);
  const units = unitRows();
  const heardOnly = heardOnlyRows();
  const matcher = simultaneousMatcher(sides, rules, range, capacity, units);
  const summary = blockSummary(sides, range, listening, units, heardOnly);
  const tallies = tagTallies(index.sides);
  const levels = levelCounts(index.sides);
  const gatherer = groupGatherer(input, tags, index, range, capacity, tallies, levels);

  const group = emptyGroup(capacity);
  let from = 0;
  let matches = 0;
  for (const to of groupEnds) {
    settleTies(order, from, to, input);
    gatherer.gather(group, order, from, to);
    matches += matcher.addGroup(group);
    summary.addGroup(group);
    from = to;
  }
  return {
    units: units.finish(sides.antennas),
    heardOnly: heardOnly.finish(sides.antennas),
    tallies: tallies.rows(),
    levels: levels.rows(),
    doubles: gatherer.doubles(),
    matches,
    listening: listening.columns(),
  };
}

/** Ends of the runs of equal (call, band) in the order. */
function endsOfGroups(order: Uint32Array, spots: SpotColumns): number[] {
  const ends: number[] = [];
  for (let i = 1; i <= order.length; i++) {
    const before = order[i - 1]!;
    const row = order[i];
    if (
      row === undefined ||
      spots.call[row] !== spots.call[before] ||
      spots.band[row] !== spots.band[before]
    ) {
      ends.push(i);
    }
  }
  return ends;
}

function longestGroup(groupEnds: number[]): number {
  let longest = 0;
  let from = 0;
  for (const to of groupEnds) {
    longest = Math.max(longest, to - from);
    from = to;
  }
  return longest;
}

interface GroupGatherer {
  /** Fills the group with the spots of `order[from..to)` that may make units, counting the others. */
  gather(group: Group, order: Uint32Array, from: number, to: number): void;
  /** Doubles met so far in the window. */
  doubles(): number;
}

function groupGatherer(
  spots: SpotColumns,
  tags: { position: Int32Array; tag: Uint8Array },
  index: DwellIndex,
  range: BlockRange,
  capacity: number,
  tallies: TagTallies,
  levels: LevelCounts,
): GroupGatherer {
  let doubles = 0;
  // Receiver and frequency of the spots of the present second, guarded and untagged ones too.
  const seenReceivers = new Int32Array(capacity);
  const seenFrequencies = new Int32Array(capacity);
  let seen = 0;

  function isSeen(receiver: number, freq100Hz: number): boolean {
    for (let k = 0; k < seen; k++) {
      if (seenReceivers[k] === receiver && seenFrequencies[k] === freq100Hz) return true;
    }
    return false;
  }

  return {
    gather(group, order, from, to) {
      group.call = spots.call[order[from]!]!;
      group.band = spots.band[order[from]!]!;
      group.length = 0;
      let second = Number.NaN;
      for (let i = from; i < to; i++) {
        const row = order[i]!;
        const timeMs = spots.timeMs[row]!;
        const block = Math.floor(timeMs / range.blockMs);
        const counts = block >= range.first && block < range.end;
        const receiver = spots.receiver[row]!;
        const freq100Hz = spots.freq100Hz[row]!;
        if (Math.floor(timeMs / 1000) !== second) {
          second = Math.floor(timeMs / 1000);
          seen = 0;
        } else if (isSeen(receiver, freq100Hz)) {
          if (counts) doubles++;
          continue;
        }
        seenReceivers[seen] = receiver;
        seenFrequencies[seen++] = freq100Hz;

        const tag = tags.tag[row]!;
        if (tag === TAGGED) {
          const side = index.side[tags.position[row]!]!;
          const at = group.length++;
          group.timeMs[at] = timeMs;
          group.side[at] = side;
          group.freq100Hz[at] = freq100Hz;
          group.snrDb[at] = spots.snrDb[row]!;
          group.speedWpm[at] = spots.speedWpm[row]!;
          if (counts) {
            tallies.addTagged(side, group.band);
            levels.add(side, group.band, group.snrDb[at]);
          }
        } else if (counts) {
          if (tag === GUARDED) tallies.addGuarded(index.side[tags.position[row]!]!, group.band);
          else tallies.addUntagged(receiver, group.band);
        }
      }
    },
    doubles: () => doubles,
  };
}
