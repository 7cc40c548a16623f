import { describe, expect, it } from 'vitest';
import { stampArrival } from './feed-clock.ts';

const stamp = (arrival: string, feedMinute: number) => {
  const { heardAtMs, uncertaintySeconds } = stampArrival(Date.parse(arrival), feedMinute);
  return [new Date(heardAtMs).toISOString(), uncertaintySeconds];
};
const minute = (hours: number, minutes: number) => hours * 60 + minutes;

describe('the stamp of a live line', () => {
  it('is its arrival, to the millisecond, while the clocks agree', () => {
    expect(stamp('2026-01-05T18:12:59.250Z', minute(18, 12))).toEqual(['2026-01-05T18:12:59.250Z', 0]);
    expect(stamp('2026-01-05T18:13:02.000Z', minute(18, 12))).toEqual(['2026-01-05T18:13:02.000Z', 0]);
  });

  it('is still its arrival at a difference of 90 s, and the feed minute beyond', () => {
    expect(stamp('2026-01-05T18:13:30.000Z', minute(18, 12))).toEqual(['2026-01-05T18:13:30.000Z', 0]);
    expect(stamp('2026-01-05T18:13:30.001Z', minute(18, 12))).toEqual(['2026-01-05T18:12:00.000Z', 60]);
    expect(stamp('2026-01-05T18:10:30.000Z', minute(18, 12))).toEqual(['2026-01-05T18:10:30.000Z', 0]);
    expect(stamp('2026-01-05T18:10:29.999Z', minute(18, 12))).toEqual(['2026-01-05T18:12:00.000Z', 60]);
  });

  it('belongs to the day before or after around midnight', () => {
    expect(stamp('2026-01-01T00:00:04Z', minute(23, 59))).toEqual(['2026-01-01T00:00:04.000Z', 0]);
    expect(stamp('2026-01-01T00:05:00Z', minute(23, 59))).toEqual(['2025-12-31T23:59:00.000Z', 60]);
    expect(stamp('2025-12-31T23:59:58Z', minute(0, 0))).toEqual(['2025-12-31T23:59:58.000Z', 0]);
    expect(stamp('2025-12-31T23:57:00Z', minute(0, 0))).toEqual(['2026-01-01T00:00:00.000Z', 60]);
  });

  it("is the feed's minute while this machine's clock is hours wrong", () => {
    expect(stamp('2026-03-29T04:12:20Z', minute(18, 12))).toEqual(['2026-03-28T18:12:00.000Z', 60]);
    expect(stamp('2026-03-29T15:12:20Z', minute(18, 12))).toEqual(['2026-03-29T18:12:00.000Z', 60]);
  });
});
