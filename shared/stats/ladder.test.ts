import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createRandom, ladder, ladderGroups } from './index.ts';
import type { LadderResult, LadderRows } from './index.ts';

interface Row {
  a: number;
  b: number;
  ra: number;
  rb: number;
  d: number;
  g: number;
}

const columns = (rows: readonly Row[]): LadderRows => ({
  antennaA: rows.map(({ a }) => a),
  antennaB: rows.map(({ b }) => b),
  receiverA: rows.map(({ ra }) => ra),
  receiverB: rows.map(({ rb }) => rb),
  difference: rows.map(({ d }) => d),
  clusters: rows.map(({ g }) => g),
});
const alternating = (a: number, b: number, d: number, g: number): Row => ({ a, b, ra: 1, rb: 1, d, g });
const rung = (result: LadderResult, id: number) => result.antennas.find((each) => each.id === id)!;
const pairOf = (result: LadderResult, x: number, y: number) => {
  const pair = result.pairs.find(({ a, b }) => (a === x && b === y) || (a === y && b === x))!;
  return { ...pair, estimate: pair.a === x ? pair.estimate : 0 - pair.estimate };
};

/** Any rows of up to five antennas and three receivers, in whole decibels. */
const anyRows = fc
  .array(
    fc.record({
      a: fc.integer({ min: 1, max: 5 }),
      b: fc.integer({ min: 1, max: 5 }),
      ra: fc.integer({ min: 1, max: 3 }),
      rb: fc.integer({ min: 1, max: 3 }),
      d: fc.integer({ min: -30, max: 30 }),
      g: fc.integer({ min: 0, max: 9 }),
    }),
    { minLength: 1, maxLength: 60 },
  )
  .map((rows) => rows.filter(({ a, b, ra, rb }) => a !== b || ra !== rb))
  .filter((rows) => rows.length > 0);

const close = (actual: number | null, expected: number | null, label: string) => {
  if (actual === null || expected === null) expect(actual, label).toBe(expected);
  else expect(Math.abs(actual - expected), `${label}: ${actual}, ${expected}`).toBeLessThan(1e-7);
};

