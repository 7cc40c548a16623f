import type { CustomSeriesOption } from 'echarts/charts';
import type { GridComponentOption } from 'echarts/components';
import type { ComposeOption } from 'echarts/core';
import type { ComparisonAnswer, ComparisonCell } from '../contracts/comparison.ts';
import { differenceColour, type ChartTokens } from './chart-tokens.ts';
import { formatSigned } from '../format.ts';
import type { DifferenceScale } from './difference-scale.ts';

export type PictureOption = ComposeOption<CustomSeriesOption | GridComponentOption>;

/** Something in a picture that can be pointed at: series "cells" draws them in this order. */
export interface PictureCell {
  title: string;
  words: string;
  /** null for a bar of the histogram, which is no cell of its own. */
  cell: ComparisonCell | null;
}

export interface Picture {
  option: PictureOption;
  cells: PictureCell[];
  heightPx: number;
}

export interface PictureContext {
  answer: ComparisonAnswer;
  scale: DifferenceScale;
  tokens: ChartTokens;
  /** The cell that is pointed at, in whichever picture. */
  lit: ComparisonCell | null;
  /** Phone width: numbers and labels must still fit. */
  compact: boolean;
}

export type RenderItem = NonNullable<CustomSeriesOption['renderItem']>;
type RenderApi = Parameters<RenderItem>[1];
type Shape = ReturnType<RenderItem>;

/** Where the plot of a cartesian picture lies, in px. */
export interface PlotBox {
  left: number;
  right: number;
  top: number;
  bottom: number;
}

/** The dB axis that all pictures share. */
export function differenceAxis({ scale, tokens }: PictureContext, gridIndex: number) {
  return {
    gridIndex,
    type: 'value' as const,
    min: -scale.limitDb,
    max: scale.limitDb,
    interval: scale.stepDb,
    axisLine: { show: true, onZero: false, lineStyle: { color: tokens.edge } },
    axisTick: { show: true, lineStyle: { color: tokens.edge } },
    axisLabel: {
      color: tokens.muted,
      fontSize: tokens.smallPx,
      hideOverlap: true,
      formatter: (db: number) => formatSigned(db, Number.isInteger(scale.stepDb) ? 0 : 1),
    },
    splitLine: { show: true, lineStyle: { color: tokens.line, width: 1 } },
    name: 'dB',
    nameLocation: 'end' as const,
    nameGap: 6,
    nameTextStyle: { color: tokens.muted, fontSize: tokens.smallPx },
  };
}

/** Behind the data: the margin as a shaded band, zero as a line, and which way is which. */
export function differenceGround(
  context: PictureContext,
  axisIndex: number,
  box: PlotBox,
): CustomSeriesOption {
  const { answer, tokens } = context;
  return overlay('ground', axisIndex, 1, (api) => {
    const at = (db: number) => api.coord([db, 0])[0]!;
    const top = box.top;
    const height = api.getHeight() - box.top - box.bottom;
    const left = box.left;
    const width = api.getWidth() - box.left - box.right;
    const side = (text: string, end: 'left' | 'right') => ({
      type: 'text' as const,
      style: {
        text,
        x: end === 'left' ? left : left + width,
        y: top - 6,
        align: end,
        verticalAlign: 'bottom' as const,
        fill: end === 'left' ? tokens['diff-b'] : tokens['diff-a'],
        font: `600 ${tokens.smallPx}px ${tokens.font}`,
        width: width / 2 - 12,
        overflow: 'truncate' as const,
      },
    });
    return {
      type: 'group',
      children: [
        {
          type: 'rect',
          shape: {
            x: at(-answer.marginDb),
            y: top,
            width: at(answer.marginDb) - at(-answer.marginDb),
            height,
          },
          style: { fill: tokens.edge, opacity: 0.2 },
        },
        verticalLine(at(0), top, height, { stroke: tokens.text, lineWidth: 1.25 }),
        side(`\u2190 ${answer.antennas.b.name}${context.compact ? '' : ' better'}`, 'left'),
        side(`${answer.antennas.a.name}${context.compact ? '' : ' better'} \u2192`, 'right'),
      ],
    };
  });
}

