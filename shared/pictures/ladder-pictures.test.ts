import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { LadderComponent } from '../contracts/ladder.ts';
import { fixtureLadder } from './ladder-answer.fixture.ts';
import { cutOnLadder, ladderScales, ladderTicks, placeOnLadder, symmetricScale } from './ladder-scale.ts';
import {
  apartWords,
  chanceText,
  consistencyWords,
  doubtWords,
  findPair,
  intervalWords,
  isLoneBridge,
  ladderSummary,
  leftOutWords,
  pairWords,
  rungWords,
  seenFrom,
  sureWords,
  zeroWords,
} from './ladder-words.ts';

const thin = (text: string) => text.replaceAll('\u2009', ' ').replaceAll('\u2212', '-');
const answer = fixtureLadder();
const [main, apart] = answer.components as [LadderComponent, LadderComponent];
const nameOf = (id: number) => main.antennas.find((antenna) => antenna.id === id)!.name;
const pair = (a: number, b: number) => findPair(answer.components, [a, b])!;

describe('the axis of a ladder', () => {
  const db = fc.double({ min: -30, max: 30, noNaN: true });
  const component: fc.Arbitrary<LadderComponent> = fc
    .array(
      fc.record({ value: db, half: fc.double({ min: 0.01, max: 60, noNaN: true }), speaks: fc.boolean() }),
      {
        minLength: 1,
        maxLength: 8,
      },
    )
    .map((list) => ({
      ...main,
      antennas: [...list]
        .sort((one, other) => other.value - one.value)
        .map(({ value, half, speaks }, id) => ({
          ...main.antennas[0]!,
          ...{ id, valueDb: value, intervalDb: [value - half, value + half] as [number, number], speaks },
        })),
    }));

  it('holds zero, every value and every interval that speaks, and is as long for each component', () => {
    fc.assert(
      fc.property(fc.array(component, { minLength: 1, maxLength: 3 }), (components) => {
        const scales = ladderScales(components, 1);
        components.forEach(({ antennas }, index) => {
          const scale = scales[index]!;
          const held = antennas.flatMap(({ valueDb, intervalDb, speaks }) =>
            speaks ? [valueDb!, ...intervalDb!] : [valueDb!],
          );
          for (const each of [0, ...held]) {
            expect(each).toBeGreaterThanOrEqual(scale.fromDb - 1e-6);
            expect(each).toBeLessThanOrEqual(scale.toDb + 1e-6);
          }
          expect(scale.toDb - scale.fromDb).toBeCloseTo(scales[0]!.toDb - scales[0]!.fromDb, 6);
          expect(ladderTicks(scale).length).toBeLessThanOrEqual(22);
        });
      }),
    );
  });

  it('is not stretched by an antenna that hardly has evidence: its interval is cut with a mark', () => {
    const wild = {
      ...main,
      antennas: main.antennas.map((antenna) =>
        antenna.id === 4 ? { ...antenna, intervalDb: [-40, 35] as [number, number] } : antenna,
      ),
    };
    const [scale] = ladderScales([wild], 1);
    expect(scale!.toDb - scale!.fromDb).toBeLessThan(12);
    expect(cutOnLadder([-40, 35], scale!)).toMatchObject({ runsOnLow: true, runsOnHigh: true });
    expect(cutOnLadder([-1, 1], scale!)).toEqual({ from: -1, to: 1, runsOnLow: false, runsOnHigh: false });
  });

  it('counts its ticks from a clean zero and keeps what lies beyond at the end', () => {
    const scale = { fromDb: -0.6, toDb: 0.4, stepDb: 0.2 };
    expect(ladderTicks(scale)).toContain(0);
    expect([placeOnLadder(-9, scale), placeOnLadder(-0.1, scale), placeOnLadder(9, scale)]).toEqual([
      0, 50, 100,
    ]);
    expect(symmetricScale([1.2, -2.7])).toEqual({ fromDb: -3, toDb: 3, stepDb: 1 });
  });
});

