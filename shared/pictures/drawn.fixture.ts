import { CustomChart } from 'echarts/charts';
import { GridComponent } from 'echarts/components';
import { init, use } from 'echarts/core';
import { SVGRenderer } from 'echarts/renderers';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { fixtureTokens } from './answer.fixture.ts';
import { differenceScale } from './difference-scale.ts';
import type { Picture, PictureContext } from './picture.ts';

use([CustomChart, GridComponent, SVGRenderer]);

export function contextOf(answer: ComparisonAnswer, more: Partial<PictureContext> = {}): PictureContext {
  const scale = differenceScale(answer);
  return { answer, scale, tokens: fixtureTokens, lit: null, compact: false, ...more };
}

/** The picture as ECharts really draws it. */
export function drawn(picture: Picture, width = 600): string {
  const chart = init(null, null, { renderer: 'svg', ssr: true, width, height: picture.heightPx });
  chart.setOption(picture.option);
  const svg = chart.renderToSVGString();
  chart.dispose();
  return svg;
}

export const texts = (svg: string) =>
  [...svg.matchAll(/<text[^>]*>([^<]*)<\/text>/g)].map((match) => match[1]!);

/** Whether the drawing has a colour; ECharts writes rgb triples with or without blanks. */
export const has = (svg: string, colour: string) =>
  svg.includes(colour) || svg.includes(colour.replaceAll(' ', ''));

export const hatches = (svg: string) => [...svg.matchAll(/fill="url\(#[^"]*\)"/g)].length;

/** Centres of the dots drawn in a colour, in px. */
export function dots(svg: string, fill: string): { x: number; y: number; radius: number }[] {
  return [...svg.matchAll(/<circle[^>]*>/g)]
    .map(([tag]) => tag)
    .filter((tag) => tag.includes(`fill="${fill}"`))
    .map((tag) => {
      const read = (name: string) => Number(new RegExp(` ${name}="([^"]*)"`).exec(tag)![1]);
      return { x: read('cx'), y: read('cy'), radius: read('r') };
    });
}

/** Tips of the arrowheads drawn in a colour: open strokes of three points. */
export function arrows(svg: string, stroke: string): { x: number; y: number }[] {
  return [...svg.matchAll(/<polyline points="([^"]*)"[^>]*>/g)].flatMap(([tag, points]) => {
    const numbers = points!.trim().split(/\s+/).map(Number);
    return tag.includes(`stroke="${stroke}"`) && numbers.length === 6
      ? [{ x: numbers[2]!, y: numbers[3]! }]
      : [];
  });
}
