/** Months of nights as a person reads them: weeks from Monday, dates as YYYY-MM-DD. */

export interface CalendarDay {
  date: string;
  /** Belongs to the month shown, not to the edge of a neighbour. */
  inMonth: boolean;
}

const dayMs = 86_400_000;

export function addDays(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * dayMs).toISOString().slice(0, 10);
}

/** "2026-11" moved by whole months. */
export function addMonths(month: string, months: number): string {
  const [year, number] = month.split('-').map(Number) as [number, number];
  return new Date(Date.UTC(year, number - 1 + months, 1)).toISOString().slice(0, 7);
}

/** Weeks of a month ("2026-11"), filled up with days of its neighbours. */
export function weeksOf(month: string): CalendarDay[][] {
  const first = `${month}-01`;
  const weekday = (new Date(`${first}T00:00:00Z`).getUTCDay() + 6) % 7;
  const weeks: CalendarDay[][] = [];
  for (let start = addDays(first, -weekday); start.slice(0, 7) <= month; start = addDays(start, 7)) {
    weeks.push(
      Array.from({ length: 7 }, (_, index) => {
        const date = addDays(start, index);
        return { date, inMonth: date.slice(0, 7) === month };
      }),
    );
  }
  return weeks;
}

export interface NightRange {
  from: string | null;
  to: string | null;
}

/** A click on a night: the first begins a range, the second ends it (or begins it, when it lies earlier). */
export function clickNight(range: NightRange, date: string): NightRange {
  const { from, to } = range;
  if (from === null || to === null || from !== to) return { from: date, to: date };
  return date < from ? { from: date, to } : { from, to: date };
}
