/**
 * The scale of the switching time line: which stretch of time is in view and how wide it is drawn. All times are
 * milliseconds since 1970, all places px from the left edge of the picture.
 */
export interface TimeRange {
  fromMs: number;
  toMs: number;
}

const secondMs = 1000;
const minuteMs = 60_000;
const hourMs = 3_600_000;
const dayMs = 86_400_000;

export const shortestRangeMs = 2 * minuteMs;
export const longestRangeMs = 31 * dayMs;

export const spanOf = ({ fromMs, toMs }: TimeRange): number => toMs - fromMs;

export function placeOf(timeMs: number, range: TimeRange, widthPx: number): number {
  return ((timeMs - range.fromMs) / spanOf(range)) * widthPx;
}

export function timeAt(placePx: number, range: TimeRange, widthPx: number): number {
  return range.fromMs + (placePx / Math.max(1, widthPx)) * spanOf(range);
}

/** A range of a permitted length about the same middle, in whole seconds: an address holds no fractions. */
export function tidyRange({ fromMs, toMs }: TimeRange): TimeRange {
  const spanMs = Math.min(longestRangeMs, Math.max(shortestRangeMs, toMs - fromMs));
  const startMs = Math.round(((fromMs + toMs) / 2 - spanMs / 2) / secondMs) * secondMs;
  return { fromMs: startMs, toMs: startMs + Math.round(spanMs / secondMs) * secondMs };
}

/** `factor` below 1 shows less time, larger. The instant `aboutMs` stays where it is on the screen. */
export function zoomRange(range: TimeRange, factor: number, aboutMs: number): TimeRange {
  const spanMs = Math.min(longestRangeMs, Math.max(shortestRangeMs, spanOf(range) * factor));
  const share = (aboutMs - range.fromMs) / spanOf(range);
  const fromMs = aboutMs - share * spanMs;
  return { fromMs, toMs: fromMs + spanMs };
}

export function moveRange(range: TimeRange, byMs: number): TimeRange {
  return { fromMs: range.fromMs + byMs, toMs: range.toMs + byMs };
}

/** Two fingers: the instants under them follow them. Null while they are on one spot, where no scale follows. */
export function pinchRange(
  instants: readonly [number, number],
  placesPx: readonly [number, number],
  widthPx: number,
): TimeRange | null {
  const apartPx = placesPx[1] - placesPx[0];
  const apartMs = instants[1] - instants[0];
  if (Math.abs(apartPx) < 8 || apartMs / apartPx <= 0) return null;
  const spanMs = Math.min(longestRangeMs, Math.max(shortestRangeMs, (apartMs / apartPx) * widthPx));
  const middleMs = (instants[0] + instants[1]) / 2;
  const fromMs = middleMs - ((placesPx[0] + placesPx[1]) / 2 / widthPx) * spanMs;
  return { fromMs, toMs: fromMs + spanMs };
}

export interface TimeTick {
  timeMs: number;
  /** A new UTC day begins here: the label names it. */
  startsDay: boolean;
}

const stepsMs = [
  ...[5, 10, 30].map((n) => n * secondMs),
  ...[1, 2, 5, 10, 15, 30].map((n) => n * minuteMs),
  ...[1, 2, 3, 6, 12].map((n) => n * hourMs),
  ...[1, 2, 7, 14].map((n) => n * dayMs),
];

/** The finest step whose labels still have `roomPx` each. */
export function tickStepMs(range: TimeRange, widthPx: number, roomPx: number): number {
  const wanted = (spanOf(range) / Math.max(1, widthPx)) * roomPx;
  return stepsMs.find((step) => step >= wanted) ?? stepsMs.at(-1)!;
}

export function timeTicks(range: TimeRange, widthPx: number, roomPx = 76): TimeTick[] {
  const stepMs = tickStepMs(range, widthPx, roomPx);
  const ticks: TimeTick[] = [];
  for (let timeMs = Math.ceil(range.fromMs / stepMs) * stepMs; timeMs <= range.toMs; timeMs += stepMs) {
    ticks.push({ timeMs, startsDay: timeMs % dayMs === 0 });
  }
  return ticks;
}
