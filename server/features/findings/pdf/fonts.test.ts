import { describe, expect, it } from 'vitest';
import { runsOf } from './fonts.ts';
import { forPrint, svgSize } from './svg.ts';

describe('a text in print', () => {
  it('is one run where one subset of the font has its letters', () => {
    expect(runsOf('+1.8\u2009dB \u2013 M\u00e1ire')).toEqual([
      { subset: 'latin', text: '+1.8\u00a0dB \u2013 M\u00e1ire' },
    ]);
  });

  it('is cut where the script changes, spaces staying with the word before', () => {
    expect(runsOf('\u041e\u043b\u044c\u0433\u0430 and \u0391')).toEqual([
      { subset: 'cyrillic', text: '\u041e\u043b\u044c\u0433\u0430 ' },
      { subset: 'latin', text: 'and ' },
      { subset: 'greek', text: '\u0391' },
    ]);
  });

  it('shows a question mark for a script that the font does not have, and composes accents', () => {
    expect(runsOf('\u5c71 e\u0301')).toEqual([{ subset: 'latin', text: '? \u00e9' }]);
  });
});

describe('a picture in print', () => {
  it('has the outline of a text below the text', () => {
    const svg = '<text x="1" stroke="#fff" stroke-width="4" paint-order="stroke" fill="#111">+1</text>';
    expect(forPrint(svg)).toBe(`${svg}<text x="1" paint-order="stroke" fill="#111">+1</text>`);
  });

  it('keeps names with marks of the markup as they are', () => {
    expect(forPrint('<text>A &amp; B &lt;old&gt; \u2192</text>')).toBe(
      '<text>A &amp; B &lt;old&gt; \u203a</text>',
    );
  });

  it('writes other scripts in runs of their own', () => {
    expect(forPrint('<text>A \u0416</text>')).toBe(
      '<text><tspan font-family="subset-latin">A </tspan><tspan font-family="subset-cyrillic">\u0416</tspan></text>',
    );
  });

  it('must say its size', () => {
    expect(svgSize('<svg width="324" height="300" xmlns="x">')).toEqual({ width: 324, height: 300 });
    expect(() => svgSize('<svg xmlns="x">')).toThrow(RangeError);
  });
});
