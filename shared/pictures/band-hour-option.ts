import type { CustomSeriesOption } from 'echarts/charts';
import type { ComparisonAnswer, ComparisonCell } from '../contracts/comparison.ts';
import { hatchDecal } from './chart-tokens.ts';
import { formatBand, formatSigned } from '../format.ts';
import { cellTitle, cellWords, hourLabel, lightsUp } from './cell-words.ts';
import { cellStyle, colourKey, colourKeyHeightPx, inkOn, overlay } from './picture.ts';
import type { Picture, PictureContext } from './picture.ts';
import { emptyCell } from './rose-option.ts';

/**
 * The hours of the map in the order of the night. UTC hours run round the clock, so the widest stretch
 * without data is where the axis is cut; hours without data in between keep their place.
 */
export function hourOrder(bandHours: ComparisonAnswer['bandHours']): number[] {
  const hours = [...new Set(bandHours.cells.flatMap((cell) => (cell.hour === null ? [] : [cell.hour])))].sort(
    (one, other) => one - other,
  );
  if (hours.length === 0) return [];
  const first = hours[0]!;
  const last = hours[hours.length - 1]!;
  if (bandHours.basis !== 'utc') return range(first, last);
  let start = first;
  let widest = first + 24 - last;
  for (let index = 1; index < hours.length; index += 1) {
    const gap = hours[index]! - hours[index - 1]!;
    if (gap > widest) {
      widest = gap;
      start = hours[index]!;
    }
  }
  return range(start, start + 24 - widest).map((hour) => hour % 24);
}

function range(first: number, last: number): number[] {
  return Array.from({ length: last - first + 1 }, (_, index) => first + index);
}

/** When: the difference by band and hour. On a phone the hours run downwards, so that the numbers fit. */
export function bandHourPicture(context: PictureContext): Picture {
  const { answer, tokens, lit, compact } = context;
  const { basis, cells: given } = answer.bandHours;
  const hours = hourOrder(answer.bandHours);
  const bands = [
    ...new Set(given.flatMap((cell) => (cell.bandMetres === null ? [] : [cell.bandMetres]))),
  ].sort((one, other) => other - one);
  const known = new Map(given.map((cell) => [`${cell.bandMetres} ${cell.hour}`, cell]));
  const cells: ComparisonCell[] = bands.flatMap((bandMetres) =>
    hours.map((hour) => known.get(`${bandMetres} ${hour}`) ?? emptyCell({ bandMetres, hour })),
  );
  const rows = compact ? hours.length : bands.length;
  const rowPx = compact ? 24 : Math.max(30, Math.min(64, 220 / Math.max(1, rows)));
  const box = { left: 52, right: 26, top: 46, bottom: colourKeyHeightPx + 12 };
  const key = colourKey(context, 1, { left: box.left, right: box.right });
  const hourName = basis === 'utc' ? 'UTC hour' : `hours from ${basis}`;
  const label = { color: tokens.muted, fontSize: tokens.smallPx, interval: 0 };
  const axis = { type: 'category' as const, axisTick: { show: false }, splitLine: { show: false } };
  const hourAxis = {
    ...axis,
    data: hours.map((hour) => hourLabel(hour, basis)),
    axisLabel: label,
    axisLine: { show: false },
  };
  const bandAxis = { ...axis, data: bands.map(formatBand), axisLabel: label, axisLine: { show: false } };
  const map: CustomSeriesOption = {
    id: 'cells',
    type: 'custom',
    z: 2,
    data: cells.map((cell) => {
      const place = [hours.indexOf(cell.hour!), bands.indexOf(cell.bandMetres!)];
      return { value: compact ? place.reverse() : place };
    }),
    renderItem: (params, api) => {
      const cell = cells[params.dataIndex]!;
      const [x, y] = api.coord([api.value(0), api.value(1)]) as [number, number];
      const [width, height] = api.size!([1, 1]) as [number, number];
      const { speaks, fill } = cellStyle(context, cell);
      const lights = lightsUp(lit, cell);
      const same = lit !== null && lit.hour === cell.hour && lit.bandMetres === cell.bandMetres;
      const numberFits = width >= tokens.smallPx * 2.2;
      return {
        type: 'rect',
        shape: { x: x - width / 2 + 1, y: y - height / 2 + 1, width: width - 2, height: height - 2, r: 2 },
        style: {
          fill,
          stroke: same ? tokens.accent : lights ? tokens.text : speaks ? 'transparent' : tokens.line,
          lineWidth: same ? 3 : 1,
          ...(speaks ? {} : { decal: hatchDecal(tokens) }),
        },
        z2: same ? 5 : lights ? 3 : 1,
        textConfig: { position: 'inside' },
        textContent: {
          type: 'text',
          style: {
            text: cell.estimateDb === null || !numberFits ? '' : formatSigned(cell.estimateDb),
            fill: speaks ? inkOn(fill) : tokens.muted,
            ...(speaks ? {} : { stroke: tokens.surface, lineWidth: 4 }),
            font: `${speaks ? 600 : 400} ${tokens.smallPx}px ${tokens.font}`,
          },
        },
      };
    },
  };
  const hourTitle = overlay('hour-title', 0, 2, () => ({
    type: 'text',
    style: { text: hourName, x: 2, y: 4, fill: tokens.muted, font: `400 ${tokens.smallPx}px ${tokens.font}` },
  }));
  return {
    heightPx: box.top + box.bottom + Math.max(1, rows) * rowPx + (compact ? 0 : 8),
    cells: cells.map((cell) => ({ title: cellTitle(cell, answer), words: cellWords(cell, answer), cell })),
    option: {
      animation: false,
      grid: [{ ...box, containLabel: false }, key.grid],
      xAxis: [compact ? { ...bandAxis, position: 'top' } : { ...hourAxis, position: 'top' }, key.xAxis],
      yAxis: [compact ? { ...hourAxis, inverse: true } : { ...bandAxis, inverse: true }, key.yAxis],
      series: [map, hourTitle, ...key.series],
    },
  };
}
