/**
 * What a picture takes its looks from. On the screen the tokens are read from tokens.css; on paper they are
 * the fixed ones of the print. Nothing here imports ECharts or the DOM.
 */
import { MINUS } from '../format.ts';

export const chartTokenNames = [
  'ground',
  'surface',
  'raised',
  'line',
  'edge',
  'text',
  'muted',
  'accent',
  'ok',
  'caution',
  'danger',
  'diff-a',
  'diff-b',
  'diff-zero',
  'hatch',
  'font',
] as const;
export type TokenName = (typeof chartTokenNames)[number];

export interface ChartTokens extends Record<TokenName, string> {
  theme: 'dark' | 'light' | 'night';
  /** Lines and bars of antennas, by `antennaLook(letter).colour` (1 to 7). */
  antennaLine: (colour: number) => string;
  /** Text sizes in px: the root's size may have been enlarged by the reader. */
  smallPx: number;
  bodyPx: number;
}

/** An ECharts theme object: font, ground, axes, light grid lines. */
export function chartTheme(tokens: ChartTokens): Record<string, unknown> {
  const text = { color: tokens.text, fontFamily: tokens.font, fontSize: tokens.smallPx };
  const axis = {
    axisLine: { lineStyle: { color: tokens.edge } },
    axisTick: { lineStyle: { color: tokens.edge } },
    axisLabel: { ...text, color: tokens.muted },
    nameTextStyle: { ...text, color: tokens.muted },
    splitLine: { lineStyle: { color: tokens.line, width: 1 } },
    splitArea: { show: false },
  };
  return {
    backgroundColor: 'transparent',
    color: [1, 2, 3, 4, 5, 6, 7].map((colour) => tokens.antennaLine(colour)),
    textStyle: text,
    title: { textStyle: { ...text, fontWeight: 600 } },
    legend: { textStyle: text },
    categoryAxis: axis,
    valueAxis: {
      ...axis,
      axisLabel: { ...axis.axisLabel, formatter: (value: number) => String(value).replace('-', MINUS) },
    },
    timeAxis: axis,
    logAxis: axis,
    angleAxis: axis,
    radiusAxis: axis,
    tooltip: {
      backgroundColor: tokens.raised,
      borderColor: tokens.edge,
      borderWidth: 1,
      padding: [6, 10],
      textStyle: text,
      confine: true,
      transitionDuration: 0,
    },
    animationDuration: 150,
    animationDurationUpdate: 150,
  };
}

/** The colour of a difference: from the surface (zero) to the side that hears better, full at `fullDb`. */
export function differenceColour(tokens: ChartTokens, db: number, fullDb: number): string {
  const end = db >= 0 ? tokens['diff-a'] : tokens['diff-b'];
  const share = Math.min(1, Math.abs(db) / fullDb);
  const channels = [1, 3, 5].map((at) => {
    const from = Number.parseInt(tokens['diff-zero'].slice(at, at + 2), 16);
    const to = Number.parseInt(end.slice(at, at + 2), 16);
    return Math.round(from + (to - from) * share);
  });
  return `rgb(${channels.join(', ')})`;
}

/** Not enough evidence: diagonal strokes, no fill. For ECharts' `itemStyle.decal`. */
export function hatchDecal(tokens: ChartTokens): Record<string, unknown> {
  return {
    symbol: 'rect',
    color: tokens.hatch,
    dashArrayX: [1, 0],
    dashArrayY: [1, 5],
    rotation: -Math.PI / 4,
    symbolSize: 1,
  };
}
