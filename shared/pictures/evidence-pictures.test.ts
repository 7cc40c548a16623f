import { describe, expect, it } from 'vitest';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { cell, fixtureAnswer } from './answer.fixture.ts';
import { arrows, contextOf, dots, drawn, hatches, texts } from './drawn.fixture.ts';
import { aloneWords } from './fairness-words.ts';
import { heardOnlyPicture, heardOnlyRows, ratioLimit, ratioText } from './heard-only-option.ts';
import { peekProofAgainstFixed, peekProofPicture } from './peek-proof-option.ts';
import { pooledAnswer, poolingNumbers, sayRaw } from './pooled-cells.ts';
import { rosePicture } from './rose-option.ts';
import { inGroups, sensitivityPicture, sensitivitySummary, variantWords } from './sensitivity-option.ts';
import { fixtureSensitivity } from './sensitivity.fixture.ts';

/** Colours of A, B, what is neither, and the surface, in the tokens of the tests. */
const [ofA, ofB, neither, surface] = ['#ff8000', '#0080ff', '#a0a0a0', '#101010'];

describe('the picture of stations heard on one antenna only', () => {
  const width = 600;
  const [left, right] = [168, width - 26];
  const place = (doublings: number, limit: number) =>
    left + ((doublings + limit) / (2 * limit)) * (right - left);

  it('puts a ratio at its doublings, A to the right, and all directions last', () => {
    const svg = drawn(heardOnlyPicture(contextOf(fixtureAnswer())), width);
    const [north, all] = dots(svg, ofA);
    expect(north!.x).toBeCloseTo(place(Math.log2(4.67), 3), 0);
    expect(all!.x).toBeCloseTo(place(Math.log2(1.86), 3), 0);
    expect(all!.y).toBeGreaterThan(north!.y);
    expect(texts(svg)).toEqual(
      expect.arrayContaining(['1/8', '1', '8', '14 : 3', '5 : 0', 'All', '41 : 22']),
    );
  });

  it('gives a ratio without limit no dot, but an arrow to the side of the one that was alone', () => {
    const { heardOnlySectors } = fixtureAnswer();
    const only = { ...fixtureAnswer().fairness, heardOnly: null };
    const a = drawn(
      heardOnlyPicture(
        contextOf(fixtureAnswer({ fairness: only, heardOnlySectors: [heardOnlySectors[1]!] })),
      ),
      width,
    );
    expect(dots(a, ofA)).toEqual([]);
    expect(arrows(a, ofA).map(({ x }) => x)).toEqual([right]);
    const turned = {
      ...heardOnlySectors[1]!,
      onlyA: 0,
      onlyB: 5,
      oddsRatio: 0,
      intervalRatio: [0, 1.1] as [number, number],
    };
    const b = drawn(
      heardOnlyPicture(contextOf(fixtureAnswer({ fairness: only, heardOnlySectors: [turned] }))),
      width,
    );
    expect(dots(b, ofB)).toEqual([]);
    expect(arrows(b, ofB).map(({ x }) => x)).toEqual([left]);
  });

  it('widens its axis for a large ratio, and writes doublings as people say them', () => {
    const rows = heardOnlyRows(fixtureAnswer());
    expect(ratioLimit(rows)).toEqual({ limit: 3, step: 1 });
    expect(ratioLimit([{ ...rows[0]!, oddsRatio: 30 }])).toEqual({ limit: 6, step: 2 });
    expect([-3, -1, 0, 2].map(ratioText)).toEqual(['1/8', '1/2', '1', '4']);
  });

  it('says the same in words, from the side of the one that was alone more often', () => {
    const { antennas } = fixtureAnswer();
    const counts = { onlyA: 3, onlyB: 12, oddsRatio: 0.25, intervalRatio: [0.05, 0.8] as const, p: 0.035 };
    expect(aloneWords(counts, antennas, 'adjusted p')).toBe(
      'North-east wire alone in 3 station-nights, Vertical alone in 12: Vertical 4.0 times as often (95\u2009% interval 1.3 to 20), adjusted p 0.035.',
    );
    expect(aloneWords({ ...counts, onlyA: 0, oddsRatio: 0, intervalRatio: null }, antennas, 'p')).toContain(
      'never the other way round',
    );
    expect(aloneWords({ ...counts, onlyA: 0, onlyB: 0, oddsRatio: null, p: null }, antennas, 'p')).toBe(
      'North-east wire alone in 0 station-nights, Vertical alone in 0.',
    );
  });

  it('lights a direction up with the same direction of the rose', () => {
    const answer = fixtureAnswer();
    const lit = answer.sectors.find(({ sector }) => sector === 1)!;
    expect(drawn(heardOnlyPicture(contextOf(answer)))).not.toContain('#ffff00');
    expect(drawn(heardOnlyPicture(contextOf(answer, { lit })))).toContain('#ffff00');
    const picture = heardOnlyPicture(contextOf(answer));
    expect(picture.cells.map((part) => part.cell?.sector ?? null)).toEqual([1, 9, null]);
  });
});

