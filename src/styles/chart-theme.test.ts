import { afterEach, describe, expect, it } from 'vitest';
import { chartTheme, differenceColour } from '../../shared/pictures/chart-tokens.ts';
import { readChartTokens } from './chart-theme.ts';

const root = document.documentElement;
afterEach(() => root.removeAttribute('style'));

describe('the tokens of the charts', () => {
  it('are read from the page, with colours that the build shortened written out again', () => {
    root.style.setProperty('--diff-zero', ' #FfF');
    root.style.setProperty('--line', '#2b3c4b');
    root.style.setProperty('--antenna-3-line', '#00855f');
    const tokens = readChartTokens('light');
    expect([tokens['diff-zero'], tokens.line, tokens.antennaLine(3)]).toEqual([
      '#FFffFF',
      '#2b3c4b',
      '#00855f',
    ]);
  });

  it('give the charts their font and grid', () => {
    root.style.setProperty('--font', 'Source Sans 3');
    root.style.setProperty('--line', '#123456');
    expect(chartTheme(readChartTokens('dark'))).toMatchObject({
      textStyle: { fontFamily: 'Source Sans 3' },
      valueAxis: { splitLine: { lineStyle: { color: '#123456' } } },
    });
  });
});

describe('the colour of a difference', () => {
  const colour = (db: number) => {
    root.style.setProperty('--diff-zero', '#000');
    root.style.setProperty('--diff-a', '#f08000');
    root.style.setProperty('--diff-b', '#0080f0');
    return differenceColour(readChartTokens('dark'), db, 4);
  };
  it('is the surface at zero, half way at half of the scale, and full at its end and beyond', () => {
    expect([0, 2, 4, 40].map(colour)).toEqual([
      'rgb(0, 0, 0)',
      'rgb(120, 64, 0)',
      'rgb(240, 128, 0)',
      'rgb(240, 128, 0)',
    ]);
  });
  it('turns to the other hue where B hears better', () => {
    expect(colour(-4)).toBe('rgb(0, 128, 240)');
  });
});
