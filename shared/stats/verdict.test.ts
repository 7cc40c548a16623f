import { describe, expect, it } from 'vitest';
import { verdict, type VerdictInput } from './verdict.ts';

const given = (change: Partial<VerdictInput>): VerdictInput => ({
  estimate: 0,
  interval: [-3, 3],
  interval90: [-2.5, 2.5],
  clusters: 30,
  nights: 6,
  margin: 1,
  separable: true,
  ...change,
});

describe('verdict', () => {
  // One row per line of the table of verdicts; the borders themselves do not count as beyond.
  it.each<[string, Partial<VerdictInput>, string, 'A' | 'B' | null]>([
    ['lo above the margin', { interval: [1.01, 2], interval90: [1.1, 1.9] }, 'a-clearly-better', 'A'],
    ['lo at the margin', { interval: [1, 2], interval90: [1.1, 1.9] }, 'a-better', 'A'],
    ['lo above zero', { interval: [0.01, 2], interval90: [0.2, 1.8] }, 'a-better', 'A'],
    [
      'hi below minus the margin',
      { interval: [-2, -1.01], interval90: [-1.9, -1.1] },
      'b-clearly-better',
      'B',
    ],
    ['hi at minus the margin', { interval: [-2, -1], interval90: [-1.9, -1.1] }, 'b-better', 'B'],
    ['hi below zero', { interval: [-2, -0.01], interval90: [-1.8, -0.2] }, 'b-better', 'B'],
    ['lo at zero', { interval: [0, 2], interval90: [0.1, 1.9] }, 'not-settled', null],
    [
      '90 % inside the margin',
      { interval: [-1.1, 0.9], interval90: [-0.9, 0.7] },
      'no-practical-difference',
      null,
    ],
    ['90 % touching the margin', { interval: [-1.2, 0.9], interval90: [-1, 0.7] }, 'not-settled', null],
    ['wide', {}, 'not-settled', null],
    ['seven clusters', { interval: [2, 3], interval90: [2, 3], clusters: 7 }, 'not-enough-yet', null],
    ['two nights', { interval: [2, 3], interval90: [2, 3], nights: 2 }, 'not-enough-yet', null],
    ['eight clusters, three nights', { interval: [2, 3], clusters: 8, nights: 3 }, 'a-clearly-better', 'A'],
    ['not separable', { interval: [2, 3], clusters: 2, separable: false }, 'cannot-be-separated', null],
    ['no interval', { interval: null, interval90: null }, 'not-settled', null],
    ['no estimate', { estimate: null, interval: null, interval90: null }, 'not-settled', null],
  ])('with %s', (_, change, code, better) => {
    expect(verdict(given(change))).toMatchObject({ code, better });
  });

  it('says beside "better" when the difference is shown to be inside the margin', () => {
    const small = verdict(given({ estimate: 0.3, interval: [0.1, 0.5], interval90: [0.15, 0.45] }));
    expect(small).toEqual({ code: 'a-better', better: 'A', withinMargin: true });
  });

  it('uses a margin of 1 dB unless told otherwise', () => {
    const change = { interval: [1.2, 2] as [number, number], interval90: null };
    expect(verdict({ ...given(change), margin: undefined }).code).toBe('a-clearly-better');
    expect(verdict(given({ ...change, margin: 1.5 })).code).toBe('a-better');
  });

  it('names the argument it refuses', () => {
    expect(() => verdict(given({ estimate: Number.NaN }))).toThrow(/^estimate /);
    expect(() => verdict(given({ interval: [2, 1] }))).toThrow(/^interval must run from low to high/);
    expect(() => verdict(given({ interval90: [0, Infinity] }))).toThrow(/^interval90\[1\] /);
    expect(() => verdict(given({ clusters: -1 }))).toThrow(/^clusters /);
    expect(() => verdict(given({ nights: 1.5 }))).toThrow(/^nights /);
    expect(() => verdict(given({ margin: 0 }))).toThrow(/^margin /);
  });
});
