import { inflateSync } from 'node:zlib';
import { getDocumentProxy } from 'unpdf';
import { describe, expect, it } from 'vitest';
import type { Paper } from '../../../../shared/contracts/finding.ts';
import { cell, fixtureAnswer } from '../../../../shared/pictures/answer.fixture.ts';
import { drawPictures } from '../pictures.ts';
import { drawFinding } from './draw-finding.ts';
import type { PrintedFinding } from './facts.ts';
import { printedFinding } from './printed-finding.fixture.ts';

interface Word {
  text: string;
  /** Points from the lower left corner. */
  x: number;
  y: number;
  width: number;
}
interface Page {
  width: number;
  height: number;
  words: Word[];
  text: string;
}

/** Reads the pages back with an independent program (PDF.js), as a reader's would. */
async function read(pdf: Uint8Array): Promise<Page[]> {
  const document = await getDocumentProxy(new Uint8Array(pdf));
  const pages: Page[] = [];
  for (let number = 1; number <= document.numPages; number++) {
    const page = await document.getPage(number);
    const { width, height } = page.getViewport({ scale: 1 });
    const { items } = await page.getTextContent();
    const words = items.flatMap((item): Word[] =>
      'str' in item && item.str.trim() !== ''
        ? [{ text: item.str, x: item.transform[4], y: item.transform[5], width: item.width }]
        : [],
    );
    const text = words
      .map((word) => word.text)
      .join(' ')
      .replaceAll(/\s+/g, ' ');
    pages.push({ width, height, words, text });
  }
  return pages;
}

const plain = (text: string) => text.replaceAll(/\s+/g, ' ');

async function print(
  finding: PrintedFinding,
  paper: Paper = 'a4',
  pictures = drawPictures(finding.answer as Parameters<typeof drawPictures>[0]),
): Promise<Uint8Array> {
  return drawFinding({ finding, pictures, paper });
}

/** What the deflated streams of a file hold, as text. */
function streamsOf(pdf: Uint8Array): string[] {
  const bytes = Buffer.from(pdf);
  const raw = bytes.toString('latin1');
  return [...raw.matchAll(/\/Filter \/FlateDecode[^>]*>>\s*stream\r?\n/g)].map((match) => {
    const from = match.index + match[0].length;
    return inflateSync(bytes.subarray(from, raw.indexOf('endstream', from))).toString('latin1');
  });
}

/** A long season with long names, every band and the finest sectors: what strains a page most. */
function hardAnswer() {
  const nights = Array.from({ length: 150 }, (_, index) =>
    cell({
      night: new Date(Date.UTC(2026, 6, 1 + index)).toISOString().slice(0, 10),
      estimateDb: 3 * Math.sin(index),
      clusters: 9 + (index % 5),
    }),
  );
  return fixtureAnswer({
    nights,
    sectorCount: 36,
    antennas: {
      a: { id: 1, name: 'North-east wire over the old turf bank, second try', marker: 'N', headingDeg: 45 },
      b: { id: 2, name: 'Phased pair of verticals behind the sheep shed', marker: 'V', headingDeg: 225 },
    },
    bandHours: {
      basis: 'sunset',
      cells: [160, 80, 60, 40, 30, 20, 17, 15, 12, 10].flatMap((bandMetres) =>
        Array.from({ length: 24 }, (_, index) =>
          cell({ bandMetres, hour: index - 8, estimateDb: 9 * Math.sin(index), clusters: 9, nights: 8 }),
        ),
      ),
    },
  });
}

