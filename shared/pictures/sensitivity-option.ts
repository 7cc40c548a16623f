import type { CustomSeriesOption } from 'echarts/charts';
import type { z } from 'zod';
import type { SensitivityVariant, sensitivity } from '../contracts/comparison.ts';
import { countOf, formatDb, formatDbInterval } from '../format.ts';
import { intervalMark } from './interval-mark.ts';
import { differenceAxis, differenceGround, overlay, verticalLine } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';

export type SensitivityReply = z.output<(typeof sensitivity)['reply']>;

/** What a group of variants changes, as the heading of its rows. */
export const groupWords: Readonly<Record<SensitivityVariant['group'], string>> = {
  'as asked': 'The question',
  'block length': 'Block length',
  'matching window': 'Matching window',
  guard: 'Guard',
  zeros: 'Zeros in ranking',
  clustering: 'Independence',
  stations: 'Which stations',
  weights: 'Weights',
};

/** What stands in a row without a number. */
export function emptyWords(variant: SensitivityVariant): string | null {
  if (variant.state === 'waiting') return 'being made';
  if (variant.state === 'not made') return 'not made yet';
  return variant.estimateDb === null ? 'no estimate' : null;
}

export function variantWords(variant: SensitivityVariant): string {
  const empty = emptyWords(variant);
  if (empty !== null) return `${empty}.`;
  const interval =
    variant.intervalDb === null ? '' : `, 95\u2009% interval ${formatDbInterval(variant.intervalDb)}`;
  const verdict = variant.verdict === null ? '' : `: ${variant.verdict}`;
  return `${formatDb(variant.estimateDb)}${interval}, from ${countOf(variant.units, 'unit')} and ${countOf(variant.clusters, 'station-night')}${verdict}.`;
}

/** Rows in the order of their groups' first appearance. */
export function inGroups(variants: readonly SensitivityVariant[]): SensitivityVariant[] {
  const groups = [...new Set(variants.map(({ group }) => group))];
  return groups.flatMap((group) => variants.filter((variant) => variant.group === group));
}

/** Would other choices say the same: one row a choice, on the dB axis of all pictures, the answer as asked as a line. */
export function sensitivityPicture(
  context: PictureContext,
  variants: readonly SensitivityVariant[],
): Picture {
  const { scale, tokens, compact } = context;
  const rows = inGroups(variants);
  const base = rows.find(({ group }) => group === 'as asked') ?? null;
  const rowPx = compact ? 42 : 24;
  const box = { left: compact ? 24 : 364, right: compact ? 26 : 92, top: 44, bottom: 30 };
  /** On a phone the name stands over its row. */
  const markBelowPx = compact ? 9 : 0;
  const namesX = 126;

  const bold = (more: object) => ({ ...more, font: `600 ${tokens.smallPx}px ${tokens.font}` });
  const marks: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 3,
    encode: { x: 0, y: 1 },
    data: rows.map((_row, index) => ({ value: [0, index] })),
    renderItem: (params, api) => {
      const row = rows[params.dataIndex]!;
      const middle = api.coord([0, params.dataIndex])[1]!;
      const y = middle + markBelowPx;
      const first = rows[params.dataIndex - 1]?.group !== row.group;
      const right = api.getWidth() - box.right;
      const empty = emptyWords(row);
      const text = (words: string, x: number, atY: number, more: object) => ({
        type: 'text',
        silent: true,
        style: {
          ...{ text: words, x, y: atY, fill: tokens.text, align: 'left', verticalAlign: 'middle' },
          ...{ font: `400 ${tokens.smallPx}px ${tokens.font}`, overflow: 'truncate' },
          ...more,
        },
      });
      const children: object[] = [
        // The whole row can be pointed at, also where nothing is drawn.
        {
          type: 'rect',
          shape: { x: 0, y: middle - rowPx / 2, width: right, height: rowPx },
          style: { fill: tokens.surface, opacity: 0 },
        },
      ];
      if (first && params.dataIndex > 0) {
        const edge = middle - rowPx / 2;
        children.push({
          type: 'line',
          silent: true,
          shape: { x1: 0, y1: edge, x2: right, y2: edge },
          style: { stroke: tokens.line, lineWidth: 1 },
        });
      }
      if (compact) {
        children.push(
          text(row.label, 2, middle - 9, { width: right - 60, stroke: tokens.surface, lineWidth: 3 }),
        );
      } else {
        if (first)
          children.push(text(groupWords[row.group], 2, middle, { fill: tokens.muted, width: namesX - 12 }));
        children.push(text(row.label, namesX, middle, { width: box.left - namesX - 16 }));
      }
      if (empty !== null) {
        children.push(
          text(empty, compact ? api.getWidth() - 2 : box.left + 8, compact ? middle - 9 : y, {
            ...{ fill: tokens.muted, align: compact ? 'right' : 'left' },
            ...{ stroke: tokens.surface, lineWidth: 4 },
          }),
        );
      } else {
        const isBase = row === base;
        const estimateDb = row.estimateDb!;
        const end = { fill: tokens.text, align: 'right' };
        children.push(
          text(formatDb(estimateDb), api.getWidth() - 2, compact ? middle - 9 : y, isBase ? bold(end) : end),
        );
        children.push(
          ...intervalMark(
            { value: estimateDb, interval: row.intervalDb, limit: scale.limitDb },
            (db) => api.coord([db, 0])[0]!,
            y,
            {
              colour: estimateDb >= 0 ? tokens['diff-a'] : tokens['diff-b'],
              ink: tokens.text,
              surface: tokens.surface,
              radius: isBase ? 6 : 4.5,
              // The rank rows have no verdict of their own: they rest on the same units as the question.
              hollow: (row.verdict ?? base?.verdict) === 'not enough yet',
            },
          ),
        );
      }
      return { type: 'group', children } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
    },
  };

  const baseLine = overlay('base', 0, 2, (api) => {
    if (base === null || base.estimateDb === null || Math.abs(base.estimateDb) > scale.limitDb)
      return { type: 'group', children: [] };
    const height = api.getHeight() - box.top - box.bottom;
    return verticalLine(api.coord([base.estimateDb, 0])[0]!, box.top, height, {
      ...{ stroke: tokens.text, lineWidth: 1, lineDash: [2, 3] },
    });
  });

  return {
    heightPx: box.top + box.bottom + Math.max(1, rows.length) * rowPx,
    cells: rows.map((row) => ({ title: row.label, words: variantWords(row), cell: null })),
    option: {
      animation: false,
      grid: [box],
      xAxis: [differenceAxis(context, 0)],
      yAxis: [
        {
          type: 'category',
          inverse: true,
          data: rows.map(({ key }) => key),
          axisTick: { show: false },
          axisLine: { show: false },
          axisLabel: { show: false },
          splitLine: { show: false },
        },
      ],
      series: [differenceGround(context, 0, box), baseLine, marks],
    },
  };
}

export function sensitivitySummary(variants: readonly SensitivityVariant[], sentence: string | null): string {
  const known = variants.filter(({ estimateDb }) => estimateDb !== null);
  if (sentence !== null) return sentence;
  if (known.length === 0) return `None of ${countOf(variants.length, 'choice')} has an estimate yet.`;
  const estimates = known.map(({ estimateDb }) => estimateDb!);
  return `${known.length} of ${countOf(variants.length, 'choice')} have an estimate so far, from ${formatDb(Math.min(...estimates))} to ${formatDb(Math.max(...estimates))}.`;
}
