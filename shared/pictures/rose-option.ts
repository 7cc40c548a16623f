import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonCell } from '../contracts/comparison.ts';
import { hatchDecal } from './chart-tokens.ts';
import { formatSigned } from '../format.ts';
import { cellTitle, cellWords, lightsUp } from './cell-words.ts';
import { cellStyle, colourKey, colourKeyHeightPx, inkOn } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';

/** Compass degrees (clockwise from north) as canvas radians (clockwise from east). */
function radians(azimuthDeg: number): number {
  return ((azimuthDeg - 90) * Math.PI) / 180;
}

/** Every sector of the station, in order from north; one without units is an empty cell. */
export function sectorCells({ answer }: PictureContext): ComparisonCell[] {
  const known = new Map(answer.sectors.map((cell) => [cell.sector, cell]));
  return Array.from(
    { length: answer.sectorCount },
    (_, sector) => known.get(sector) ?? emptyCell({ sector }),
  );
}

export function emptyCell(place: Partial<ComparisonCell>): ComparisonCell {
  return {
    bandMetres: null,
    sector: null,
    hour: null,
    night: null,
    units: 0,
    clusters: 0,
    nights: 0,
    estimateDb: null,
    intervalDb: null,
    p: null,
    pAdjusted: null,
    pooledDb: null,
    pooledIntervalDb: null,
    speaks: false,
    ...place,
  };
}

/** Where: the difference in each sector seen from the station, north on top. */
export function rosePicture(context: PictureContext): Picture {
  const { answer, tokens, lit, compact } = context;
  const cells = sectorCells(context);
  const widthDeg = 360 / answer.sectorCount;
  const key = colourKey(context, 0, { left: 24, right: 26 });
  const heightPx = (compact ? 300 : 340) + colourKeyHeightPx;
  const geometry = (width: number, height: number) => {
    const radius = Math.min(width / 2 - 30, (height - colourKeyHeightPx) / 2 - 26);
    return { cx: width / 2, cy: (height - colourKeyHeightPx) / 2 + 2, radius };
  };
  const numbersFit = answer.sectorCount <= 18;
  const sectors: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    coordinateSystem: 'none',
    z: 2,
    data: cells.map((cell) => ({ value: [cell.sector!] })),
    renderItem: (params, api) => {
      const cell = cells[params.dataIndex]!;
      const { cx, cy, radius } = geometry(api.getWidth(), api.getHeight());
      const from = cell.sector! * widthDeg;
      const { speaks, fill } = cellStyle(context, cell);
      const shape = {
        cx,
        cy,
        r0: radius * 0.26,
        r: radius,
        startAngle: radians(from),
        endAngle: radians(from + widthDeg),
      };
      const middle = radians(from + widthDeg / 2);
      const lights = lightsUp(lit, cell);
      const children: object[] = [
        {
          type: 'sector',
          shape,
          style: {
            fill,
            stroke: lights ? tokens.accent : tokens.edge,
            lineWidth: lights ? 3 : 1,
            ...(speaks ? {} : { decal: hatchDecal(tokens) }),
          },
          z2: lights ? 5 : 1,
        },
      ];
      if (numbersFit && cell.estimateDb !== null) {
        children.push({
          type: 'text',
          silent: true,
          z2: 6,
          style: {
            text: formatSigned(cell.estimateDb),
            x: cx + Math.cos(middle) * radius * 0.7,
            y: cy + Math.sin(middle) * radius * 0.7,
            align: 'center',
            verticalAlign: 'middle',
            fill: speaks ? inkOn(fill) : tokens.muted,
            ...(speaks ? {} : { stroke: tokens.surface, lineWidth: 4 }),
            font: `${speaks ? 600 : 400} ${tokens.smallPx}px ${tokens.font}`,
          },
        });
      }
      return { type: 'group', children } as ReturnType<NonNullable<CustomSeriesOption['renderItem']>>;
    },
  };
  const frame: CustomSeriesOption = {
    id: 'frame',
    type: 'custom',
    coordinateSystem: 'none',
    silent: true,
    z: 5,
    data: [[0]],
    renderItem: (_params, api) => {
      const { cx, cy, radius } = geometry(api.getWidth(), api.getHeight());
      const text = (words: string, azimuthDeg: number, distance: number, fill: string, bold = false) => ({
        type: 'text' as const,
        style: {
          text: words,
          x: cx + Math.cos(radians(azimuthDeg)) * distance,
          y: cy + Math.sin(radians(azimuthDeg)) * distance,
          align: 'center' as const,
          verticalAlign: 'middle' as const,
          fill,
          font: `${bold ? 700 : 400} ${tokens.smallPx}px ${tokens.font}`,
        },
      });
      const { a, b } = answer.antennas;
      const headings = [a, b].filter((antenna) => antenna.headingDeg !== null);
      return {
        type: 'group',
        children: [
          ...['N', 'E', 'S', 'W'].map((word, index) => text(word, index * 90, radius + 13, tokens.muted)),
          // The middle is free: the headings of the two antennas, each by its own letter.
          ...headings.flatMap((antenna, index) => [
            {
              type: 'line' as const,
              shape: {
                x1: cx,
                y1: cy,
                x2: cx + Math.cos(radians(antenna.headingDeg!)) * radius * 0.23,
                y2: cy + Math.sin(radians(antenna.headingDeg!)) * radius * 0.23,
              },
              style: { stroke: tokens.text, lineWidth: 2, lineDash: index === 0 ? [] : [3, 3] },
            },
            text(antenna.marker, antenna.headingDeg! + 180, radius * 0.13, tokens.text, true),
          ]),
        ],
      };
    },
  };
  return {
    heightPx,
    cells: cells.map((cell) => ({ title: cellTitle(cell, answer), words: cellWords(cell, answer), cell })),
    option: {
      animation: false,
      grid: [key.grid],
      xAxis: [key.xAxis],
      yAxis: [key.yAxis],
      series: [sectors, frame, ...key.series],
    },
  };
}
