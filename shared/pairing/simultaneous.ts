import type { BlockRange } from './blocks.ts';
import { SIMULTANEOUS } from './columns.ts';
import type { Group, Sides } from './group.ts';
import { nearestInTime } from './nearest.ts';
import type { UnitRows } from './rows.ts';
import { freqTolerance100Hz, type PairingRules } from './rules.ts';

/** Finds the matches of one group after another and adds them to units. */
export interface SimultaneousMatcher {
  /** Returns the number of matches whose midpoint lies in the block range. */
  addGroup(group: Group): number;
}

/**
 * Matches the spots of two receivers, on two antennas or on one: mutually nearest in time, then within the
 * window and the frequency tolerance. On one antenna the receiver with the lower id is on A's side.
 *
 * A group is first cut into bursts wherever two neighbours in time are further apart than the window.
 * No match can span a cut, and no spot beyond a cut can be nearer than one within the window, so bursts
 * can be matched on their own with the same outcome. Within a burst every pair of sides is merged once:
 * O(burst length x sides in the burst), and a burst holds few sides, so the whole is linear in spots
 * however many receivers and antennas a season has seen.
 */
export function simultaneousMatcher(
  sides: Sides,
  rules: PairingRules,
  range: BlockRange,
  capacity: number,
  rows: UnitRows,
): SimultaneousMatcher {
  const windowMs = rules.windowSeconds * 1000;
  const tolerance = freqTolerance100Hz(rules);
  const sideCount = sides.receiver.length;

  // The unit that a pair of sides added to last. Matches of a pair of sides come in order of time, so
  // a unit whose block has passed is never needed again.
  const openRow = new Int32Array(sideCount * sideCount).fill(-1);
  const openBlock = new Int32Array(sideCount * sideCount);
  const openGroup = new Int32Array(sideCount * sideCount).fill(-1);
  let groupNumber = -1;

  // One burst, its spots laid side by side: those of `present[k]` at `begin[k]` to `begin[k + 1] - 1`.
  const countOfSide = new Int32Array(sideCount);
  const fillOfSide = new Int32Array(sideCount);
  const present = new Int32Array(sideCount);
  let presentCount = 0;
  const begin = new Int32Array(sideCount + 1);
  const times = new Float64Array(capacity);
  const spot = new Int32Array(capacity);
  const nearest = new Int32Array(capacity);

  function layOut(group: Group, from: number, to: number): void {
    presentCount = 0;
    for (let i = from; i < to; i++) {
      const side = group.side[i]!;
      if (countOfSide[side]!++ === 0) present[presentCount++] = side;
    }
    let at = 0;
    for (let k = 0; k < presentCount; k++) {
      const side = present[k]!;
      begin[k] = at;
      fillOfSide[side] = at;
      at += countOfSide[side]!;
      countOfSide[side] = 0;
    }
    begin[presentCount] = at;
    if (presentCount === 1) return;
    for (let i = from; i < to; i++) {
      const place = fillOfSide[group.side[i]!]!++;
      times[place] = group.timeMs[i]!;
      spot[place] = i;
    }
  }

  function unitOf(group: Group, sideA: number, sideB: number, block: number): number {
    const pair = sideA * sideCount + sideB;
    if (openGroup[pair] !== groupNumber || openBlock[pair] !== block) {
      openGroup[pair] = groupNumber;
      openBlock[pair] = block;
      openRow[pair] = rows.open({
        antennaA: sides.antenna[sideA]!,
        antennaB: sides.antenna[sideB]!,
        call: group.call,
        band: group.band,
        blockMinute: block * range.blockMinutes,
        receiverA: sides.receiver[sideA]!,
        receiverB: sides.receiver[sideB]!,
        kind: SIMULTANEOUS,
      });
    }
    return openRow[pair]!;
  }

  function matchSides(group: Group, a: number, b: number): number {
    const fromA = begin[a]!;
    const toA = begin[a + 1]!;
    const fromB = begin[b]!;
    const toB = begin[b + 1]!;
    nearestInTime(times, fromA, toA, fromB, toB, nearest);
    nearestInTime(times, fromB, toB, fromA, toA, nearest);
    let matches = 0;
    for (let i = fromA; i < toA; i++) {
      const j = nearest[i]!;
      if (nearest[j] !== i || Math.abs(times[i]! - times[j]!) > windowMs) continue;
      const spotA = spot[i]!;
      const spotB = spot[j]!;
      if (Math.abs(group.freq100Hz[spotA]! - group.freq100Hz[spotB]!) > tolerance) continue;
      const block = Math.floor((times[i]! + times[j]!) / 2 / range.blockMs);
      if (block < range.first || block >= range.end) continue;
      const row = unitOf(group, present[a]!, present[b]!, block);
      rows.addA(row, 1, group.snrDb[spotA]!);
      rows.addB(row, 1, group.snrDb[spotB]!);
      const wpmA = group.speedWpm[spotA]!;
      const wpmB = group.speedWpm[spotB]!;
      rows.addSpeed(row, (wpmA > 0 ? 1 : 0) + (wpmB > 0 ? 1 : 0), wpmA + wpmB);
      matches++;
    }
    return matches;
  }

  function matchBurst(group: Group, from: number, to: number): number {
    layOut(group, from, to);
    let matches = 0;
    for (let p = 0; p < presentCount; p++) {
      for (let q = p + 1; q < presentCount; q++) {
        const sideP = present[p]!;
        const sideQ = present[q]!;
        if (sides.receiver[sideP] === sides.receiver[sideQ]) continue;
        const order = sides.antenna[sideP]! - sides.antenna[sideQ]!;
        // Two receivers on one antenna: nothing about the antenna, all about the receivers.
        const first = order !== 0 ? order < 0 : sides.receiver[sideP]! < sides.receiver[sideQ]!;
        matches += first ? matchSides(group, p, q) : matchSides(group, q, p);
      }
    }
    return matches;
  }

  return {
    addGroup(group) {
      groupNumber++;
      let matches = 0;
      let from = 0;
      for (let i = 1; i <= group.length; i++) {
        if (i < group.length && group.timeMs[i]! - group.timeMs[i - 1]! <= windowMs) continue;
        if (i - from > 1) matches += matchBurst(group, from, i);
        from = i;
      }
      return matches;
    },
  };
}
