import { readFileSync } from 'node:fs';
import { createRequire } from 'node:module';

/**
 * Source Sans 3 as the pages have it, embedded. Its files come in subsets by script; a text is written in
 * runs, each in the subset that has its letters. The figures of the font are tabular as they are.
 */
const require = createRequire(import.meta.url);
const packageName = '@fontsource/source-sans-3';
/** Asked in this order; the first that has a letter writes it. */
const subsets = ['latin', 'latin-ext', 'greek', 'greek-ext', 'cyrillic', 'cyrillic-ext', 'vietnamese'];
type Subset = string;
export type Weight = 400 | 600;
const weights: readonly Weight[] = [400, 600];

interface Face {
  name: string;
  file: string;
}
export const fontName = (subset: Subset, weight: Weight) => `${subset} ${weight}`;

/** All faces with where their bytes are; a document embeds only those that it writes with. */
export const faces: readonly Face[] = subsets.flatMap((subset) =>
  weights.map((weight) => ({
    name: fontName(subset, weight),
    file: require.resolve(`${packageName}/files/source-sans-3-${subset}-${weight}-normal.woff`),
  })),
);

const ranges = new Map<Subset, [number, number][]>(
  Object.entries(
    JSON.parse(readFileSync(require.resolve(`${packageName}/unicode.json`), 'utf8')) as Record<
      string,
      string
    >,
  ).map(([subset, text]) => [subset, text.split(',').map(rangeOf)]),
);

function rangeOf(text: string): [number, number] {
  const [from, to] = text
    .replace('U+', '')
    .split('-')
    .map((hex) => Number.parseInt(hex, 16));
  return [from!, to ?? from!];
}

/** The subset that has a letter; null when none has it. */
function subsetOf(codePoint: number): Subset | null {
  return (
    subsets.find((subset) =>
      ranges.get(subset)!.some(([from, to]) => codePoint >= from && codePoint <= to),
    ) ?? null
  );
}

/**
 * Letters that the font has in another shape only, and empty ones that its reader (fontkit) cannot measure. The
 * font's own space is as narrow as a thin space elsewhere; it must not break between a number and its unit.
 */
const replacements: Record<string, string> = {
  '\u2190': '\u2039',
  '\u2192': '\u203a',
  '\u2011': '-',
  '\u2009': '\u00a0',
  '\u202f': '\u00a0',
  '\t': ' ',
  '\u200b': '',
  '\ufeff': '',
};

export interface Run {
  subset: Subset;
  text: string;
}

/** A text in runs of one subset each. A letter of a script that the font does not have becomes "?". */
export function runsOf(text: string): Run[] {
  const runs: Run[] = [];
  for (const given of text.normalize('NFC')) {
    const letter = replacements[given] ?? given;
    if (letter === '') continue;
    const subset = subsetOf(letter.codePointAt(0)!);
    const shown = subset === null ? '?' : letter;
    const last = runs.at(-1);
    // Spaces stand in every subset: they stay with the word before.
    const wanted = subset === null ? 'latin' : letter === ' ' && last ? last.subset : subset;
    if (last?.subset === wanted) last.text += shown;
    else runs.push({ subset: wanted, text: shown });
  }
  return runs;
}