describe('the peek-proof line', () => {
  const withPoints = (points: NonNullable<ComparisonAnswer['peekProof']>['points']) =>
    fixtureAnswer({ peekProof: { ...fixtureAnswer().peekProof!, points } });

  it('stands on the dB axis of all pictures, upright', () => {
    const context = contextOf(fixtureAnswer());
    const axis = [peekProofPicture(context).option.yAxis].flat()[0];
    expect(axis).toMatchObject({
      ...{ type: 'value', min: -context.scale.limitDb, max: context.scale.limitDb },
      interval: context.scale.stepDb,
    });
  });

  it('colours a night only once its interval leaves zero out, and leaves nights without one hollow', () => {
    const night = (index: number) => `2026-11-0${index}`;
    const svg = drawn(
      peekProofPicture(
        contextOf(
          withPoints([
            { night: night(1), clusters: 4, estimateDb: 2, intervalDb: null },
            { night: night(2), clusters: 12, estimateDb: 2, intervalDb: [-1, 5] },
            { night: night(3), clusters: 40, estimateDb: 2, intervalDb: [0.5, 3.5] },
          ]),
        ),
      ),
    );
    expect(dots(svg, surface)).toHaveLength(1);
    expect(dots(svg, neither)).toHaveLength(1);
    // The third night, and the interval of a single look at the right end.
    const inColour = dots(svg, ofA);
    expect(inColour).toHaveLength(2);
    expect(inColour[0]!.x).toBeLessThan(inColour[1]!.x);
    expect(texts(svg)).toContain('one look');
  });

  it('cuts a wild early interval at the axis with an arrow at either end', () => {
    const answer = withPoints([
      { night: '2026-11-01', clusters: 9, estimateDb: 2, intervalDb: [-90, 94] },
      { night: '2026-11-02', clusters: 60, estimateDb: 1.8, intervalDb: [0.9, 2.7] },
    ]);
    const context = contextOf(answer);
    expect(context.scale.limitDb).toBeLessThanOrEqual(12);
    const heads = arrows(drawn(peekProofPicture(context)), neither);
    expect(heads).toHaveLength(2);
    const [one, other] = heads.map(({ y }) => y).sort((a, b) => a - b);
    // The plot lies between 44 px from the top and 46 px from the bottom of 320.
    expect(one).toBeCloseTo(44, 0);
    expect(other).toBeCloseTo(274, 0);
  });

  it('says how it relates to the interval of the verdict, and nothing where one of the two is missing', () => {
    expect(peekProofAgainstFixed(fixtureAnswer())).toContain(
      'the interval of the verdict: 1.1 to 2.5\u2009dB',
    );
    expect(peekProofAgainstFixed(fixtureAnswer({ estimate: null }))).toBeNull();
    expect(peekProofAgainstFixed(fixtureAnswer({ peekProof: null }))).toBeNull();
  });

  it('has nothing to point at without points', () => {
    expect(peekProofPicture(contextOf(fixtureAnswer({ peekProof: null, estimate: null }))).cells).toEqual([]);
  });
});

