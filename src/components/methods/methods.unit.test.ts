import { describe, expect, it } from 'vitest';
import { methodGroups } from '../../../shared/methods/method-groups.ts';
import { findMethods } from './find-methods.ts';
import { stackDots, stripAxis } from './scale-strip.ts';
import { isNumeric, keepUnits } from './typeset.ts';

const idsFor = (wanted: string) =>
  findMethods(methodGroups, wanted).flatMap(({ entries }) => entries.map(({ id }) => id));

describe('finding a method', () => {
  it('gives everything for nothing, in the order of the page', () => {
    expect(findMethods(methodGroups, '  ').map(({ key }) => key)).toEqual(methodGroups.map(({ key }) => key));
    expect(idsFor('')).toHaveLength(42);
  });

  it('needs every word, in any order and case, and leaves out groups without any', () => {
    expect(idsFor('McNemar')).toEqual(['odds-ratio']);
    expect(idsFor('hodges JOHNSON')).toEqual(['hodges-lehmann']);
    expect(idsFor('hodges schuirmann')).toEqual([]);
    expect(findMethods(methodGroups, 'mcnemar').map(({ key }) => key)).toEqual(['otherwise']);
  });

  it('takes plain hyphens and letters for the typeset ones', () => {
    expect(idsFor('scheffe')).toEqual(['separability']);
    expect(idsFor('657-680')).toEqual(['equivalence']);
    expect(idsFor('i2')).toContain('pooling');
  });
});

describe('the picture of an example', () => {
  it('has an axis in round steps that holds zero, the margin and all data', () => {
    const axis = stripAxis([{ label: 'x', dots: [0.4, 2.6], interval: [1.1, 3.4] }], 1);
    expect(axis.ticksDb).toEqual([-2, -1, 0, 1, 2, 3, 4]);
    expect([axis.fromDb, axis.toDb]).toEqual([-2, 4]);
    expect(stripAxis([{ label: 'y', at: 40 }]).ticksDb).toEqual([-5, 0, 5, 10, 15, 20, 25, 30, 35, 40, 45]);
  });

  it('stacks equal readings about the line', () => {
    expect(stackDots([2, 1, 2, 2]).map(({ offsetPx }) => Math.abs(offsetPx))).toEqual([0, 0, 8, 8]);
    expect(new Set(stackDots([2, 2, 2, 2, 2]).map(({ offsetPx }) => offsetPx)).size).toBe(5);
  });
});

describe('typesetting', () => {
  it('keeps a number with its unit and breaks nowhere else', () => {
    expect(keepUnits('95 % of 3 dB in 40 minutes and 2 stations')).toBe(
      '95\u202f% of 3\u202fdB in 40 minutes and 2 stations',
    );
    expect(keepUnits('+1.8\u2009dB')).toBe('+1.8\u202fdB');
  });

  it('tells numbers from words that begin with one', () => {
    expect(
      ['+1.5\u2009dB', '\u22120.4', '14', '85\u2009%', '9.3 h', '\u22122.0\u00b0'].every(isNumeric),
    ).toBe(true);
    expect(['1 on both', '14 Nov', '2 of 3', '1.1 to 2.5\u2009dB', '', 'none'].some(isNumeric)).toBe(false);
  });
});
