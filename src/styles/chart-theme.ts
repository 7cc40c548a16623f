/**
 * Pictures take their colours from tokens.css at run time, so that there is one file of looks. Nothing here
 * imports ECharts: reading tokens must not pull the chart library into a page without charts.
 */
import { computed } from 'vue';
import type { ComputedRef } from 'vue';
import { chartTokenNames } from '../../shared/pictures/chart-tokens.ts';
import type { ChartTokens, TokenName } from '../../shared/pictures/chart-tokens.ts';
import { useTheme } from '../composables/useTheme.ts';
import type { Theme } from '../composables/useTheme.ts';

export function readChartTokens(theme: Theme): ChartTokens {
  const style = getComputedStyle(document.documentElement);
  const read = (name: string) => fullHex(style.getPropertyValue(`--${name}`).trim());
  const rootPx = Number.parseFloat(style.fontSize) || 16;
  return {
    ...(Object.fromEntries(chartTokenNames.map((name) => [name, read(name)])) as Record<TokenName, string>),
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
