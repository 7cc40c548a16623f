import type { ScaleRow } from '../../../shared/methods/method-entry.ts';

export interface StripAxis {
  fromDb: number;
  toDb: number;
  ticksDb: number[];
}

/** Equal readings side by side, one above the other: each dot with its place above or below the line, in px. */
export function stackDots(dots: readonly number[]): { db: number; offsetPx: number }[] {
  const seen = new Map<number, number>();
  return dots.map((db) => {
    const earlier = seen.get(db) ?? 0;
    seen.set(db, earlier + 1);
    return { db, offsetPx: Math.ceil(earlier / 2) * 8 * (earlier % 2 === 0 ? 1 : -1) };
  });
}

const steps = [0.5, 1, 2, 5, 10, 20];

/** An axis in round steps that holds zero, the margin and everything that is drawn. */
export function stripAxis(rows: readonly ScaleRow[], marginDb = 0): StripAxis {
  const values = [
    0,
    -marginDb,
    marginDb,
    ...rows.flatMap(({ dots = [], at, interval = [] }) => [
      ...dots,
      ...(at === undefined ? [] : [at]),
      ...interval,
    ]),
  ];
  const [low, high] = [Math.min(...values), Math.max(...values)];
  const step = steps.find((each) => (high - low) / each <= 8) ?? Math.ceil((high - low) / 8);
  const first = Math.floor(low / step - 0.2);
  const last = Math.ceil(high / step + 0.2);
  return {
    fromDb: first * step,
    toDb: last * step,
    ticksDb: Array.from({ length: last - first + 1 }, (_, k) => (first + k) * step),
  };
}