describe('a printed finding', () => {
  it.each([
    ['a4', 595.28, 841.89],
    ['letter', 612, 792],
  ] as const)('fills pages of %s, each with its number', async (paper, width, height) => {
    const pages = await read(await print(printedFinding(), paper));
    expect(pages.length).toBeGreaterThan(1);
    for (const [index, page] of pages.entries()) {
      expect(page.width).toBeCloseTo(width, 1);
      expect(page.height).toBeCloseTo(height, 1);
      expect(page.text).toContain(`page ${index + 1} of ${pages.length}`);
    }
  });

  it('says everything that a reader needs, as text that can be selected', async () => {
    const finding = printedFinding();
    const pages = await read(await print(finding));
    const text = pages.map((page) => page.text).join(' ');
    const expected = [
      ...[finding.title, finding.note, finding.sentence, finding.answer.verdict.sentence],
      ...['Corrib Low Band Group', 'EI7QSB', 'IO53', finding.digest, finding.programVersion],
      ...['412 units', '96 stations', '14 nights', '2026-11-15 13:05Z by Aoife Analyst'],
      ...['Vertical: look again on 1 February 2027', 'M\u00e1ire Manager', 'Its radials lie in water.'],
      ...['The differences', 'Where', 'When', 'How steady', 'Is it fair', 'Receivers', 'Rules', 'Record'],
      ...['160 m: EI7QSA against EI7QSC', '+0.7 dB (0.3 to 1.1 dB)', 'How to read this'],
      ...['blocks of 15 min, window 30 s, tolerance 0.3 kHz, guard 20 s', '412 dwells kept with it'],
      ...['the night of 2026-11-15, which was still going on', '812', '\u221212'],
    ];
    for (const sentence of expected) expect(text).toContain(plain(sentence));
  });

  it.each(['a4', 'letter'] as const)(
    'cuts no text at the edge of %s and writes nothing over the foot',
    async (paper) => {
      const finding = printedFinding(hardAnswer(), {
        title:
          'A very long title that has to run over more than one line without being cut off anywhere at all',
        note: 'A word that is no word: '.concat('x'.repeat(300), '. ', 'It rained. '.repeat(120)),
      });
      const pages = await read(await print(finding, paper));
      for (const page of pages) {
        const foot = page.words.find((word) => /^page \d/.test(word.text))!;
        for (const word of page.words) {
          expect(word.x, word.text).toBeGreaterThan(40);
          expect(word.x + word.width, word.text).toBeLessThan(page.width - 40);
          expect(word.y, word.text).toBeLessThan(page.height - 40);
          expect(word.y, word.text).toBeGreaterThanOrEqual(foot.y - 0.01);
        }
        const lowest = Math.min(...page.words.filter((word) => word.y > foot.y + 1).map((word) => word.y));
        expect(lowest - foot.y, page.text.slice(-80)).toBeGreaterThan(10);
      }
      const text = pages.map((page) => page.text).join(' ');
      expect(text.match(/It rained\./g)).toHaveLength(120);
      // All nights are there, on as many sheets as they need.
      for (const { night } of hardAnswer().nights) expect(text).toContain(night!);
    },
  );

  it('leaves no heading behind at the foot of a page', async () => {
    const headings = ['Decision', 'Is it fair', 'The same, seen otherwise', 'Receivers', 'Rules', 'Record'];
    // Notes of growing length push every heading over the end of a page once.
    const pictures = drawPictures(fixtureAnswer());
    for (const lines of [0, 9, 17, 26, 35, 44]) {
      const finding = printedFinding(fixtureAnswer(), { note: Array(lines).fill('A line.').join('\n') });
      const pages = await read(await print(finding, 'a4', pictures));
      for (const page of pages) {
        const body = page.words.filter((word) => word.y > 50);
        const lowest = body.reduce((low, word) => (word.y < low.y ? word : low));
        expect(headings, `${lines} lines`).not.toContain(lowest.text);
      }
    }
  });

  it('draws its pictures as vectors and embeds its fonts', async () => {
    const pdf = await print(printedFinding());
    const raw = Buffer.from(pdf).toString('latin1');
    expect(raw.match(/\/BaseFont \/\w+\+SourceSans3-(Regular|SemiBold)/g)!.length).toBeGreaterThanOrEqual(2);
    expect(raw).toMatch(/\/FontFile2/);
    expect(raw).not.toMatch(/\/Subtype \/Image/);
    // Lines and curves in the pages' own streams: some two hundred bars, cells, whiskers and ticks.
    const drawn = streamsOf(pdf).join('\n');
    expect(drawn.match(/^[-\d. ]+ l$/gm)!.length).toBeGreaterThan(200);
    expect(drawn.match(/^[-\d. ]+ c$/gm)!.length).toBeGreaterThan(50);
    expect(raw).not.toMatch(/\/(Helvetica|Times|JavaScript|Launch|URI)\b/);
  });

  it('writes names in the letters of their own script', async () => {
    const pages = await read(
      await print(
        printedFinding(fixtureAnswer(), { title: '\u0141\u00f3d\u017a, \u03a9mega and \u0416\u0443\u043a' }),
      ),
    );
    // Each script is a run of its own, and so a word of its own to the reader of the test.
    const text = pages[0]!.text.replaceAll(' ', '');
    expect(text).toContain('\u0141\u00f3d\u017a,\u03a9megaand\u0416\u0443\u043a');
  });

  it('gives no verdict where there is none, and names the cures', async () => {
    const answer = fixtureAnswer({
      estimate: null,
      rank: null,
      equivalence: null,
      offsets: [],
      verdict: {
        code: 'cannot be separated',
        sentence: 'North-east wire and Vertical cannot be separated from the receivers they were on.',
        cures: ['Swap the two antennas for about 40 minutes.'],
      },
    });
    answer.fairness.separable = false;
    const text = (await read(await print(printedFinding(answer)))).map((page) => page.text).join(' ');
    expect(text).toContain('cannot be separated from the receivers they were on');
    expect(text).toContain('Swap the two antennas for about 40 minutes.');
    expect(text).toContain('No estimate.');
    expect(text).toContain('cannot be told from those between the antennas');
  });
});