describe('the answer under other choices', () => {
  const { variants } = fixtureSensitivity();

  it('has one row a choice on the dB axis of all pictures, with its number', () => {
    const context = contextOf(fixtureAnswer());
    const picture = sensitivityPicture(context, variants);
    expect([picture.option.xAxis].flat()[0]).toMatchObject({ max: context.scale.limitDb });
    const labels = texts(drawn(picture, 900));
    for (const { label } of variants) expect(labels).toContain(label);
    expect(labels.filter((text) => text === '+1.8\u2009dB')).toHaveLength(2);
    expect(labels.filter((text) => text === 'being made')).toHaveLength(2);
    expect(labels).toContain('not made yet');
  });

  it('puts its dots where they are on the axis, and leaves one without enough evidence hollow', () => {
    const svg = drawn(sensitivityPicture(contextOf(fixtureAnswer()), variants), 900);
    const at = (db: number) => 364 + ((db + 12) / 24) * (900 - 92 - 364);
    const near = (found: { x: number }[], wanted: number[]) => {
      expect(found).toHaveLength(wanted.length);
      found.forEach(({ x }, index) => expect(Math.abs(x - at(wanted[index]!))).toBeLessThan(0.6));
    };
    near(dots(svg, ofA), [1.8, 1.7, 1.7, 1.8, 0.4, 1.9]);
    near(dots(svg, surface), [-0.6]);
  });

  it('keeps the choices of a group together', () => {
    const mixed = [variants[6]!, variants[0]!, variants[7]!];
    expect(inGroups(mixed).map(({ key }) => key)).toEqual(['block-5', 'block-30', 'as-asked']);
  });

  it('says of each choice what became of it', () => {
    expect(variantWords(variants[0]!)).toBe(
      '+1.8\u2009dB, 95\u2009% interval 1.1 to 2.5\u2009dB, from 412 units and 212 station-nights: a clearly better.',
    );
    expect(variantWords(variants[6]!)).toBe('being made.');
    expect(variantWords({ ...variants[0]!, estimateDb: null, intervalDb: null })).toBe('no estimate.');
    expect(sensitivitySummary(variants, null)).toContain('7 of 10 choices have an estimate so far');
  });
});

describe('pooled cells', () => {
  const pooled = (estimateDb: number, pooledDb: number, clusters: number) =>
    cell({
      ...{ sector: clusters, estimateDb, clusters, nights: 9 },
      ...{ pooledDb, pooledIntervalDb: [pooledDb - 1, pooledDb + 1] },
    });
  const answer = fixtureAnswer({ sectors: [pooled(4, 2.5, 10), pooled(-3, -1.5, 4)] });

  it('show the pooled value and interval, and leave a cell without enough evidence as it was', () => {
    const [speaks, hatched] = pooledAnswer(answer).sectors;
    expect(speaks).toMatchObject({ estimateDb: 2.5, intervalDb: [1.5, 3.5] });
    expect(hatched).toMatchObject({ estimateDb: -3, speaks: false });
    expect(hatches(drawn(rosePicture(contextOf(pooledAnswer(answer)))))).toBe(
      hatches(drawn(rosePicture(contextOf(answer)))),
    );
  });

  it('stand on the same axis as the raw ones', () => {
    const { scale } = contextOf(answer);
    const context = { ...contextOf(answer), answer: pooledAnswer(answer) };
    expect([rosePicture(context).option.xAxis].flat()[0]).toMatchObject({ max: scale.limitDb });
  });

  it('name the raw value beside the pooled one where they differ', () => {
    const picture = rosePicture(contextOf(pooledAnswer(answer)));
    const raw = new Map(answer.sectors.map((each) => [each.sector, each]));
    const said = sayRaw(picture, ({ cell: part }) => raw.get(part?.sector ?? null) ?? part);
    expect(said.cells[10]!.words).toContain('hears better by 2.5\u2009dB');
    expect(said.cells[10]!.words).toContain('Pooled; raw +4.0\u2009dB.');
    expect(said.cells[4]!.words).not.toContain('Pooled');
  });

  it('come with the exact numbers', () => {
    expect(poolingNumbers(fixtureAnswer().pooling.sectors!)).toBe(
      'Random effects over 9 cells: tau 2.60\u2009dB (Paule-Mandel); Q 31.2 on 8 degrees of freedom, p below 0.001; I\u00b2 74\u2009%. Mean of the cells +0.9\u2009dB, 95\u2009% interval \u22120.8 to +2.6\u2009dB.',
    );
  });
});
