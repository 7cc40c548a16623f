import { describe, expect, it } from 'vitest';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { differenceColour } from './chart-tokens.ts';
import { cell, fixtureAnswer, fixtureTokens } from './answer.fixture.ts';
import { bandHourPicture, hourOrder } from './band-hour-option.ts';
import { contextOf, drawn, has, hatches, texts } from './drawn.fixture.ts';
import { forestPicture } from './forest-option.ts';
import { barTitle, histogramBars, histogramPicture } from './histogram-option.ts';
import { cutInterval } from './interval-mark.ts';
import { inkOn } from './picture.ts';
import { rosePicture } from './rose-option.ts';

const pictures = { histogramPicture, rosePicture, bandHourPicture, forestPicture };

describe('the dB axis of the pictures', () => {
  it.each(Object.entries(pictures))('is symmetric and the same in %s', (_name, build) => {
    const context = contextOf(fixtureAnswer());
    const axes = [build(context).option.xAxis].flat().filter((axis) => axis?.type === 'value');
    expect(axes).toHaveLength(1);
    expect(axes[0]).toMatchObject({
      min: -context.scale.limitDb,
      max: context.scale.limitDb,
      interval: context.scale.stepDb,
      name: 'dB',
    });
    const labels = texts(drawn(build(context)));
    expect(labels).toContain('0');
    expect(labels).toContain(`+${context.scale.limitDb}`);
    expect(labels).toContain(`\u2212${context.scale.limitDb}`);
  });
});

describe('the histogram', () => {
  it('loses no unit: what lies beyond the axis is counted in the bars at its ends', () => {
    const answer = fixtureAnswer();
    const bars = histogramBars(answer, 5);
    const total = (list: { units: number }[]) => list.reduce((sum, bar) => sum + bar.units, 0);
    expect(total(bars)).toBe(total(answer.histogram.bins));
    expect(Math.min(...bars.map((bar) => bar.fromDb))).toBeGreaterThanOrEqual(-5);
    expect(Math.max(...bars.map((bar) => bar.toDb))).toBeLessThanOrEqual(5);
    expect(bars.filter((bar) => bar.beyond).map(barTitle)).toEqual([
      'below \u22123.5\u2009dB',
      'above +3.5\u2009dB',
    ]);
  });

  it('paints bars where A was stronger in the colour of A, and the others in that of B', () => {
    const only = (fromDb: number) =>
      drawn(
        histogramPicture(
          contextOf(
            fixtureAnswer({ histogram: { binWidthDb: 1, bins: [{ fromDb, units: 9 }] }, estimate: null }),
          ),
        ),
      );
    const bar = (svg: string, colour: string) =>
      [...svg.matchAll(new RegExp(`<path[^>]*${colour}`, 'g'))].length;
    expect(bar(only(2), '#ff8000')).toBe(1);
    expect(bar(only(2), '#0080ff')).toBe(0);
    expect(bar(only(-3), '#0080ff')).toBe(1);
    expect(bar(only(-3), '#ff8000')).toBe(0);
  });

  it('labels the estimate at its place and says which way is which', () => {
    const labels = texts(drawn(histogramPicture(contextOf(fixtureAnswer()))));
    expect(labels).toContain('+1.8\u2009dB');
    expect(labels).toContain('\u2190 Vertical better');
    expect(labels).toContain('North-east wire better \u2192');
  });
});

describe('the direction rose', () => {
  it('has a cell for every sector of the station, also where nothing was heard', () => {
    const picture = rosePicture(contextOf(fixtureAnswer()));
    expect(picture.cells.map((one) => one.title)[6]).toBe('180-210 degrees');
    expect(picture.cells).toHaveLength(12);
    expect(picture.cells[6]!.words).toMatch(/^Not enough evidence: 0 units/);
  });

  it('hatches exactly the sectors that do not speak', () => {
    const answer = fixtureAnswer();
    const silent = 12 - answer.sectors.filter((one) => one.speaks).length;
    expect(silent).toBe(3);
    expect(hatches(drawn(rosePicture(contextOf(answer))))).toBe(silent);
  });

  it('colours a sector by its sign and writes the number beside the colour', () => {
    const sectors = [
      cell({ sector: 1, estimateDb: 3, clusters: 20, nights: 9 }),
      cell({ sector: 7, estimateDb: -3, clusters: 20, nights: 9 }),
    ];
    const context = contextOf(fixtureAnswer({ sectors }));
    const svg = drawn(rosePicture(context));
    expect(texts(svg)).toContain('+3.0');
    expect(texts(svg)).toContain('\u22123.0');
    const full = context.scale.fullColourDb;
    expect(has(svg, differenceColour(fixtureTokens, 3, full))).toBe(true);
    expect(has(svg, differenceColour(fixtureTokens, -3, full))).toBe(true);
    expect(has(svg, differenceColour(fixtureTokens, 2.5, full))).toBe(false);
  });

  it('never colours a sector without enough evidence, however large its difference', () => {
    const sectors = [cell({ sector: 1, estimateDb: 2.25, clusters: 3, nights: 2 })];
    const context = contextOf(fixtureAnswer({ sectors }));
    expect(
      has(drawn(rosePicture(context)), differenceColour(fixtureTokens, 2.25, context.scale.fullColourDb)),
    ).toBe(false);
  });
});

