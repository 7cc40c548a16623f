import PDFDocument from 'pdfkit';
import type { Paper } from '../../../../shared/contracts/finding.ts';
import { printTokens } from '../pictures.ts';
import { faces, fontName, runsOf } from './fonts.ts';
import type { Weight } from './fonts.ts';
import { drawSvg, svgSize } from './svg.ts';

export const ink = {
  text: printTokens.text,
  muted: printTokens.muted,
  line: printTokens.line,
  edge: printTokens.edge,
  accent: printTokens.accent,
  a: printTokens['diff-a'],
  b: printTokens['diff-b'],
};

/** Margins in points; the footer stands inside the lower one. */
const margin = { side: 48, top: 46, bottom: 58 };
const leading = 1.32;
const headingSize = 13;
/** What a heading takes with the space above and below it. */
export const headingHeight = 12 + headingSize * leading + 4;

export interface TextStyle {
  size?: number;
  weight?: Weight;
  colour?: string;
  align?: 'left' | 'right' | 'center';
}
interface Placed extends TextStyle {
  x: number;
  y: number;
  width: number;
}

export interface SheetFacts {
  paper: Paper;
  title: string;
  author: string;
  subject: string;
  made: Date;
}

/**
 * A document that is filled from top to bottom. `y` is where the next thing goes; what does not fit on the
 * page goes onto the next one as a whole, so that no heading is left behind and no line is cut.
 */
export class Sheet {
  readonly doc: PDFKit.PDFDocument;
  readonly left = margin.side;
  readonly width: number;
  y = margin.top;
  private readonly bottom: number;
  private readonly wordWidths = new Map<string, number>();

  constructor(facts: SheetFacts) {
    this.doc = new PDFDocument({
      size: facts.paper === 'a4' ? 'A4' : 'LETTER',
      // Everything is placed by hand: pdfkit must not begin a page by itself.
      margin: 0,
      bufferPages: true,
      pdfVersion: '1.7',
      lang: 'en',
      displayTitle: true,
      info: {
        Title: facts.title,
        Author: facts.author,
        Subject: facts.subject,
        Creator: 'Whichwire',
        Producer: 'Whichwire',
        CreationDate: facts.made,
      },
    });
    for (const face of faces) this.doc.registerFont(face.name, face.file);
    this.width = this.doc.page.width - 2 * margin.side;
    this.bottom = this.doc.page.height - margin.bottom;
  }

  get room(): number {
    return this.bottom - this.y;
  }

  /** Points that a whole page offers. */
  get pageRoom(): number {
    return this.bottom - margin.top;
  }

  /** Begins a page when there is less room than this. */
  keep(height: number): void {
    if (this.room < height && this.y > margin.top) this.newPage();
  }

  newPage(): void {
    this.doc.addPage();
    this.y = margin.top;
  }

  space(points: number): void {
    // No page begins with a gap.
    if (this.y > margin.top) this.y = Math.min(this.y + points, this.bottom);
  }

  heightOf(text: string, width: number, { size = 10, weight = 400 }: TextStyle = {}): number {
    return this.linesOf(text, width, size, weight).length * size * leading;
  }

  /** Writes at a place without moving on; returns the height. */
  write(text: string, { x, y, width, size = 10, weight = 400, colour = ink.text, align }: Placed): number {
    const lines = this.linesOf(text, width, size, weight);
    lines.forEach((line, index) => {
      const spare = width - this.widthOf(line, size, weight);
      const start = align === 'right' ? x + spare : align === 'center' ? x + spare / 2 : x;
      this.writeLine(line, start, y + index * size * leading, size, weight, colour);
    });
    return lines.length * size * leading;
  }

  /** A paragraph over the whole width; a long one may break between lines, never with a single line alone. */
  paragraph(text: string, style: TextStyle & { after?: number } = {}): void {
    const { size = 10, weight = 400, colour = ink.text, after = 6 } = style;
    const lineHeight = size * leading;
    const lines = this.linesOf(text, this.width, size, weight);
    let next = 0;
    while (next < lines.length) {
      const left = lines.length - next;
      let fit = Math.floor((this.room + 0.01) / lineHeight);
      if (fit < left && left - fit === 1) fit -= 1;
      if (fit < Math.min(2, left)) {
        this.newPage();
        continue;
      }
      for (const line of lines.slice(next, next + fit)) {
        this.writeLine(line, this.left, this.y, size, weight, colour);
        this.y += lineHeight;
        next += 1;
      }
    }
    this.space(after);
  }