/** In front of the data: the value of the cell that is pointed at, wherever that cell is. */
export function litLine(context: PictureContext, axisIndex: number, box: PlotBox): CustomSeriesOption {
  const { lit, scale, tokens } = context;
  return overlay('lit', axisIndex, 6, (api) => {
    if (lit === null || lit.estimateDb === null || !lit.speaks) return { type: 'group', children: [] };
    const db = Math.max(-scale.limitDb, Math.min(scale.limitDb, lit.estimateDb));
    const height = api.getHeight() - box.top - box.bottom;
    return verticalLine(api.coord([db, 0])[0]!, box.top, height, {
      stroke: tokens.accent,
      lineWidth: 2,
      lineDash: [5, 3],
    });
  });
}

/** A series that draws once, not once a datum. */
export function overlay(
  id: string,
  axisIndex: number,
  z: number,
  draw: (api: RenderApi) => Shape,
): CustomSeriesOption {
  return {
    id,
    type: 'custom',
    silent: true,
    clip: false,
    xAxisIndex: axisIndex,
    yAxisIndex: axisIndex,
    z,
    data: [[0, 0]],
    encode: { x: [], y: [] },
    tooltip: { show: false },
    renderItem: (_params, api) => draw(api),
  };
}

export function verticalLine(
  x: number,
  y: number,
  height: number,
  style: { stroke: string; lineWidth: number; lineDash?: number[] },
) {
  return { type: 'line' as const, shape: { x1: x, y1: y, x2: x, y2: y + height }, style };
}

/** Height that `colourKey` takes at the foot of a map. */
export const colourKeyHeightPx = 48;

/**
 * The colours of a map over the same dB axis as in the other pictures; the cell that is pointed at is marked
 * on it. The key needs grid, axes and two series, all at `index`.
 */
export function colourKey(context: PictureContext, index: number, box: Pick<PlotBox, 'left' | 'right'>) {
  const { scale, tokens } = context;
  const steps = 60;
  const plot: PlotBox = { ...box, top: 0, bottom: 0 };
  const strip = overlay('key', index, 2, (api) => {
    const children = Array.from({ length: steps }, (_, step) => {
      const from = -scale.limitDb + (2 * scale.limitDb * step) / steps;
      const to = from + (2 * scale.limitDb) / steps;
      const [x, bottom] = api.coord([from, 0]) as [number, number];
      const [end, top] = api.coord([to, 1]) as [number, number];
      return {
        type: 'rect' as const,
        // One px of overlap hides the seams that antialiasing would leave.
        shape: { x, y: top, width: end - x + 1, height: bottom - top },
        style: { fill: differenceColour(tokens, (from + to) / 2, scale.fullColourDb) },
      };
    });
    return { type: 'group', children };
  });
  const pointer = overlay('key-lit', index, 4, (api) => {
    const { lit } = context;
    if (lit === null || lit.estimateDb === null || !lit.speaks) return { type: 'group', children: [] };
    const db = Math.max(-scale.limitDb, Math.min(scale.limitDb, lit.estimateDb));
    const [x, top] = api.coord([db, 1]) as [number, number];
    return verticalLine(x, top - 3, 16, { stroke: tokens.accent, lineWidth: 3 });
  });
  return {
    grid: { left: plot.left, right: plot.right, bottom: 26, height: 10 },
    xAxis: { ...differenceAxis(context, index), splitLine: { show: false } },
    yAxis: { gridIndex: index, type: 'value' as const, min: 0, max: 1, show: false },
    series: [strip, pointer],
  };
}

/** Black or white, whichever reads better on a colour; one of them always has at least 4.5 : 1. */
export function inkOn(fill: string): string {
  const channels = (
    fill.startsWith('#')
      ? [1, 3, 5].map((at) => Number.parseInt(fill.slice(at, at + 2), 16))
      : (fill.match(/\d+/g) ?? []).slice(0, 3).map(Number)
  ).map((channel) => {
    const share = channel / 255;
    return share <= 0.04045 ? share / 12.92 : ((share + 0.055) / 1.055) ** 2.4;
  });
  const luminance = 0.2126 * channels[0]! + 0.7152 * channels[1]! + 0.0722 * channels[2]!;
  return (luminance + 0.05) ** 2 > 1.05 * 0.05 ? '#000000' : '#ffffff';
}

/** Fill of a cell: its colour when it speaks; surface and hatch when it does not. */
export function cellStyle(context: PictureContext, cell: ComparisonCell | null) {
  const { tokens, scale } = context;
  return cell !== null && cell.speaks && cell.estimateDb !== null
    ? { speaks: true, fill: differenceColour(tokens, cell.estimateDb, scale.fullColourDb) }
    : { speaks: false, fill: tokens.surface };
}