describe('the words of a ladder', () => {
  it('say one rung with what it is counted from, how sure it is and what stands against it', () => {
    expect(thin(rungWords(main.antennas[0]!, main))).toBe(
      'North-east wire, rank 1: +1.9 dB against the mean of these 4 antennas (1.4 to 2.4 dB); chance of being best 93 %; 300 units of 60 stations in 14 nights.',
    );
    expect(thin(rungWords(main.antennas[3]!, main))).toContain(
      'out of service; thin: 5 station-nights, 2 nights.',
    );
  });

  it('name the reference, and say why an interval is missing', () => {
    const against = { ...main, referenceAntennaId: 2 };
    expect(zeroWords(against)).toBe('Vertical');
    const carried = (ids: number[]) => ({
      ...main,
      antennas: main.antennas.map((each) => (ids.includes(each.id) ? { ...each, chanceBest: null } : each)),
    });
    expect(zeroWords(carried([4]))).toBe('the mean of the 3 antennas with enough evidence');
    expect(zeroWords(carried([1, 2, 3, 4]))).toBe('the mean of these 4 antennas');
    expect(intervalWords(main.antennas[1]!, against)).toBe('the reference');
    expect(intervalWords({ ...main.antennas[0]!, intervalDb: null }, main)).toContain(
      'one station-night carries it',
    );
    expect(intervalWords({ ...main.antennas[0]!, valueDb: null }, main)).toBe('nothing to measure against');
  });

  it('say of thin evidence only what falls short', () => {
    const thinly = (clusters: number, nights: number) =>
      doubtWords({ ...main.antennas[0]!, speaks: false, clusters, nights });
    expect([thinly(155, 1), thinly(5, 2), thinly(40, 9)]).toEqual([
      ['thin: 1 night'],
      ['thin: 5 station-nights, 2 nights'],
      ['thin: no interval'],
    ]);
    expect(doubtWords(main.antennas[0]!)).toEqual([]);
  });

  it('never call a chance a certainty', () => {
    expect([0, 0.07, 0.93, 1].map((chance) => thin(chanceText(chance)))).toEqual([
      'below 1 %',
      '7 %',
      '93 %',
      'above 99 %',
    ]);
  });

  it('say a pair from the better one, whichever way round it was asked for', () => {
    expect(thin(pairWords(pair(3, 1), nameOf))).toBe('North-east wire hears 2.8 dB better than South loop');
    expect(pairWords({ ...pair(1, 2), differenceDb: 0.02 }, nameOf)).toBe(
      'North-east wire and Vertical hear alike',
    );
    expect(seenFrom(pair(1, 3), 3)).toEqual({ to: 1, differenceDb: 2.8 });
    expect(seenFrom(pair(1, 3), 1)).toEqual({ to: 3, differenceDb: -2.8 });
    expect(thin(sureWords(pair(1, 2)))).toBe(
      '95 % interval -0.1 to +1.3 dB; p 0.080, adjusted over all pairs 0.110. Not told apart: it may be luck.',
    );
  });

  it('hold direct against indirect evidence, and say where there is nothing to hold', () => {
    expect(consistencyWords(pair(2, 3)).state).toBe('agree');
    expect(thin(consistencyWords({ ...pair(2, 3), consistencyP: 0.016 }).words)).toBe(
      'Direct and indirect evidence differ no more than luck allows among so many pairs: +0.3 dB apart, p 0.016 before adjustment.',
    );
    expect(thin(consistencyWords(pair(1, 3)).words)).toContain('disagree: +2.5 dB apart, p below 0.001');
    expect(consistencyWords(pair(1, 4)).words).toContain('never heard together');
    expect(consistencyWords(pair(3, 4)).words).toContain('lone bridge');
    expect([pair(3, 4), pair(1, 4), pair(2, 3)].map(isLoneBridge)).toEqual([true, false, false]);
  });

  it('tell the picture of one scale, its margin, and why the other scale stands apart', () => {
    expect(thin(ladderSummary(main, answer))).toContain(
      'Within the margin of 1.0 dB below North-east wire: Vertical.',
    );
    expect(apartWords(apart, [main])).toBe(
      'A scale of its own: the data do not tell how far apart these antennas and North-east wire, Vertical, South loop and Old loop are. A value here says nothing about a value there.',
    );
  });

  it('count what the choice leaves out; unsure bearings only where directions are asked about', () => {
    expect(leftOutWords(answer.leftOut, false)).toEqual([]);
    expect(leftOutWords(answer.leftOut, true)).toEqual(['41 units with an unsure bearing']);
  });
});
