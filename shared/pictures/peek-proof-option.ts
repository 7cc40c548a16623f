import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { dateText } from '../contracts/comparison-sentence.ts';
import { countOf, formatDb, formatDbInterval } from '../format.ts';
import { lightsUp } from './cell-words.ts';
import { arrowHead, cutInterval } from './interval-mark.ts';
import { differenceAxis, overlay } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';
import { emptyCell } from './rose-option.ts';

type PeekProof = NonNullable<ComparisonAnswer['peekProof']>;

/** Names the slot at the right end, in which the interval of a single look stands for comparison. */
const oneLook = 'one look';

/** Which side the interval leaves zero out on: 1 for A, -1 for B, 0 while it holds zero. */
function sideOf({ intervalDb }: PeekProof['points'][number]): number {
  if (intervalDb === null) return 0;
  return intervalDb[0] > 0 ? 1 : intervalDb[1] < 0 ? -1 : 0;
}

/** May I stop: the mean so far and its peek-proof interval after each night, and the interval of one look beside it. */
export function peekProofPicture(context: PictureContext): Picture {
  const { answer, scale, tokens, lit, compact } = context;
  const points = answer.peekProof?.points ?? [];
  const nightCell = new Map(answer.nights.map((cell) => [cell.night, cell]));
  const slots = [...points.map(({ night }) => (compact ? night.slice(5) : night)), '', oneLook];
  const everyNth = Math.max(1, Math.ceil(points.length / (compact ? 4 : 9)));
  const box = { left: 48, right: 26, top: 44, bottom: 46 };
  const last = slots.length - 1;
  const colourOf = (side: number) =>
    side > 0 ? tokens['diff-a'] : side < 0 ? tokens['diff-b'] : tokens.muted;

  const ground = overlay('ground', 0, 1, (api) => {
    const y = (db: number) => api.coord([0, db])[1]!;
    const right = api.getWidth() - box.right;
    const width = right - box.left;
    const font = `600 ${tokens.smallPx}px ${tokens.font}`;
    return {
      type: 'group',
      children: [
        {
          type: 'rect',
          shape: {
            x: box.left,
            y: y(answer.marginDb),
            width,
            height: y(-answer.marginDb) - y(answer.marginDb),
          },
          style: { fill: tokens.edge, opacity: 0.2 },
        },
        {
          type: 'line',
          shape: { x1: box.left, y1: y(0), x2: right, y2: y(0) },
          style: { stroke: tokens.text, lineWidth: 1.25 },
        },
        {
          type: 'text',
          style: {
            ...{
              text: `\u2191 ${answer.antennas.a.name} better`,
              x: right,
              y: box.top - 6,
              align: 'right',
              font,
            },
            ...{ verticalAlign: 'bottom', fill: tokens['diff-a'], width: width - 40, overflow: 'truncate' },
          },
        },
        {
          type: 'text',
          style: {
            ...{
              text: `\u2193 ${answer.antennas.b.name} better`,
              x: right,
              y: api.getHeight() - 2,
              align: 'right',
            },
            ...{
              font,
              verticalAlign: 'bottom',
              fill: tokens['diff-b'],
              width: width - 40,
              overflow: 'truncate',
            },
          },
        },
      ],
    };
  });

  const band = overlay('band', 0, 2, (api) => {
    const known = points.flatMap(({ intervalDb }, index) =>
      intervalDb === null ? [] : [{ index, ...cutInterval(intervalDb, scale.limitDb) }],
    );
    const at = (index: number, db: number) => api.coord([index, db]) as [number, number];
    const means = points.map(({ estimateDb }, index) => at(index, within(estimateDb)));
    return {
      type: 'group',
      children: [
        {
          type: 'polygon',
          shape: {
            points: [
              ...known.map(({ index, to }) => at(index, to)),
              ...known.map(({ index, from }) => at(index, from)).reverse(),
            ],
          },
          style: { fill: tokens.text, opacity: 0.16 },
        },
        ...known.flatMap(({ index, runsOnLow, runsOnHigh }) => [
          ...(runsOnHigh ? [arrowHead(at(index, scale.limitDb), 'up', tokens.muted)] : []),
          ...(runsOnLow ? [arrowHead(at(index, -scale.limitDb), 'down', tokens.muted)] : []),
        ]),
        {
          type: 'polyline',
          shape: { points: means },
          style: { stroke: tokens.text, fill: 'none', lineWidth: 1.5 },
        },
      ],
    } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
  });

  function within(db: number): number {
    return Math.max(-scale.limitDb, Math.min(scale.limitDb, db));
  }

  /** One tall strip a night can be pointed at; the interval's ends and the mean stand in it. */
  const marks: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 4,
    encode: { x: 0, y: 1 },
    data: [
      ...points.map((_point, index) => ({ value: [index, 0] })),
      ...(answer.estimate ? [{ value: [last, 0] }] : []),
    ],
    renderItem: (params, api) => {
      const point = points[params.dataIndex];
      const index = point === undefined ? last : params.dataIndex;
      const x = api.coord([index, 0])[0]!;
      const y = (db: number) => api.coord([index, within(db)])[1]!;
      const width = (api.size!([1, 0]) as [number, number])[0];
      const side = point ? sideOf(point) : Math.sign(answer.estimate!.estimateDb);
      const mean = point?.estimateDb ?? answer.estimate!.estimateDb;
      const interval = point ? point.intervalDb : answer.estimate!.interval95Db;
      const lights = point !== undefined && lightsUp(lit, emptyCell({ night: point.night }));
      const colour = colourOf(side);
      const children: object[] = [
        {
          type: 'rect',
          shape: { x: x - width / 2, y: box.top, width, height: api.getHeight() - box.top - box.bottom },
          style: { fill: lights ? tokens.accent : tokens.surface, opacity: lights ? 0.22 : 0 },
        },
      ];
      if (interval !== null) {
        children.push({
          type: 'line',
          shape: { x1: x, y1: y(interval[0]), x2: x, y2: y(interval[1]) },
          style: { stroke: colour, lineWidth: point ? 1.5 : 3 },
        });
      }
      if (Math.abs(mean) <= scale.limitDb) {
        children.push({
          type: 'circle',
          shape: { cx: x, cy: y(mean), r: Math.min(4.5, Math.max(2, width / 3)) },
          style:
            interval === null
              ? { fill: tokens.surface, stroke: tokens.muted, lineWidth: 1.5 }
              : { fill: colour, stroke: tokens.text, lineWidth: 1 },
        });
      }
      return { type: 'group', children } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
    },
  };

  return {
    heightPx: 320,
    cells: [
      ...points.map((point) => ({
        title: `After the night of ${dateText(point.night)}`,
        words: pointWords(point),
        cell: nightCell.get(point.night) ?? emptyCell({ night: point.night }),
      })),
      ...(answer.estimate
        ? [
            {
              title: 'One look',
              words: `${formatDb(answer.estimate.estimateDb)}, 95\u2009% interval ${formatDbInterval(answer.estimate.interval95Db)}, from all units as if looked at once.`,
              cell: null,
            },
          ]
        : []),
    ],
    option: {
      animation: false,
      grid: [box],
      xAxis: [
        {
          type: 'category',
          data: slots,
          axisTick: { show: false },
          axisLine: { show: false, onZero: false },
          splitLine: { show: false },
          axisLabel: {
            color: tokens.muted,
            fontSize: tokens.smallPx,
            interval: (index: number) =>
              index === last || (index % everyNth === 0 && index <= last - 1 - everyNth / 2),
          },
        },
      ],
      yAxis: [{ ...differenceAxis(context, 0), nameGap: 10 }],
      series: [ground, band, marks],
    },
  };
}

function pointWords({ clusters, estimateDb, intervalDb }: PeekProof['points'][number]): string {
  const evidence = countOf(clusters, 'station-night');
  return intervalDb === null
    ? `${formatDb(estimateDb)} from ${evidence}: too little for an interval yet.`
    : `${formatDb(estimateDb)}, peek-proof interval ${formatDbInterval(intervalDb)}, from ${evidence}.`;
}

export function peekProofSummary(peekProof: PeekProof): string {
  const last = peekProof.points.at(-1);
  return last === undefined
    ? peekProof.sentence
    : `${peekProof.sentence} After the last night: ${pointWords(last)}`;
}

/** How the peek-proof interval relates to the one of the verdict. */
export function peekProofAgainstFixed({ peekProof, estimate }: ComparisonAnswer): string | null {
  const last = peekProof?.points.at(-1)?.intervalDb;
  if (!last || estimate === null) return null;
  return (
    `At the right end, for comparison, the interval of the verdict: ${formatDbInterval(estimate.interval95Db)}. It holds ` +
    'if you look once, at the end. The peek-proof one holds at all looks together and pays for that with its width ' +
    `(now ${formatDbInterval(last)}); it counts each station-night once, so its middle can differ a little.`
  );
}