describe('ladder, worked by hand', () => {
  // Forty clusters hear each of three pairs once: A-B is 2 dB give or take one, A-C 3 dB, B-C 1 dB.
  const rows = Array.from({ length: 40 }, (_, g) => [
    alternating(1, 2, 2 + (g % 2 === 0 ? 1 : -1), g),
    alternating(1, 3, 3, g),
    alternating(2, 3, 1, g),
  ]).flat();

  it('places three antennas of a balanced round by their means', () => {
    const result = ladder(columns(rows));
    // (2 + 3) / 3, (-2 + 1) / 3, (-3 - 1) / 3: in a balanced round the value is the mean over the others.
    close(rung(result, 1).value, 5 / 3, 'A');
    close(rung(result, 2).value, -1 / 3, 'B');
    close(rung(result, 3).value, -4 / 3, 'C');
    expect(result.groups).toEqual([[1, 2, 3]]);
    expect(result.antennas.map(({ rank }) => rank)).toEqual([1, 2, 3]);
  });

  it('gives A against B two thirds of its direct units and the error that follows from them', () => {
    const pair = ladder(columns(rows)).pairs[0]!;
    close(pair.directShare, 2 / 3, 'share');
    close(pair.weightShare, 1 / 3, 'weight');
    // Influence of a cluster: 2/3 of its unit's +-1 over 40; 40 of them, times C/(C-1) (n-1)/(n-rank).
    close(pair.se, Math.sqrt((40 * (2 / 3 / 40) ** 2 * 40 * 119) / (39 * 118)), 'se');
    close(pair.direct!.estimate, 2, 'direct');
    close(pair.indirect!.estimate, 2, 'indirect');
    close(pair.inconsistency!.estimate, 0, 'inconsistency');
  });

  it('learns receiver offsets from a swap and uses them where there was none', () => {
    // Antennas 1 and 2 swap receivers 7 and 8 (rho 7 - rho 8 = 4); 3 and 4 never swap, 3 is 1 dB better.
    const swap = Array.from({ length: 12 }, (_, g): Row[] => [
      { a: 1, b: 2, ra: 7, rb: 8, d: 2 + 4 + ((g % 3) - 1), g },
      { a: 1, b: 2, ra: 8, rb: 7, d: 2 - 4 + ((g % 2) - 0.5), g },
      { a: 3, b: 4, ra: 7, rb: 8, d: 1 + 4 + ((g % 4) - 1.5), g },
    ]).flat();
    const result = ladder(columns(swap));
    expect(result.groups.map((group) => [...group].sort())).toEqual([
      [1, 2],
      [3, 4],
    ]);
    close(pairOf(result, 1, 2).estimate, 2, '1 - 2');
    close(pairOf(result, 3, 4).estimate, 1, '3 - 4');
    close(result.receivers.find(({ id }) => id === 7)!.value, 2, 'receiver 7');
    // Without the swap neither pair can be told from the receivers.
    const tangled = ladder(columns(swap.filter(({ ra }) => ra === 7)));
    expect(tangled.groups).toHaveLength(4);
    expect(tangled.pairs).toEqual([]);
    expect(tangled.antennas.map(({ reason }) => reason)).toEqual(['alone', 'alone', 'alone', 'alone']);
    expect(tangled.receiverGroups).toHaveLength(2);
  });

  it('takes receivers on one antenna as what they are: a difference of receivers', () => {
    const common = Array.from({ length: 10 }, (_, g): Row[] => [
      { a: 1, b: 2, ra: 7, rb: 8, d: 5 + (g % 2), g },
      { a: 1, b: 1, ra: 7, rb: 8, d: 3 + (g % 3) - 1, g },
    ]).flat();
    const result = ladder(columns(common));
    expect(result.groups).toEqual([[1, 2]]);
    close(pairOf(result, 1, 2).estimate, 5.5 - (3 - 0.1), '1 - 2');
  });

  it('gives no error to an antenna that one cluster alone links, and leaves the others theirs', () => {
    const result = ladder(columns([...rows, alternating(1, 4, 9, 0), alternating(1, 4, 7, 0)]));
    expect(rung(result, 4)).toMatchObject({
      se: null,
      interval: null,
      chanceBest: null,
      reason: 'one-cluster',
    });
    close(rung(result, 4).value, 5 / 3 - 8, 'newcomer');
    // The mean stays that of the three.
    close(rung(result, 1).value, 5 / 3, 'A');
    expect(rung(result, 1).interval).not.toBeNull();
    expect(
      rung(result, 1).chanceBest! + rung(result, 2).chanceBest! + rung(result, 3).chanceBest!,
    ).toBeCloseTo(1, 12);
  });

  it('says why there is no error at all', () => {
    const reasons = (own: Row[]) => ladder(columns(own)).antennas.map(({ reason }) => reason);
    expect(reasons([alternating(1, 2, 1, 0), alternating(1, 2, 2, 0)])).toEqual([
      'one-cluster',
      'one-cluster',
    ]);
    expect(reasons([alternating(1, 2, 1, 0), alternating(2, 3, 1, 1)])).toEqual(
      new Array(3).fill('no-degrees-of-freedom'),
    );
    expect(reasons([0, 1, 2].map((g) => alternating(1, 2, 1, g)))).toEqual(['no-spread', 'no-spread']);
  });

  it('measures against a reference where it is linked, and against the mean elsewhere', () => {
    const apart = Array.from({ length: 8 }, (_, g) => alternating(8, 9, 2 + (g % 2), g));
    const result = ladder(columns([...rows, ...apart]), { reference: 3 });
    close(rung(result, 1).value, 3, 'A against C');
    expect(rung(result, 3)).toMatchObject({ value: 0, se: null, reason: 'reference' });
    close(rung(result, 8).value, 1.25, 'another scale');
  });

  it('tells which contacts would join antennas, without data', () => {
    const tangled = { antennaA: 1, antennaB: 2, receiverA: 7, receiverB: 8 };
    expect(ladderGroups([tangled]).antennas).toEqual([[1], [2]]);
    expect(ladderGroups([tangled, { ...tangled, receiverA: 8, receiverB: 7 }]).antennas).toEqual([[1, 2]]);
    expect(ladderGroups([tangled, { ...tangled, antennaB: 1 }]).antennas).toEqual([[1, 2]]);
    expect(ladderGroups([tangled, { ...tangled, receiverA: null, receiverB: null }])).toEqual({
      antennas: [[1, 2]],
      receivers: [[7, 8]],
    });
  });

  it('refuses what is no ladder, naming the argument', () => {
    const one = columns([alternating(1, 2, 1, 0)]);
    const refused: [Partial<LadderRows>, object, RegExp][] = [
      [{ difference: [] }, {}, /difference/],
      [{ difference: [NaN] }, {}, /difference/],
      [{ antennaA: [1, 2] }, {}, /antennaA/],
      [{ antennaB: [1.5] }, {}, /antennaB/],
      [{ antennaB: [1] }, {}, /antennaA and antennaB/],
      [{ receiverA: [-1] }, {}, /receiverA/],
      [{ receiverB: [] }, {}, /receiverB/],
      [{ clusters: [] }, {}, /clusters/],
      [{}, { weights: [0] }, /weights/],
      [{}, { weights: [] }, /weights/],
      [{}, { level: 1 }, /level/],
      [{}, { draws: 0 }, /draws/],
      [{}, { seed: NaN }, /seed/],
      [{}, { reference: NaN }, /reference/],
    ];
    for (const [rows, options, names] of refused) {
      expect(() => ladder({ ...one, ...rows }, options), `${names}`).toThrow(names);
      expect(() => ladder({ ...one, ...rows }, options), `${names}`).toThrow(RangeError);
    }
  });
});

