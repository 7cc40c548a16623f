import { describe, expect, it } from 'vitest';
import { comparisonQuestion } from '../contracts/comparison.ts';
import { SIMULTANEOUS, STANDING_RULES, type UnitColumns } from '../pairing/index.ts';
import { answerComparison } from './answer.ts';
import type { ComparisonInput } from './input.ts';

/**
 * Antenna 1 only ever on receiver 1, antenna 2 only on receiver 2: 4 calls in each of 12 nights. Once both
 * receivers were on antenna 3, for 6 of the calls and nights.
 */
interface Row {
  a: number;
  b: number;
  call: number;
  night: number;
  d: number;
}
const firstMinute = Date.UTC(2026, 0, 5, 20) / 60_000;
const apart: Row[] = Array.from({ length: 48 }, (_, i) => {
  const [call, night] = [i % 4, Math.floor(i / 4)];
  return { a: 1, b: 2, call, night, d: 5 + (call % 2) - ((night * 7) % 5) * 0.5 };
});
const together: Row[] = Array.from({ length: 6 }, (_, i) => ({
  ...{ a: 3, b: 3, call: i % 4, night: i },
  d: 2 + (i % 3) * 0.25,
}));

function inputOf(rows: Row[]): ComparisonInput {
  const columns: UnitColumns = {
    antennaA: Int32Array.from(rows, ({ a }) => a),
    antennaB: Int32Array.from(rows, ({ b }) => b),
    call: Int32Array.from(rows, ({ call }) => call),
    band: Int16Array.from(rows, () => 160),
    blockMinute: Int32Array.from(rows, ({ night }) => firstMinute + night * 1440),
    receiverA: Int32Array.from(rows, () => 1),
    receiverB: Int32Array.from(rows, () => 2),
    kind: Uint8Array.from(rows, () => SIMULTANEOUS),
    countA: Uint16Array.from(rows, () => 1),
    countB: Uint16Array.from(rows, () => 1),
    differenceDb: Float64Array.from(rows, ({ d }) => d),
    sumSnrA: Int32Array.from(rows, () => 0),
    sumSnrB: Int32Array.from(rows, () => 0),
    speedWpm: Uint8Array.from(rows, () => 0),
  };
  const none = new Int32Array(0);
  return {
    question: comparisonQuestion.parse({ antennaA: 1, antennaB: 2 }),
    antennas: {
      a: { id: 1, name: 'Wire 1', marker: 'A', headingDeg: null },
      b: { id: 2, name: 'Wire 2', marker: 'B', headingDeg: null },
    },
    receivers: [1, 2].map((id) => ({ id, callSign: `EI7QS${id}` })),
    rules: { ...STANDING_RULES, blockMinutes: 15 },
    ...{ marginDb: 1, sectorCount: 12, station: { latitude: 53.5, longitude: -9 } },
    units: columns,
    heardOnly: {
      ...{ antennaA: none, antennaB: none, call: none, band: new Int16Array(0), blockMinute: none },
      ...{ side: new Uint8Array(0), receiverA: none, receiverB: none },
      ...{ count: new Uint16Array(0), sumSnr: none },
    },
    calls: new Map(),
    nights: [],
  };
}

describe('two receivers on one antenna', () => {
  it('are what separates antennas that never changed receivers', () => {
    expect(answerComparison(inputOf(apart)).verdict.code).toBe('cannot be separated');
    const answer = answerComparison(inputOf([...apart, ...together]));
    // R 4.2.2: lm(d ~ 0 + theta + rho), theta 1 for the antennas' rows, rho -1 in all (receiver 2 against 1), and
    // sandwich::vcovCL(cluster = call and night, type = "HC1", cadjust = TRUE); 48 clusters, 47 degrees of freedom.
    expect(answer.estimate!.estimateDb).toBeCloseTo(2.333333333333331, 9);
    expect(answer.estimate!.seDb).toBeCloseTo(0.161409517592743, 9);
    expect(answer.estimate!.df).toBe(47);
    expect(answer.estimate!.interval95Db[0]).toBeCloseTo(2.008619267490433, 9);
    expect(answer.offsets).toHaveLength(1);
    expect(answer.offsets[0]!.offsetDb).toBeCloseTo(-2.25, 9);
    // The evidence about the antennas is theirs alone.
    expect(answer.counts).toMatchObject({ units: 48, clusters: 48, stations: 4, nights: 12 });
    expect(answer.nights.reduce((sum, cell) => sum + cell.units, 0)).toBe(48);
    expect(answer.rank!.clusterMeanDb).toBeCloseTo(2.333333333333331, 9);
  });

  it('give every cell the same offset', () => {
    const { nights } = answerComparison(inputOf([...apart, ...together]));
    expect(nights).toHaveLength(12);
    // Night 0: (5 + 6 + 5 + 6) / 4 less the offset of 2.25.
    expect(nights[0]!.estimateDb).toBeCloseTo(3.25, 9);
    expect(nights[1]!.estimateDb).toBeCloseTo(2.25, 9);
  });
});
