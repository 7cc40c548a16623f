import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';

const css = readFileSync(new URL('tokens.css', import.meta.url), 'utf8');

type Tokens = Record<string, string>;

function blockOf(selector: string): Tokens {
  const start = css.indexOf(`${selector} {`);
  const body = css.slice(start, css.indexOf('}', start));
  return Object.fromEntries(
    [...body.matchAll(/--([a-z0-9-]+):\s*(#[0-9a-f]{6});/g)].map((match) => [match[1]!, match[2]!]),
  );
}

const dark = blockOf('html:root');
const themes: Record<string, Tokens> = {
  dark,
  light: { ...dark, ...blockOf("html:root[data-theme='light']") },
  night: { ...dark, ...blockOf("html:root[data-theme='night']") },
};

/** Relative luminance as WCAG 2.2 defines it. */
function luminance(hex: string): number {
  const [red, green, blue] = [1, 3, 5].map((at) => {
    const channel = Number.parseInt(hex.slice(at, at + 2), 16) / 255;
    return channel <= 0.04045 ? channel / 12.92 : ((channel + 0.055) / 1.055) ** 2.4;
  });
  return 0.2126 * red! + 0.7152 * green! + 0.0722 * blue!;
}

function contrast(one: string, other: string): number {
  const [low, high] = [luminance(one), luminance(other)].sort((a, b) => a - b);
  return (high! + 0.05) / (low! + 0.05);
}

const grounds = ['ground', 'surface', 'raised'];
const antennaNumbers = [1, 2, 3, 4, 5, 6, 7];

/** WCAG 1.4.3: text 4.5:1. */
const textPairs: [string, string][] = [
  ...['text', 'muted', 'accent', 'accent-hover', 'ok', 'caution', 'danger', 'diff-a', 'diff-b'].flatMap(
    (ink) => grounds.map((ground): [string, string] => [ink, ground]),
  ),
  ['accent-ink', 'accent'],
  ['accent-ink', 'accent-hover'],
  ['danger-ink', 'danger'],
  ...antennaNumbers.map((n): [string, string] => [`antenna-${n}-ink`, `antenna-${n}`]),
];

/** WCAG 1.4.11: edges of controls and marks of pictures 3:1. */
const graphicPairs: [string, string][] = [
  ...['edge', 'hatch', 'antenna-edge', ...antennaNumbers.map((n) => `antenna-${n}-line`)].flatMap((ink) =>
    grounds.map((ground): [string, string] => [ink, ground]),
  ),
];

it('measures contrast as WCAG does: black on white is 21, #777777 on white falls just short of 4.5', () => {
  expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 6);
  // WebAIM's and W3C's much-quoted example: 4.48:1.
  expect(contrast('#777777', '#ffffff')).toBeCloseTo(4.48, 2);
});

describe.each(Object.entries(themes))('the %s theme', (name, tokens) => {
  it.each(textPairs)(`in ${name}: text %s on %s reaches 4.5 to 1`, (ink, ground) => {
    expect(contrast(tokens[ink]!, tokens[ground]!)).toBeGreaterThanOrEqual(4.5);
  });
  it.each(graphicPairs)(`in ${name}: mark %s on %s reaches 3 to 1`, (ink, ground) => {
    expect(contrast(tokens[ink]!, tokens[ground]!)).toBeGreaterThanOrEqual(3);
  });
  it(`in ${name}: no difference in dB disappears into the surface`, () => {
    expect(tokens['diff-zero']).toBe(tokens.surface);
  });
});
