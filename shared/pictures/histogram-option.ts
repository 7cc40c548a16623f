import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { countOf, formatDb, formatDbInterval, formatNumber, formatSigned } from '../format.ts';
import { differenceAxis, differenceGround, litLine, overlay, verticalLine } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';

export interface HistogramBar {
  fromDb: number;
  toDb: number;
  units: number;
  /** The bar holds everything beyond its outer edge as well. */
  beyond: boolean;
}

/** Bars inside the axis; what lies further out is counted in the last bar of its side, so that none is lost. */
export function histogramBars(answer: ComparisonAnswer, limitDb: number): HistogramBar[] {
  const { binWidthDb, bins } = answer.histogram;
  const bars = new Map<number, HistogramBar>();
  for (const bin of bins) {
    const outsideLow = bin.fromDb < -limitDb;
    const outsideHigh = bin.fromDb + binWidthDb > limitDb;
    const shift = outsideLow
      ? Math.ceil((-limitDb - bin.fromDb) / binWidthDb - 1e-9)
      : outsideHigh
        ? -Math.ceil((bin.fromDb + binWidthDb - limitDb) / binWidthDb - 1e-9)
        : 0;
    const fromDb = bin.fromDb + shift * binWidthDb;
    const key = Math.round((fromDb / binWidthDb) * 1000);
    const bar = bars.get(key) ?? { fromDb, toDb: fromDb + binWidthDb, units: 0, beyond: false };
    bar.units += bin.units;
    bar.beyond ||= shift !== 0 && bin.units > 0;
    bars.set(key, bar);
  }
  return [...bars.values()].sort((one, other) => one.fromDb - other.fromDb);
}

export function barTitle(bar: HistogramBar): string {
  if (bar.beyond && bar.toDb <= 0) return `below ${formatDb(bar.toDb)}`;
  if (bar.beyond) return `above ${formatDb(bar.fromDb)}`;
  return `${formatSigned(bar.fromDb)} to ${formatDb(bar.toDb)}`;
}

/** How the differences of single units are spread, with the estimate and its 95 % interval over them. */
export function histogramPicture(context: PictureContext): Picture {
  const { answer, scale, tokens } = context;
  const box = { left: 44, right: 26, top: 44, bottom: 30 };
  const bars = histogramBars(answer, scale.limitDb);
  const total = Math.max(1, answer.counts.units);
  const cells: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 2,
    clip: true,
    encode: { x: [0, 1], y: 2 },
    data: bars.map((bar) => ({ value: [bar.fromDb, bar.toDb, bar.units] })),
    renderItem: (params, api) => {
      const bar = bars[params.dataIndex]!;
      const [left, top] = api.coord([bar.fromDb, bar.units]) as [number, number];
      const [right, bottom] = api.coord([bar.toDb, 0]) as [number, number];
      const fill = bar.fromDb >= 0 ? tokens['diff-a'] : bar.toDb <= 0 ? tokens['diff-b'] : tokens.muted;
      return {
        type: 'rect',
        shape: { x: left + 0.5, y: top, width: Math.max(1, right - left - 1), height: bottom - top },
        style: { fill, opacity: 0.75 },
        emphasis: { style: { opacity: 1 } },
      };
    },
  };
  const estimate = overlay('estimate', 0, 4, (api) => {
    if (answer.estimate === null) return { type: 'group', children: [] };
    const at = (db: number) => api.coord([Math.max(-scale.limitDb, Math.min(scale.limitDb, db)), 0])[0]!;
    const [low, high] = answer.estimate.interval95Db;
    const height = api.getHeight() - box.top - box.bottom;
    const middle = at(answer.estimate.estimateDb);
    return {
      type: 'group',
      children: [
        {
          type: 'rect',
          shape: { x: at(low), y: box.top, width: Math.max(1, at(high) - at(low)), height },
          style: { fill: tokens.text, opacity: 0.26 },
        },
        verticalLine(middle, box.top, height, { stroke: tokens.text, lineWidth: 2.5 }),
        {
          type: 'text',
          style: {
            text: formatDb(answer.estimate.estimateDb),
            x: middle + (middle > api.getWidth() - 110 ? -6 : 6),
            y: box.top + 3,
            align: middle > api.getWidth() - 110 ? 'right' : 'left',
            verticalAlign: 'top',
            fill: tokens.text,
            stroke: tokens.surface,
            lineWidth: 4,
            font: `600 ${tokens.bodyPx}px ${tokens.font}`,
          },
        },
      ],
    };
  });
  return {
    heightPx: 300,
    cells: bars.map((bar) => ({
      title: barTitle(bar),
      words: `${countOf(bar.units, 'unit')}, ${formatNumber((100 * bar.units) / total)}\u2009% of all.`,
      cell: null,
    })),
    option: {
      animation: false,
      grid: [box],
      xAxis: [differenceAxis(context, 0)],
      yAxis: [
        {
          type: 'value',
          minInterval: 1,
          name: 'units',
          nameLocation: 'end',
          nameGap: 24,
          nameTextStyle: { color: tokens.muted, fontSize: tokens.smallPx, align: 'right' },
          axisLine: { show: false, onZero: false },
          axisTick: { show: false },
          axisLabel: { color: tokens.muted, fontSize: tokens.smallPx },
          splitLine: { lineStyle: { color: tokens.line, width: 1 } },
          splitNumber: 4,
        },
      ],
      series: [differenceGround(context, 0, box), cells, estimate, litLine(context, 0, box)],
    },
  };
}

export function histogramSummary(answer: ComparisonAnswer): string {
  if (answer.counts.units === 0) return 'No units in this question.';
  const spread = `Differences of ${countOf(answer.counts.units, 'unit')} in bars of ${formatNumber(answer.histogram.binWidthDb)}\u2009dB.`;
  return answer.estimate === null
    ? spread
    : `${spread} Estimate ${formatDb(answer.estimate.estimateDb)}, 95\u2009% interval ${formatDbInterval(answer.estimate.interval95Db)}; positive means that ${answer.antennas.a.name} hears better.`;
}
