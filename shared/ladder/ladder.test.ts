import { describe, expect, it } from 'vitest';
import { ladderQuestion } from '../contracts/ladder.ts';
import type { LadderQuestionInput } from '../contracts/ladder.ts';
import { ALTERNATING, SIMULTANEOUS, STANDING_RULES } from '../pairing/index.ts';
import type { UnitColumns } from '../pairing/index.ts';
import { answerLadder } from './index.ts';
import type { LadderInput } from './index.ts';

interface Unit {
  a: number;
  b: number;
  differenceDb: number;
  call: number;
  night: number;
  receivers?: readonly [number, number];
}

const minutesOfNight = (night: number) => (Date.UTC(2026, 10, night, 22) as number) / 60_000;

function columns(units: readonly Unit[]): UnitColumns {
  const ints = (of: (unit: Unit) => number) => Int32Array.from(units, of);
  return {
    antennaA: ints(({ a }) => a),
    antennaB: ints(({ b }) => b),
    call: ints(({ call }) => call),
    band: Int16Array.from(units, () => 160),
    blockMinute: ints(({ night }) => minutesOfNight(night)),
    receiverA: ints(({ receivers }) => receivers?.[0] ?? 1),
    receiverB: ints(({ receivers }) => receivers?.[1] ?? 1),
    kind: Uint8Array.from(units, ({ receivers }) => (receivers ? SIMULTANEOUS : ALTERNATING)),
    differenceDb: Float64Array.from(units, ({ differenceDb }) => differenceDb),
    countA: new Uint16Array(units.length).fill(1),
    countB: new Uint16Array(units.length).fill(1),
    sumSnrA: ints(({ differenceDb }) => 20 + differenceDb),
    sumSnrB: ints(() => 20),
    speedWpm: new Uint8Array(units.length),
  };
}

/** Antennas 1 to 5 are called Wire 1 to Wire 5; receivers 1 to 3 EI7QSA to EI7QSC. */
function input(
  units: readonly Unit[],
  change: { down?: number[]; antennas?: number; receivers?: number; question?: LadderQuestionInput } = {},
): LadderInput {
  const numbers = (count: number) => Array.from({ length: count }, (_, i) => i + 1);
  return {
    question: ladderQuestion.parse(change.question ?? {}),
    antennas: numbers(change.antennas ?? 5).map((id) => ({
      ...{ id, name: `Wire ${id}`, marker: 'ABCDE'[id - 1]!, headingDeg: null },
      inService: !change.down?.includes(id),
    })),
    receivers: numbers(change.receivers ?? 3).map((id) => ({
      ...{ id, callSign: `EI7QS${'ABC'[id - 1]}`, label: `Receiver ${id}` },
      retired: false,
    })),
    rules: { ...STANDING_RULES, blockMinutes: 15 },
    ...{ marginDb: 1, sectorCount: 12, station: { latitude: 53.5, longitude: -9 } },
    units: columns(units),
    calls: new Map(),
  };
}

/** Each of ten calls once in each of twelve nights; the wobble of one dB sums to nothing. */
function heard(
  a: number,
  b: number,
  differenceDb: number,
  receivers?: readonly [number, number],
  nights = 12,
): Unit[] {
  return Array.from({ length: 10 * nights }, (_, i) => ({
    ...{ a, b, receivers, call: i % 10, night: 1 + Math.floor(i / 10) },
    // Not in step from one pair to the next: sums of two pairs keep some spread.
    differenceDb: differenceDb + ((a % 2 === 0 ? i >> 1 : i) % 2 === 0 ? 1 : -1),
  }));
}
const plain = (text: string) => text.replaceAll('\u2009', ' ');

