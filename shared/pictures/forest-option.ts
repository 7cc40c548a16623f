import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonCell } from '../contracts/comparison.ts';
import { formatDb, formatDbInterval } from '../format.ts';
import { cellTitle, cellWords, lightsUp } from './cell-words.ts';
import { intervalMark } from './interval-mark.ts';
import { differenceAxis, differenceGround, litLine, overlay, verticalLine } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';

/** How steady: one line a night, and the answer over all of them below. */
export function forestPicture(context: PictureContext): Picture {
  const { answer, scale, tokens, lit, compact } = context;
  const nights = answer.nights;
  const all = nights.length;
  const rowPx = nights.length > 45 ? 10 : 18;
  const box = { left: compact ? 62 : 92, right: 26, top: 44, bottom: 30 };
  const mostUnits = Math.max(1, ...nights.map((cell) => cell.units));
  const labels = [...nights.map((cell) => (compact ? cell.night!.slice(5) : cell.night!)), 'All nights'];

  const rows: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 3,
    clip: true,
    encode: { x: 0, y: 1 },
    data: nights.map((cell, index) => ({ value: [cell.estimateDb ?? 0, index] })),
    renderItem: (params, api) => {
      const cell = nights[params.dataIndex]!;
      const y = api.coord([0, params.dataIndex])[1]!;
      const left = api.coord([-scale.limitDb, 0])[0]!;
      const right = api.coord([scale.limitDb, 0])[0]!;
      const lights = lightsUp(lit, cell);
      const rowHeight = (api.size!([0, 1]) as [number, number])[1];
      const children: object[] = [
        // The whole row can be pointed at, also where nothing is drawn.
        {
          type: 'rect',
          shape: { x: left, y: y - rowHeight / 2, width: right - left, height: rowHeight },
          style: { fill: lights ? tokens.accent : tokens.surface, opacity: lights ? 0.22 : 0 },
        },
        ...mark(cell, (db) => api.coord([db, 0])[0]!, y, tokens.text),
      ];
      return { type: 'group', children } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
    },
  };

  function mark(cell: ComparisonCell, at: (db: number) => number, y: number, ink: string): object[] {
    if (cell.estimateDb === null) return [];
    const colour = !cell.speaks ? tokens.muted : cell.estimateDb >= 0 ? tokens['diff-a'] : tokens['diff-b'];
    return intervalMark({ value: cell.estimateDb, interval: cell.intervalDb, limit: scale.limitDb }, at, y, {
      colour,
      ink,
      surface: tokens.surface,
      radius: Math.min(rowPx / 2 - 1, 2.5 + 3.5 * Math.sqrt(cell.units / mostUnits)),
      hollow: !cell.speaks,
    });
  }

  const overall = overlay('overall', 0, 4, (api) => {
    if (answer.estimate === null) return { type: 'group', children: [] };
    const { estimateDb, interval95Db } = answer.estimate;
    const y = api.coord([0, all])[1]!;
    const at = (db: number) => api.coord([Math.max(-scale.limitDb, Math.min(scale.limitDb, db)), 0])[0]!;
    const half = Math.min(7, rowPx / 2 - 1);
    return {
      type: 'group',
      children: [
        {
          type: 'polygon',
          shape: {
            points: [
              [at(interval95Db[0]), y],
              [at(estimateDb), y - half],
              [at(interval95Db[1]), y],
              [at(estimateDb), y + half],
            ],
          },
          style: { fill: tokens.text },
        },
        verticalLine(at(estimateDb), box.top, y - half - box.top, {
          stroke: tokens.text,
          lineWidth: 1,
          lineDash: [2, 3],
        }),
      ],
    };
  });

  return {
    heightPx: box.top + box.bottom + (all + 1) * rowPx,
    cells: nights.map((cell) => ({ title: cellTitle(cell, answer), words: cellWords(cell, answer), cell })),
    option: {
      animation: false,
      grid: [box],
      xAxis: [differenceAxis(context, 0)],
      yAxis: [
        {
          type: 'category',
          inverse: true,
          data: labels,
          axisTick: { show: false },
          axisLine: { show: false },
          splitLine: { show: false },
          axisLabel: {
            color: tokens.muted,
            fontSize: tokens.smallPx,
            interval: (index: number) => rowPx >= 16 || index % 3 === 0 || index === all,
          },
        },
      ],
      series: [differenceGround(context, 0, box), rows, overall, litLine(context, 0, box)],
    },
  };
}

/** The last row of the forest's table. */
export function overallWords({ answer }: Pick<PictureContext, 'answer'>): string {
  return answer.estimate === null
    ? 'No estimate over all nights.'
    : `All nights: ${formatDb(answer.estimate.estimateDb)}, 95\u2009% interval ${formatDbInterval(answer.estimate.interval95Db)}.`;
}