  /** A heading that stays with at least `keepWith` points of what follows; it also stands in the outline. */
  heading(text: string, keepWith: number): void {
    this.space(12);
    this.keep(headingSize * leading + 4 + keepWith);
    this.doc.outline.addItem(text);
    this.y += this.write(text, {
      x: this.left,
      y: this.y,
      width: this.width,
      size: headingSize,
      weight: 600,
    });
    this.y += 4;
  }

  rule(): void {
    this.doc
      .moveTo(this.left, this.y)
      .lineTo(this.left + this.width, this.y)
      .lineWidth(0.75)
      .stroke(ink.line);
  }

  picture(svg: string, place: { x: number; width: number }): number {
    return drawSvg(this.doc, svg, { ...place, y: this.y });
  }

  pictureHeight(svg: string, width: number): number {
    const size = svgSize(svg);
    return (size.height * width) / size.width;
  }

  /** Writes the foot of every page, when their number is known, and gives the bytes. */
  async finish(foot: (page: number, pages: number) => [left: string, right: string]): Promise<Uint8Array> {
    const { start, count } = this.doc.bufferedPageRange();
    for (let index = 0; index < count; index++) {
      this.doc.switchToPage(start + index);
      const [left, right] = foot(index + 1, count);
      const y = this.bottom + 18;
      this.doc
        .moveTo(this.left, y - 6)
        .lineTo(this.left + this.width, y - 6)
        .lineWidth(0.5)
        .stroke(ink.line);
      const style = { y, size: 8, colour: ink.muted };
      const rightWidth = 90;
      this.write(this.cut(left, this.width - rightWidth - 12, 8), {
        x: this.left,
        width: this.width,
        ...style,
      });
      this.write(right, {
        x: this.left + this.width - rightWidth,
        width: rightWidth,
        align: 'right',
        ...style,
      });
    }
    const chunks: Buffer[] = [];
    const done = new Promise<void>((resolve, reject) => {
      this.doc.on('data', (chunk: Buffer) => chunks.push(chunk));
      this.doc.on('end', resolve);
      this.doc.on('error', reject);
    });
    this.doc.end();
    await done;
    return new Uint8Array(Buffer.concat(chunks));
  }

  /** One line with an ellipsis where it would run into its neighbour. */
  private cut(text: string, width: number, size: number): string {
    if (this.widthOf(text, size, 400) <= width) return text;
    const letters = [...text];
    while (letters.length > 1 && this.widthOf(`${letters.join('')}\u2026`, size, 400) > width) letters.pop();
    return `${letters.join('').trimEnd()}\u2026`;
  }

  /** Word by word, each measured once: laying a text out anew for every prefix takes seconds a document. */
  widthOf(text: string, size: number, weight: Weight): number {
    const words = text.split(' ');
    const spaces = (words.length - 1) * this.wordWidth(' ', weight);
    return size * words.reduce((sum, word) => sum + this.wordWidth(word, weight), spaces);
  }

  /** At a size of one point. */
  private wordWidth(word: string, weight: Weight): number {
    const key = `${weight} ${word}`;
    const known = this.wordWidths.get(key);
    if (known !== undefined) return known;
    const width = runsOf(word).reduce(
      (sum, run) => sum + this.doc.font(fontName(run.subset, weight)).fontSize(1).widthOfString(run.text),
      0,
    );
    this.wordWidths.set(key, width);
    return width;
  }

  /** Broken at spaces; a word that is wider than the line is broken where it must be. */
  private linesOf(text: string, width: number, size: number, weight: Weight): string[] {
    const lines: string[] = [];
    for (const paragraph of text.replaceAll('\r', '').split('\n')) {
      let line = '';
      for (const word of paragraph.split(' ')) {
        const longer = line === '' ? word : `${line} ${word}`;
        if (this.widthOf(longer, size, weight) <= width) {
          line = longer;
          continue;
        }
        if (line !== '') lines.push(line);
        line = word;
        while (this.widthOf(line, size, weight) > width) {
          const part = this.widestPart(line, width, size, weight);
          lines.push(part);
          line = line.slice(part.length);
        }
      }
      lines.push(line);
    }
    return lines;
  }

  private widestPart(word: string, width: number, size: number, weight: Weight): string {
    const letters = [...word];
    let part = letters[0] ?? '';
    for (const letter of letters.slice(1)) {
      if (this.widthOf(part + letter, size, weight) > width) break;
      part += letter;
    }
    return part;
  }

  private writeLine(line: string, x: number, y: number, size: number, weight: Weight, colour: string): void {
    let at = x;
    for (const run of runsOf(line)) {
      this.doc.font(fontName(run.subset, weight)).fontSize(size).fillColor(colour);
      this.doc.text(run.text, at, y, { lineBreak: false });
      at += this.doc.widthOfString(run.text);
    }
  }
}
