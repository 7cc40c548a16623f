import type { DwellRow, Named } from './dwell-rows.ts';
import { formatInstant, type FieldRefusal } from './reading.ts';

/** A dwell that is in the switch log already. */
export interface LoggedDwell {
  receiverId: number;
  antennaId: number;
  startMs: number;
  /** null: still on. */
  endMs: number | null;
}

export interface PlannedDwell {
  lineNo: number;
  receiver: Named;
  antenna: Named;
  startMs: number;
  /** null: still on. */
  endMs: number | null;
  note: string;
}

export interface DwellPlan {
  /** Fit beside each other and beside the log; in the order of the file. */
  dwells: PlannedDwell[];
  /** Lines that say what the log, or an earlier line, says already. */
  doubledLines: number[];
  refusals: (FieldRefusal & { lineNo: number; raw: string })[];
  /** Made by the import, in the order in which the file names them. */
  newReceivers: string[];
  newAntennas: string[];
}

interface Placed {
  antennaKey: string;
  antennaLabel: string;
  startMs: number;
  endMs: number | null;
  /** null: from the log. */
  lineNo: number | null;
}

/**
 * Decides what the lines of a switch log become. A line without an end lasts until the receiver's next
 * start, in the file or in the log; the last one is still on. A line that would overlap another dwell of
 * its receiver is refused with the dwell in the way; one that is there already counts as a double.
 * A refused line whose receiver and start are known still ends the dwell before it: else that one would
 * run on over a time at which the log says that something else was connected.
 * O(n log n).
 */
export function planDwells(
  rows: readonly DwellRow[],
  logged: readonly LoggedDwell[],
  antennaName: (id: number) => string,
): DwellPlan {
  const plan: DwellPlan = { dwells: [], doubledLines: [], refusals: [], newReceivers: [], newAntennas: [] };
  const groups = new Map<string, DwellRow[]>();
  for (const row of rows) {
    const group = groups.get(keyOf(row.receiver));
    if (group === undefined) groups.set(keyOf(row.receiver), [row]);
    else group.push(row);
  }
  const log = new Map<string, Placed[]>();
  for (const dwell of logged) {
    const key = keyOf({ id: dwell.receiverId });
    const placed: Placed = {
      antennaKey: keyOf({ id: dwell.antennaId }),
      antennaLabel: antennaName(dwell.antennaId),
      startMs: dwell.startMs,
      endMs: dwell.endMs,
      lineNo: null,
    };
    log.set(key, [...(log.get(key) ?? []), placed]);
  }
  for (const [key, group] of groups) planReceiver(group, log.get(key) ?? [], antennaName, plan);
  plan.dwells.sort((a, b) => a.lineNo - b.lineNo);
  plan.refusals.sort((a, b) => a.lineNo - b.lineNo);
  plan.doubledLines.sort((a, b) => a - b);
  plan.newReceivers = namesToMake(plan.dwells.map((dwell) => dwell.receiver));
  plan.newAntennas = namesToMake(plan.dwells.map((dwell) => dwell.antenna));
  return plan;
}

/** One receiver: its lines by start, merged with its dwells of the log by start. */
function planReceiver(
  group: DwellRow[],
  logged: Placed[],
  antennaName: (id: number) => string,
  plan: DwellPlan,
): void {
  const lines = [...group].sort((a, b) => a.startMs - b.startMs || a.lineNo - b.lineNo);
  const log = [...logged].sort((a, b) => a.startMs - b.startMs);
  const starts = [...new Set([...lines, ...log].map((dwell) => dwell.startMs))].sort((a, b) => a - b);
  const nextStart = new Map(starts.map((start, i) => [start, starts[i + 1] ?? null]));
  let latest: Placed | null = null;
  let nextLogged = 0;

  for (const line of lines) {
    if (line.antenna === null) continue;
    while (nextLogged < log.length && log[nextLogged]!.startMs <= line.startMs) {
      latest = laterEnding(latest, log[nextLogged]!);
      nextLogged++;
    }
    const placed: Placed = {
      antennaKey: keyOf(line.antenna),
      antennaLabel: labelOf(line.antenna, antennaName),
      startMs: line.startMs,
      endMs: line.endMs ?? nextStart.get(line.startMs) ?? null,
      lineNo: line.lineNo,
    };
    const before: Placed | null = latest !== null && endsAfter(latest, line.startMs) ? latest : null;
    const ahead = log[nextLogged];
    const after = ahead !== undefined && endsAfter(placed, ahead.startMs) ? ahead : null;
    const inTheWay: Placed | null = before ?? after;
    if (inTheWay !== null && isSame(inTheWay, placed, line.endMs === null))
      plan.doubledLines.push(line.lineNo);
    else if (inTheWay !== null) {
      plan.refusals.push({
        lineNo: line.lineNo,
        raw: line.raw,
        field: 'startsAt',
        reason: overlapReason(inTheWay),
      });
    } else {
      const { lineNo, receiver, antenna, startMs, note } = line;
      plan.dwells.push({ lineNo, receiver, antenna, startMs, endMs: placed.endMs, note });
      latest = laterEnding(latest, placed);
    }
  }
}

function overlapReason(inTheWay: Placed): string {
  const end = inTheWay.endMs === null ? 'and is still on' : `to "${formatInstant(inTheWay.endMs)}"`;
  const where = inTheWay.lineNo === null ? 'in the switch log' : `of line "${inTheWay.lineNo}"`;
  return (
    `The receiver was on "${inTheWay.antennaLabel}" from "${formatInstant(inTheWay.startMs)}" ${end} (${where}); ` +
    'it cannot be on two antennas at once. Correct one of the two.'
  );
}

function laterEnding(a: Placed | null, b: Placed): Placed {
  if (a === null) return b;
  return (a.endMs ?? Infinity) > (b.endMs ?? Infinity) ? a : b;
}

function endsAfter(dwell: Placed, ms: number): boolean {
  return dwell.endMs === null || dwell.endMs > ms;
}

/** A line without an end says nothing of it: the dwell may have been ended since. */
function isSame(there: Placed, line: Placed, endIsOpen: boolean): boolean {
  const sameStart = there.antennaKey === line.antennaKey && there.startMs === line.startMs;
  return sameStart && (endIsOpen || there.endMs === line.endMs);
}

function keyOf(named: Named): string {
  return 'id' in named ? `id ${named.id}` : `make ${named.make.toLowerCase()}`;
}

function labelOf(named: Named, nameOf: (id: number) => string): string {
  return 'id' in named ? nameOf(named.id) : named.make;
}

/** Each once, whatever the letters' case, as first written. */
function namesToMake(all: readonly Named[]): string[] {
  const names = new Map<string, string>();
  for (const named of all) {
    if ('make' in named && !names.has(named.make.toLowerCase()))
      names.set(named.make.toLowerCase(), named.make);
  }
  return [...names.values()];
}
