import SVGtoPDF from 'svg-to-pdfkit';
import { fontName, runsOf } from './fonts.ts';

/** The size of an SVG that ECharts drew, in px. */
export function svgSize(svg: string): { width: number; height: number } {
  const read = (name: string) => Number(new RegExp(`^<svg[^>]* ${name}="([0-9.]+)"`).exec(svg)?.[1]);
  const [width, height] = [read('width'), read('height')];
  if (!(width > 0) || !(height > 0)) throw new RangeError('The picture says no width and height.');
  return { width, height };
}

/** Draws a picture as vectors and real text, `width` points wide; returns its height in points. */
export function drawSvg(
  doc: PDFKit.PDFDocument,
  svg: string,
  place: { x: number; y: number; width: number },
): number {
  const size = svgSize(svg);
  const height = (size.height * place.width) / size.width;
  // The types of the package say "the class" where they mean a document.
  const target = doc as unknown as Parameters<typeof SVGtoPDF>[0];
  SVGtoPDF(target, forPrint(svg), place.x, place.y, {
    width: place.width,
    height,
    fontCallback: (family, bold) => fontName(subsetIn(family), bold ? 600 : 400),
    warningCallback: () => undefined,
  });
  return height;
}

/**
 * What svg-to-pdfkit does not do by itself: an outline behind a text (paint-order) becomes a text of its own
 * below, and a text in several scripts becomes one run a font.
 */
export function forPrint(svg: string): string {
  return svg.replaceAll(/<text([^>]*)>([^<]*)<\/text>/g, (_whole, attributes: string, content: string) => {
    const inner = inRuns(content);
    if (!/paint-order/.test(attributes)) return `<text${attributes}>${inner}</text>`;
    const plain = attributes.replace(/ stroke(-[a-z]+)?="[^"]*"/g, '');
    return `<text${attributes}>${inner}</text><text${plain}>${inner}</text>`;
  });
}

const marker = 'subset-';

function inRuns(escaped: string): string {
  const runs = runsOf(unescape(escaped));
  const written = ({ text }: { text: string }) => escape(text);
  if (runs.every((run) => run.subset === 'latin')) return runs.map(written).join('');
  return runs.map((run) => `<tspan font-family="${marker}${run.subset}">${written(run)}</tspan>`).join('');
}

function subsetIn(family: string): string {
  return family.startsWith(marker) ? family.slice(marker.length) : 'latin';
}

const entities: [string, string][] = [
  ['&', '&amp;'],
  ['<', '&lt;'],
  ['>', '&gt;'],
  ['"', '&quot;'],
  ["'", '&#39;'],
];

function unescape(text: string): string {
  return [...entities].reverse().reduce((out, [letter, entity]) => out.replaceAll(entity, letter), text);
}

function escape(text: string): string {
  return entities.slice(0, 3).reduce((out, [letter, entity]) => out.replaceAll(letter, entity), text);
}
