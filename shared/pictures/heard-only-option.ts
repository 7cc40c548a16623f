import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { countOf } from '../format.ts';
import { cellTitle, lightsUp } from './cell-words.ts';
import { aloneWords } from './fairness-words.ts';
import type { AloneCounts } from './fairness-words.ts';
import { intervalMark } from './interval-mark.ts';
import { overlay, verticalLine } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';
import { emptyCell } from './rose-option.ts';

/** One row: a direction, or (sector null) all of them together. */
export interface HeardOnlyRow extends AloneCounts {
  sector: number | null;
}

/**
 * The directions in order from north, and last, where it is known, all of them together. The p of a direction
 * is adjusted for there being several.
 */
export function heardOnlyRows({ heardOnlySectors, fairness }: ComparisonAnswer): HeardOnlyRow[] {
  const { heardOnly } = fairness;
  const sectors = [...heardOnlySectors]
    .sort((one, other) => one.sector - other.sector)
    .map(({ sector, onlyA, onlyB, oddsRatio, intervalRatio, pAdjusted }) => ({
      ...{ sector, onlyA, onlyB, oddsRatio, intervalRatio, p: pAdjusted },
    }));
  if (heardOnly === null) return sectors;
  const {
    stationsOnlyA: onlyA,
    stationsOnlyB: onlyB,
    oddsRatio,
    oddsRatioInterval: intervalRatio,
  } = heardOnly;
  const p = onlyA + onlyB === 0 ? null : heardOnly.midP;
  return [...sectors, { ...{ sector: null, onlyA, onlyB, oddsRatio, intervalRatio, p } }];
}

/** Place of a ratio on an axis of doublings: 1 in the middle, no limit and nothing at the two ends. */
export function doublings(ratio: number | null): number {
  return ratio === null ? Infinity : ratio <= 0 ? -Infinity : Math.log2(ratio);
}

/** Doublings shown either way: all estimates that have a place up to 64 times, and ends of intervals up to 8. */
export function ratioLimit(rows: readonly HeardOnlyRow[]): { limit: number; step: number } {
  const reach = (ratio: number | null) => Math.abs(doublings(ratio));
  const ends = rows.flatMap(({ intervalRatio }) =>
    (intervalRatio ?? []).map((end) => Math.min(3, reach(end))),
  );
  const places = rows.map(({ oddsRatio }) => reach(oddsRatio)).filter(Number.isFinite);
  const limit = Math.min(6, Math.max(2, ...ends, ...places.map((place) => place + 0.25)));
  return limit > 3 ? { limit: 2 * Math.ceil(limit / 2), step: 2 } : { limit: Math.ceil(limit), step: 1 };
}

/** "8" and "1/8". */
export function ratioText(place: number): string {
  return place >= 0 ? String(2 ** place) : `1/${2 ** -place}`;
}

