import { CustomChart } from 'echarts/charts';
import { GridComponent } from 'echarts/components';
import { init, use } from 'echarts/core';
import { SVGRenderer } from 'echarts/renderers';
import type { ComparisonAnswer } from '../../../shared/contracts/comparison.ts';
import type { PictureName } from '../../../shared/contracts/finding.ts';
import { bandHourPicture } from '../../../shared/pictures/band-hour-option.ts';
import { chartTheme } from '../../../shared/pictures/chart-tokens.ts';
import type { ChartTokens } from '../../../shared/pictures/chart-tokens.ts';
import { differenceScale } from '../../../shared/pictures/difference-scale.ts';
import { forestPicture } from '../../../shared/pictures/forest-option.ts';
import { histogramPicture } from '../../../shared/pictures/histogram-option.ts';
import type { Picture, PictureContext } from '../../../shared/pictures/picture.ts';
import { rosePicture } from '../../../shared/pictures/rose-option.ts';

use([CustomChart, GridComponent, SVGRenderer]);

/** The light looks of src/styles/tokens.css, fixed: a finding's pictures never change with the screen's. */
export const printTokens: ChartTokens = {
  theme: 'light',
  ground: '#ffffff',
  surface: '#ffffff',
  raised: '#fbfaf7',
  line: '#d9d4c8',
  edge: '#7d7768',
  text: '#1b2530',
  muted: '#4f5b66',
  accent: '#8a5a00',
  ok: '#1f6b4c',
  caution: '#8a5a00',
  danger: '#a3261b',
  'diff-a': '#9a4f00',
  'diff-b': '#1f5fa8',
  'diff-zero': '#ffffff',
  hatch: '#7d7768',
  font: "'Source Sans 3', sans-serif",
  antennaLine: (colour) =>
    ['#a87300', '#2f86bd', '#00855f', '#8c8300', '#0072b2', '#d55e00', '#b55b8d'][colour - 1] ?? '#1b2530',
  smallPx: 11,
  bodyPx: 13,
};

/** Widths on paper, in px: two pictures side by side, or one over both columns. */
export const halfWidthPx = 324;
export const fullWidthPx = 665;
/** Nights on one sheet of the picture by night; more go onto further sheets. */
const nightsPerSheet = 40;

/** The picture in one piece and, where that is too tall for paper, in sheets. */
export interface FrozenPicture {
  whole: string;
  sheets: string[];
}
export type FrozenPictures = Record<PictureName, FrozenPicture>;

/** The four pictures of an answer as SVG: no script, no style sheet, nothing loaded from anywhere. */
export function drawPictures(answer: ComparisonAnswer): FrozenPictures {
  const context: PictureContext = {
    answer,
    scale: differenceScale(answer),
    tokens: printTokens,
    lit: null,
    compact: false,
  };
  const single = (svg: string): FrozenPicture => ({ whole: svg, sheets: [svg] });
  return {
    histogram: single(svgOf(histogramPicture({ ...context, compact: true }), halfWidthPx)),
    rose: single(svgOf(rosePicture({ ...context, compact: true }), halfWidthPx)),
    'band-hour': single(svgOf(bandHourPicture(context), fullWidthPx)),
    forest: {
      whole: svgOf(forestPicture(context), fullWidthPx),
      sheets: inSheets(answer.nights).map((nights) =>
        svgOf(forestPicture({ ...context, answer: { ...answer, nights } }), fullWidthPx),
      ),
    },
  };
}

/** Sheets of nearly the same length: a last one with two nights looks like a mistake. */
function inSheets<T>(items: T[]): T[][] {
  const count = Math.max(1, Math.ceil(items.length / nightsPerSheet));
  const size = Math.ceil(items.length / count);
  return Array.from({ length: count }, (_, sheet) => items.slice(sheet * size, (sheet + 1) * size));
}

function svgOf(picture: Picture, width: number): string {
  const chart = init(null, chartTheme(printTokens), {
    renderer: 'svg',
    ssr: true,
    width,
    height: picture.heightPx,
  });
  try {
    chart.setOption(picture.option);
    return plain(chart.renderToSVGString());
  } finally {
    chart.dispose();
  }
}

/** Without ECharts' own hover style sheet and the classes that it speaks of. */
function plain(svg: string): string {
  return svg
    .replaceAll(/<style[\s\S]*?<\/style>/g, '')
    .replaceAll(/ (class|pointer-events)="[^"]*"/g, '')
    .replaceAll(/\n\s*/g, '\n');
}