describe('obstacles of a ladder', () => {
  it('needs no swap where the receivers are known apart already', () => {
    const units = [...heard(1, 2, 2, [1, 2]), ...heard(1, 2, -1, [2, 1]), ...heard(3, 4, 3)];
    const { obstacles, components } = answerLadder(input(units, { antennas: 4 }));
    expect(components.map(({ antennas }) => antennas.map(({ id }) => id))).toEqual([
      [1, 2],
      [3, 4],
    ]);
    expect(obstacles.map(({ kind, antennaIds }) => ({ kind, antennaIds }))).toEqual([
      { kind: 'unlinked', antennaIds: [3, 4] },
    ]);
    expect(obstacles[0]!.cures).toEqual([
      'Put Wire 1 on EI7QSA and Wire 3 on EI7QSB for about 40 minutes.',
      'Or let one receiver alternate between Wire 1 and Wire 3, a few minutes each.',
    ]);
  });

  it('asks for a swap half-way where nothing tells the receivers apart', () => {
    const units = [...heard(1, 2, 2), ...heard(3, 4, 3)];
    const [obstacle] = answerLadder(input(units, { antennas: 4, receivers: 2 })).obstacles;
    expect(obstacle!.cures[0]).toBe(
      'Put Wire 1 on EI7QSA and Wire 3 on EI7QSB for about 40 minutes, swapping them half-way.',
    );
  });

  it('offers one receiver to alternate where the station has no other', () => {
    const units = [...heard(1, 2, 2), ...heard(3, 4, 3)];
    const [obstacle] = answerLadder(input(units, { antennas: 4, receivers: 1 })).obstacles;
    expect(obstacle!.cures).toEqual([
      'Let one receiver alternate between Wire 1 and Wire 3, a few minutes each.',
    ]);
  });

  it('offers to put both receivers on one antenna, and units made so do tell them apart', () => {
    const tangled = heard(1, 2, 2, [1, 2]);
    const [obstacle] = answerLadder(input(tangled, { antennas: 2, receivers: 2 })).obstacles;
    expect(obstacle!.cures).toEqual([
      'Swap the two antennas for about 40 minutes: Wire 1 on EI7QSB and Wire 2 on EI7QSA.',
      'Or put both EI7QSA and EI7QSB on Wire 1 for about 40 minutes.',
      'Or let one receiver alternate between Wire 1 and Wire 2, a few minutes each.',
    ]);
    const cured = answerLadder(
      input([...tangled, ...heard(1, 1, 0.5, [1, 2])], { antennas: 2, receivers: 2 }),
    );
    expect(cured.obstacles).toEqual([]);
    // They compare no antennas, and count as no units of the ladder.
    expect(cured.counts).toMatchObject({
      units: 120,
      simultaneous: 120,
      clusters: 120,
      stations: 10,
      nights: 12,
    });
    expect(cured.bands).toEqual([{ bandMetres: 160, units: 120 }]);
    expect(cured.components[0]!.antennas.map(({ units }) => units)).toEqual([120, 120]);
    // On one antenna EI7QSA reports 0.5 dB more: of the 2 dB, so much was the receiver.
    expect(cured.components[0]!.pairs[0]!.differenceDb).toBeCloseTo(1.5, 9);
    expect(cured.components[0]!.antennas.map(({ name }) => name)).toEqual(['Wire 1', 'Wire 2']);
  });

  it('advises nothing about an antenna that is down', () => {
    const units = [...heard(1, 2, 2), ...heard(1, 3, 4, [1, 2])];
    const { obstacles } = answerLadder(input(units, { antennas: 3, down: [3] }));
    expect(obstacles).toMatchObject([
      { kind: 'inseparable', antennaIds: [3], receiverIds: [1, 2], cures: [] },
    ]);
    expect(plain(obstacles[0]!.sentence)).toBe(
      'Wire 1 and Wire 3 cannot be separated from their receivers on 160 m: heard together, Wire 1 was ' +
        'only ever on EI7QSA and Wire 3 only on EI7QSB, and nothing else tells these receivers apart.',
    );
  });

  it('names all antennas without units at once, and leaves out those that are down', () => {
    const { obstacles } = answerLadder(input(heard(1, 2, 2), { down: [5] }));
    expect(obstacles).toMatchObject([{ kind: 'no units', antennaIds: [3, 4] }]);
    expect(obstacles[0]!.cures[1]).toBe(
      'Or let one receiver alternate between Wire 1 and in turn Wire 3 and Wire 4, a few minutes each.',
    );
  });
});

describe('a ladder in words', () => {
  it('says that either antenna will do below the margin', () => {
    const { sentence } = answerLadder(input(heard(1, 2, 0.4)));
    expect(plain(sentence)).toMatch(
      /^On 160 m Wire 1 hears best: 0\.4 dB above the next, Wire 2 \(95 % interval 0\.2 to 0\.6 dB\), .* The two differ by less than the margin of 1\.0 dB: either will do\.$/,
    );
  });

  it('does not name a winner when the interval reaches zero', () => {
    const { sentence } = answerLadder(input(heard(1, 2, 0.1, undefined, 3)));
    expect(plain(sentence)).toMatch(
      /^On 160 m Wire 1 leads, but it is not settled: 0\.1 dB above the next, Wire 2/,
    );
  });

  it('says what to use when the best antenna is down', () => {
    const { sentence } = answerLadder(input([...heard(1, 2, 2), ...heard(2, 3, 1.5)], { down: [1] }));
    expect(plain(sentence)).toMatch(
      /Wire 1 is out of service; of those in service Wire 2 stands highest, 2\.0 dB below it\.$/,
    );
  });

  it('warns of an antenna on thin evidence, and leaves it out of the sentence', () => {
    const { sentence, warnings } = answerLadder(input([...heard(1, 2, 2), ...heard(1, 3, -9, undefined, 2)]));
    expect(plain(sentence)).toMatch(/^On 160 m Wire 1 hears best: 2\.0 dB above the next, Wire 2/);
    expect(warnings).toContain(
      'Wire 3 stands on fewer than 8 station-nights or 3 nights: take the place on the ladder as a hint.',
    );
  });

  it('warns where direct and indirect evidence disagree', () => {
    // 1 - 3 is 5 dB by its own units, and 2 + 1 = 3 dB round antenna 2.
    const { components, warnings } = answerLadder(
      input([...heard(1, 2, 2), ...heard(2, 3, 1), ...heard(1, 3, 5)], { antennas: 3 }),
    );
    const pair = components[0]!.pairs.find(({ a, b }) => a === 1 && b === 3)!;
    expect(pair.consistent).toBe(false);
    expect(pair.inconsistency!.estimateDb).toBeCloseTo(2, 9);
    expect(plain(warnings.join(' '))).toContain(
      'Direct and indirect evidence disagree on Wire 1 and Wire 3: 5.0 dB from their own units, 3.0 dB round other antennas.',
    );
  });
});