describe('the band by hour map', () => {
  it('puts the hours in the order of the night and cuts the clock where nothing was heard', () => {
    const cells = [22, 23, 0, 1, 3].map((hour) =>
      cell({ bandMetres: 160, hour, estimateDb: 1, clusters: 9 }),
    );
    expect(hourOrder({ basis: 'utc', cells })).toEqual([22, 23, 0, 1, 2, 3]);
    const sunset = [-1, 0, 2].map((hour) => cell({ bandMetres: 160, hour, estimateDb: 1, clusters: 9 }));
    expect(hourOrder({ basis: 'sunset', cells: sunset })).toEqual([-1, 0, 1, 2]);
    expect(hourOrder({ basis: 'utc', cells: [] })).toEqual([]);
  });

  it('keeps all 24 hours when every one has data', () => {
    const cells = Array.from({ length: 24 }, (_, hour) =>
      cell({ bandMetres: 80, hour, estimateDb: 0, clusters: 9 }),
    );
    expect(new Set(hourOrder({ basis: 'utc', cells })).size).toBe(24);
  });

  it('hatches exactly the cells that do not speak, missing hours included', () => {
    const answer = fixtureAnswer();
    expect(hatches(drawn(bandHourPicture(contextOf(answer)), 900))).toBe(
      answer.bandHours.cells.filter((one) => !one.speaks).length,
    );
    const gap = answer.bandHours.cells.filter((one) => one.bandMetres !== 80 || one.hour !== 22);
    const holed = fixtureAnswer({ bandHours: { basis: 'utc', cells: gap } });
    expect(hatches(drawn(bandHourPicture(contextOf(holed)), 900))).toBe(
      answer.bandHours.cells.filter((one) => !one.speaks).length + 1,
    );
  });

  it.each([
    [900, false],
    [330, true],
  ])('writes the number into every cell at %d px', (width, compact) => {
    const answer = fixtureAnswer();
    const labels = texts(drawn(bandHourPicture(contextOf(answer, { compact })), width));
    expect(labels.filter((text) => /^[+\u2212]?\d+\.\d$/.test(text))).toHaveLength(
      answer.bandHours.cells.length,
    );
  });

  it('names the hours after what they are counted from', () => {
    const cells = [cell({ bandMetres: 160, hour: -2, estimateDb: 1, clusters: 9, nights: 4 })];
    const picture = bandHourPicture(contextOf(fixtureAnswer({ bandHours: { basis: 'sunrise', cells } })));
    expect(picture.cells[0]!.title).toBe('160\u2009m, 1 to 2\u2009h before sunrise');
    expect(texts(drawn(picture))).toContain('hours from sunrise');
  });
});

describe('the night by night forest', () => {
  it('has a row a night and the answer over all of them last', () => {
    const labels = texts(drawn(forestPicture(contextOf(fixtureAnswer()))));
    const rows = labels.filter((text) => /^2026-|^All/.test(text));
    expect(rows).toHaveLength(15);
    expect(rows[0]).toBe('2026-11-01');
    expect(rows[14]).toBe('All nights');
  });

  it('marks where an interval runs on beyond the axis', () => {
    expect(cutInterval([-30, 2], 12)).toEqual({ from: -12, to: 2, runsOnLow: true, runsOnHigh: false });
    expect(cutInterval([1, 30], 12)).toEqual({ from: 1, to: 12, runsOnLow: false, runsOnHigh: true });
  });

  it('draws a night without enough evidence hollow and dashed', () => {
    const loud = [cell({ night: '2026-11-01', estimateDb: 2, clusters: 9 })];
    const quiet = [cell({ night: '2026-11-01', estimateDb: 2, clusters: 3 })];
    const dashes = (nights: ComparisonAnswer['nights']) =>
      drawn(forestPicture(contextOf(fixtureAnswer({ nights })))).includes('stroke-dasharray="3,3"');
    expect(dashes(loud)).toBe(false);
    expect(dashes(quiet)).toBe(true);
  });
});

describe('linked brushing', () => {
  it('marks the value of the cell that is pointed at on the axis of every picture', () => {
    const answer = fixtureAnswer();
    for (const build of Object.values(pictures)) {
      expect(drawn(build(contextOf(answer)))).not.toContain('#ffff00');
      expect(drawn(build(contextOf(answer, { lit: answer.sectors[1]! })))).toContain('#ffff00');
    }
  });
});

describe('numbers on colours', () => {
  it('are black or white, whichever has at least 4.5 to 1', () => {
    expect(inkOn('rgb(243, 156, 61)')).toBe('#000000');
    expect(inkOn('#1f5fa8')).toBe('#ffffff');
    expect(inkOn('rgb(22, 33, 44)')).toBe('#ffffff');
  });
});
