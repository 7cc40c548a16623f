/**
 * Pictures take their colours from tokens.css at run time, so that there is one file of looks. Nothing here
 * imports ECharts: reading tokens must not pull the chart library into a page without charts.
 */
import { computed } from 'vue';
import type { ComputedRef } from 'vue';
import { MINUS } from './format.ts';
import { useTheme } from '../composables/useTheme.ts';
import type { Theme } from '../composables/useTheme.ts';

const names = [
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
export type TokenName = (typeof names)[number];

export interface ChartTokens extends Record<TokenName, string> {
  theme: Theme;
  /** Lines and bars of antennas, by `antennaLook(letter).colour` (1 to 7). */
  antennaLine: (colour: number) => string;
  /** Text sizes in px: the root's size may have been enlarged by the reader. */
  smallPx: number;
  bodyPx: number;
}

export function readChartTokens(theme: Theme): ChartTokens {
  const style = getComputedStyle(document.documentElement);
  const read = (name: string) => fullHex(style.getPropertyValue(`--${name}`).trim());
  const rootPx = Number.parseFloat(style.fontSize) || 16;
  return {
    ...(Object.fromEntries(names.map((name) => [name, read(name)])) as Record<TokenName, string>),
    theme,
    antennaLine: (colour) => read(`antenna-${colour}-line`),
    smallPx: rootPx * 0.8125,
    bodyPx: rootPx * 0.9375,
  };
}

/** The build shortens #ffffff to #fff; whoever mixes colours wants all six figures. */
function fullHex(value: string): string {
  return /^#[0-9a-f]{3}$/i.test(value) ? value.replaceAll(/[0-9a-f]/gi, '$&$&') : value;
}

/** The tokens of the theme on the screen; charts that put colours in their options compute from this. */
export function useChartTokens(): ComputedRef<ChartTokens> {
  const { theme } = useTheme();
  return computed(() => readChartTokens(theme.value));
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