describe('ladder, whatever the rows', () => {
  const sameScale = (x: LadderResult, y: LadderResult, idOf = (id: number) => id) => {
    for (const own of x.antennas) {
      const other = rung(y, idOf(own.id));
      close(own.value, other.value, `value of ${own.id}`);
      close(own.se, other.se, `se of ${own.id}`);
      expect([own.rank, own.rows, own.clusters, own.reason]).toEqual([
        other.rank,
        other.rows,
        other.clusters,
        other.reason,
      ]);
    }
  };

  it('gives the same scale under other names', () => {
    const names = fc.shuffledSubarray([11, 22, 33, 44, 55, 66], { minLength: 6, maxLength: 6 });
    fc.assert(
      fc.property(anyRows, names, (rows, renamed) => {
        const idOf = (id: number) => renamed[id]!;
        const other = rows.map((row) => ({
          ...row,
          a: idOf(row.a),
          b: idOf(row.b),
          ra: 9 - row.ra,
          rb: 9 - row.rb,
        }));
        sameScale(ladder(columns(rows), { draws: 1 }), ladder(columns(other), { draws: 1 }), idOf);
      }),
    );
  });

  it('is the same for rows in another order and sides swapped', () => {
    fc.assert(
      fc.property(anyRows, fc.integer(), (rows, seed) => {
        const random = createRandom(seed);
        const turned = rows
          .map((row) => ({ row, at: random.uniform() }))
          .sort((x, y) => x.at - y.at)
          .map(({ row, at }) =>
            at < 0.5 ? row : { ...row, a: row.b, b: row.a, ra: row.rb, rb: row.ra, d: 0 - row.d },
          );
        sameScale(ladder(columns(rows), { draws: 1 }), ladder(columns(turned), { draws: 1 }));
      }),
    );
  });

  it('moves one antenna by what is added to all its differences, and nothing else', () => {
    fc.assert(
      fc.property(anyRows, fc.integer({ min: -9, max: 9 }), (rows, more) => {
        const before = ladder(columns(rows), { draws: 1 });
        const after = ladder(
          columns(
            rows.map((row) => ({ ...row, d: row.d + (row.a === 1 ? more : 0) - (row.b === 1 ? more : 0) })),
          ),
          { draws: 1 },
        );
        for (const pair of before.pairs) {
          const moved = after.pairs.find(({ a, b }) => a === pair.a && b === pair.b)!;
          close(moved.estimate, pair.estimate + (pair.a === 1 ? more : 0), `${pair.a} - ${pair.b}`);
          close(moved.se, pair.se, 'se');
          close(moved.inconsistency?.estimate ?? null, pair.inconsistency?.estimate ?? null, 'inconsistency');
        }
      }),
    );
  });

  it('turns the ladder over when every difference changes its sign', () => {
    fc.assert(
      fc.property(anyRows, (rows) => {
        const up = ladder(columns(rows), { draws: 1 });
        const down = ladder(columns(rows.map((row) => ({ ...row, d: 0 - row.d }))), { draws: 1 });
        for (const own of up.antennas) {
          close(rung(down, own.id).value, own.value === null ? null : 0 - own.value, `value of ${own.id}`);
          close(rung(down, own.id).se, own.se, `se of ${own.id}`);
        }
      }),
    );
  });

  it('only shifts when another reference is chosen', () => {
    fc.assert(
      fc.property(anyRows, fc.integer({ min: 1, max: 5 }), (rows, reference) => {
        const mean = ladder(columns(rows), { draws: 1 });
        const against = ladder(columns(rows), { draws: 1, reference });
        const origin = mean.antennas.find(({ id }) => id === reference);
        for (const own of mean.antennas) {
          const shift = origin && origin.group === own.group ? origin.value! : 0;
          const expected = own.value === null ? null : own.value - shift;
          close(rung(against, own.id).value, expected, `value of ${own.id}`);
          expect(rung(against, own.id).rank).toBe(own.rank);
        }
        against.pairs.forEach((pair, i) => close(pair.estimate, mean.pairs[i]!.estimate, 'pair'));
      }),
    );
  });

  it('keeps estimates inside intervals, intervals growing with the level, and chances adding up', () => {
    fc.assert(
      fc.property(anyRows, (rows) => {
        const narrow = ladder(columns(rows), { level: 0.8, draws: 50 });
        const wide = ladder(columns(rows), { level: 0.99, draws: 50 });
        narrow.pairs.forEach(({ estimate, interval }, i) => {
          if (!interval) return;
          const outer = wide.pairs[i]!.interval!;
          expect(outer[0] < interval[0] && interval[0] < estimate).toBe(true);
          expect(estimate < interval[1] && interval[1] < outer[1]).toBe(true);
        });
        narrow.groups.forEach((_, group) => {
          const chances = narrow.antennas.filter((own) => own.group === group).map((own) => own.chanceBest);
          const known = chances.filter((share) => share !== null);
          if (known.length > 0) expect(known.reduce((sum, share) => sum + share, 0)).toBeCloseTo(1, 10);
        });
        const shares = narrow.pairs.reduce((sum, pair) => sum + pair.weightShare, 0);
        expect(shares).toBeLessThan(1 + 1e-9);
        expect(JSON.stringify(narrow)).not.toMatch(/NaN|Infinity/);
      }),
    );
  });
});

