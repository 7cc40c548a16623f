import type { BlockRange, Listening } from './blocks.ts';
import { ALTERNATING, HEARD_ON_A, HEARD_ON_B } from './columns.ts';
import type { Group, Sides } from './group.ts';
import type { HeardOnlyRows, UnitRows } from './rows.ts';

/** Makes alternating units and heard-only rows from one group after another. */
export interface BlockSummary {
  addGroup(group: Group): void;
}

/**
 * Walks a group block by block. A receiver that heard the station on two antennas in the block makes an
 * alternating unit; a station heard on one antenna of a comparable pair and not on the other makes a
 * heard-only row. "Heard" is any spot outside guards in the block, whether or not it found a match: a
 * station heard on both antennas at different moments is no evidence that one of them missed it.
 */
export function blockSummary(
  sides: Sides,
  range: BlockRange,
  listening: Listening,
  units: UnitRows,
  heardOnly: HeardOnlyRows,
): BlockSummary {
  const sideCount = sides.receiver.length;
  const count = new Int32Array(sideCount);
  const sumSnr = new Int32Array(sideCount);
  const speeds = new Int32Array(sideCount);
  const sumWpm = new Int32Array(sideCount);
  const present = new Int32Array(sideCount);
  let presentCount = 0;
  const countOfAntenna = new Int32Array(sides.antennas.length);
  const sidesOfAntenna = Array.from(sides.antennas, (): number[] => []);
  sides.antenna.forEach((antenna, side) => sidesOfAntenna[antenna]!.push(side));

  function addSpot(group: Group, i: number): void {
    const side = group.side[i]!;
    if (count[side]!++ === 0) present[presentCount++] = side;
    countOfAntenna[sides.antenna[side]!]!++;
    sumSnr[side]! += group.snrDb[i]!;
    if (group.speedWpm[i]! > 0) speeds[side]!++;
    sumWpm[side]! += group.speedWpm[i]!;
  }

  function addAlternatingUnit(group: Group, block: number, sideA: number, sideB: number): void {
    const receiver = sides.receiver[sideA]!;
    const row = units.open({
      antennaA: sides.antenna[sideA]!,
      antennaB: sides.antenna[sideB]!,
      call: group.call,
      band: group.band,
      blockMinute: block * range.blockMinutes,
      receiverA: receiver,
      receiverB: receiver,
      kind: ALTERNATING,
    });
    units.addA(row, count[sideA]!, sumSnr[sideA]!);
    units.addB(row, count[sideB]!, sumSnr[sideB]!);
    units.addSpeed(row, speeds[sideA]! + speeds[sideB]!, sumWpm[sideA]! + sumWpm[sideB]!);
  }

  /** The receiver of the antenna with the highest measure; sides ascend by receiver, so ties go low. */
  function leadingReceiver(antenna: number, measure: (side: number) => number): number {
    let best = sidesOfAntenna[antenna]![0]!;
    for (const side of sidesOfAntenna[antenna]!) if (measure(side) > measure(best)) best = side;
    return sides.receiver[best]!;
  }

  function addHeardOnly(group: Group, block: number, antennaA: number, antennaB: number): void {
    const onA = countOfAntenna[antennaA]! > 0;
    const heard = onA ? antennaA : antennaB;
    const heardBy = leadingReceiver(heard, (side) => count[side]!);
    const missedBy = leadingReceiver(onA ? antennaB : antennaA, (side) => listening.ofSide(side, block));
    heardOnly.add({
      antennaA,
      antennaB,
      call: group.call,
      band: group.band,
      blockMinute: block * range.blockMinutes,
      side: onA ? HEARD_ON_A : HEARD_ON_B,
      receiverA: onA ? heardBy : missedBy,
      receiverB: onA ? missedBy : heardBy,
      count: countOfAntenna[heard]!,
      sumSnr: sidesOfAntenna[heard]!.reduce((sum, side) => sum + sumSnr[side]!, 0),
    });
  }

  function closeBlock(group: Group, block: number): void {
    for (let p = 0; p < presentCount; p++) {
      for (let q = p + 1; q < presentCount; q++) {
        const sideP = present[p]!;
        const sideQ = present[q]!;
        if (sides.receiver[sideP] !== sides.receiver[sideQ]) continue;
        // Sides of one receiver ascend by antenna.
        addAlternatingUnit(group, block, Math.min(sideP, sideQ), Math.max(sideP, sideQ));
      }
    }
    const pairs = listening.comparablePairs(block);
    for (let k = 0; k < pairs.length; k += 2) {
      const antennaA = pairs[k]!;
      const antennaB = pairs[k + 1]!;
      if (countOfAntenna[antennaA]! > 0 !== countOfAntenna[antennaB]! > 0) {
        addHeardOnly(group, block, antennaA, antennaB);
      }
    }
    for (let p = 0; p < presentCount; p++) {
      const side = present[p]!;
      count[side] = 0;
      sumSnr[side] = 0;
      speeds[side] = 0;
      sumWpm[side] = 0;
      countOfAntenna[sides.antenna[side]!] = 0;
    }
    presentCount = 0;
  }

  return {
    addGroup(group) {
      let i = 0;
      while (i < group.length) {
        const block = Math.floor(group.timeMs[i]! / range.blockMs);
        const blockEndMs = (block + 1) * range.blockMs;
        const inRange = block >= range.first && block < range.end;
        for (; i < group.length && group.timeMs[i]! < blockEndMs; i++) if (inRange) addSpot(group, i);
        if (inRange) closeBlock(group, block);
      }
    },
  };
}