/** Who was heard on one antenna only, by direction: how many times as often A was the only one, with its interval. */
export function heardOnlyPicture(context: PictureContext): Picture {
  const { answer, tokens, lit, compact } = context;
  const rows = heardOnlyRows(answer);
  const { limit, step } = ratioLimit(rows);
  const widthDeg = 360 / answer.sectorCount;
  // On a phone the two names stand over the column of counts too: they need the whole width.
  const box = { left: compact ? 118 : 168, right: 26, top: compact ? 60 : 44, bottom: 30 };
  const sides = compact ? { x: 2, y: box.top - 26 } : { x: box.left, y: box.top - 6 };
  const countsX = box.left - 14;
  const rowPx = rows.length > 20 ? 18 : 22;
  const cells = rows.map((row) =>
    row.sector === null
      ? null
      : (answer.sectors.find(({ sector }) => sector === row.sector) ?? emptyCell({ sector: row.sector })),
  );
  const name = ({ sector }: HeardOnlyRow) =>
    sector === null ? 'All' : `${Math.round(sector * widthDeg)}-${Math.round((sector + 1) * widthDeg)}\u00b0`;
  const font = (weight: number) => `${weight} ${tokens.smallPx}px ${tokens.font}`;

  const marks: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 3,
    encode: { x: 0, y: 1 },
    data: rows.map((_row, index) => ({ value: [0, index] })),
    renderItem: (params, api) => {
      const row = rows[params.dataIndex]!;
      const cell = cells[params.dataIndex] ?? null;
      const y = api.coord([0, params.dataIndex])[1]!;
      const lights = cell !== null && lightsUp(lit, cell);
      const place = doublings(row.oddsRatio);
      const { intervalRatio } = row;
      const text = (words: string, x: number, fill: string, align: 'left' | 'right') => ({
        type: 'text',
        silent: true,
        style: {
          ...{ text: words, x, y, fill, align, verticalAlign: 'middle' },
          font: font(row.sector === null ? 600 : 400),
        },
      });
      const children: object[] = [
        // The whole row can be pointed at, also where nothing is drawn.
        {
          type: 'rect',
          shape: { x: 0, y: y - rowPx / 2, width: api.getWidth() - box.right, height: rowPx },
          style: { fill: lights ? tokens.accent : tokens.surface, opacity: lights ? 0.22 : 0 },
        },
        text(name(row), 2, tokens.text, 'left'),
        text(`${row.onlyA} : ${row.onlyB}`, countsX, tokens.muted, 'right'),
        ...(row.p === null
          ? []
          : intervalMark(
              {
                value: place,
                interval: intervalRatio && [doublings(intervalRatio[0]), doublings(intervalRatio[1])],
                limit,
              },
              (value) => api.coord([value, 0])[0]!,
              y,
              {
                colour: place > 0 ? tokens['diff-a'] : place < 0 ? tokens['diff-b'] : tokens.muted,
                ink: tokens.text,
                surface: tokens.surface,
                radius: row.sector === null ? 6 : 4.5,
                hollow: false,
              },
            )),
      ];
      return { type: 'group', children } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
    },
  };

  const ground = overlay('ground', 0, 1, (api) => {
    const top = box.top;
    const height = api.getHeight() - box.top - box.bottom;
    const right = api.getWidth() - box.right;
    const { a, b } = answer.antennas;
    const more = compact ? '' : ' alone more often';
    const side = (words: string, x: number, align: 'left' | 'right', fill: string) => ({
      type: 'text' as const,
      style: {
        ...{ text: words, x, y: sides.y, align, fill, verticalAlign: 'bottom' as const },
        ...{ font: font(600), width: (right - sides.x) / 2 - 10, overflow: 'truncate' as const },
      },
    });
    return {
      type: 'group',
      children: [
        verticalLine(api.coord([0, 0])[0]!, top, height, { stroke: tokens.text, lineWidth: 1.25 }),
        side(`\u2190 ${b.name}${more}`, sides.x, 'left', tokens['diff-b']),
        side(`${a.name}${more} \u2192`, right, 'right', tokens['diff-a']),
        {
          type: 'text' as const,
          style: {
            ...{ text: `${a.marker} : ${b.marker}`, x: countsX, y: top - 6, align: 'right' as const },
            ...{ verticalAlign: 'bottom' as const, fill: tokens.muted, font: font(400) },
          },
        },
      ],
    };
  });

  return {
    heightPx: box.top + box.bottom + Math.max(1, rows.length) * rowPx,
    cells: rows.map((row, index) => ({
      title: cells[index] ? cellTitle(cells[index], answer) : 'All directions',
      words: aloneWords(row, answer.antennas, row.sector === null ? 'mid-p' : 'adjusted p'),
      cell: cells[index] ?? null,
    })),
    option: {
      animation: false,
      grid: [box],
      xAxis: [
        {
          type: 'value',
          min: -limit,
          max: limit,
          interval: step,
          axisLine: { show: true, onZero: false, lineStyle: { color: tokens.edge } },
          axisTick: { show: true, lineStyle: { color: tokens.edge } },
          axisLabel: { color: tokens.muted, fontSize: tokens.smallPx, formatter: ratioText },
          splitLine: { show: true, lineStyle: { color: tokens.line, width: 1 } },
        },
      ],
      yAxis: [
        {
          type: 'category',
          inverse: true,
          data: rows.map(name),
          axisTick: { show: false },
          axisLine: { show: false },
          axisLabel: { show: false },
          splitLine: { show: false },
        },
      ],
      series: [ground, marks],
    },
  };
}

export function heardOnlySummary(answer: ComparisonAnswer): string {
  const { heardOnlySectors } = answer;
  if (heardOnlySectors.length === 0) return 'No direction has a station that one antenna alone heard.';
  const sure = heardOnlySectors.filter(({ pAdjusted }) => pAdjusted !== null && pAdjusted < 0.05);
  return `${countOf(heardOnlySectors.length, 'direction')} with stations that one antenna alone heard; in ${sure.length} of them more often on one side than chance allows (adjusted p below 0.05).`;
}