describe('ladder, against a known truth', () => {
  it('covers the truth in 93 to 97 % of 400 seeded seasons, and rarely calls agreement a disagreement', () => {
    const random = createRandom(20261201);
    const theta = [0, 2.5, 1.8, -0.7, 0.3, -2.2];
    const rho = [0, 1.4, -0.6, 0.2];
    let asked = 0;
    let held = 0;
    let tested = 0;
    let alarms = 0;
    for (let season = 0; season < 400; season++) {
      const rows: Row[] = [];
      for (let g = 0; g < 60; g++) {
        // A station has a side of its own in a night: its units are not independent.
        const lean = theta.map(() => 1.2 * random.normal());
        for (let unit = 1 + random.integer(8); unit > 0; unit--) {
          const a = 1 + random.integer(5);
          const b = 1 + ((a + random.integer(4)) % 5);
          const ra = 1 + random.integer(3);
          const rb = 1 + random.integer(3);
          const d = theta[a]! - theta[b]! + rho[ra]! - rho[rb]! + lean[a]! - lean[b]! + 4 * random.normal();
          rows.push({ a, b, ra, rb, d, g });
        }
      }
      for (const { a, b, interval, inconsistency } of ladder(columns(rows), { draws: 1 }).pairs) {
        const truth = theta[a]! - theta[b]!;
        asked += 1;
        if (interval![0] <= truth && truth <= interval![1]) held += 1;
        if (inconsistency?.p == null) continue;
        tested += 1;
        if (inconsistency.p < 0.05) alarms += 1;
      }
    }
    expect(asked).toBe(4000);
    expect(held / asked).toBeGreaterThan(0.93);
    expect(held / asked).toBeLessThan(0.97);
    expect(tested).toBeGreaterThan(3900);
    expect(alarms / tested).toBeLessThan(0.075);
  });
});
