import { nightDate, nightIndexOf, nightIndexOfDate, nightStartMs } from '../../shared/radio/night.ts';
import { nightSun } from '../../shared/radio/sun.ts';
import { createRandom, type Random } from '../../shared/stats/random.ts';
import type { Scenario, ScenarioMishap } from './scenario.ts';

/**
 * The demo's switching plan and the switch log it leaves behind.
 *
 * Through the night the two switched receivers walk through all pairs of the antennas in service, in an
 * order drawn anew for every round of pairs (a round-robin tournament, so that every antenna comes up
 * equally often), and every pair is run twice in a row with the receivers swapped. That is what makes
 * receiver offsets estimable and keeps drift out of the differences. By day they rest.
 */
export interface PlannedDwell {
  receiver: string;
  antenna: string;
  startMs: number;
  /** Null: still on it. */
  endMs: number | null;
}

export interface SwitchingPlan {
  /** The antenna a receiver is truly on; null when the receiver is off or the station did not exist yet. */
  antennaAt(receiver: string, timeMs: number): string | null;
  /** The switch log: logged dwells that start in [fromMs, toMs), in time order. */
  dwells(fromMs: number, toMs: number): PlannedDwell[];
}

const minuteMs = 60_000;

function shuffle<T>(random: Random, items: readonly T[]): T[] {
  const shuffled = [...items];
  for (let i = shuffled.length - 1; i > 0; i--) {
    const j = random.integer(i + 1);
    [shuffled[i], shuffled[j]] = [shuffled[j]!, shuffled[i]!];
  }
  return shuffled;
}

/** One tournament (circle method): every pair once, no antenna twice in a round. */
function drawPairs(random: Random, antennas: readonly string[]): [string, string][] {
  const seats: (string | null)[] = shuffle(random, antennas);
  if (seats.length % 2 === 1) seats.push(null);
  const rounds: [string, string][][] = [];
  for (let round = 0; round < seats.length - 1; round++) {
    const pairs: [string, string][] = [];
    for (let i = 0; i < seats.length / 2; i++) {
      const a = seats[i]!;
      const b = seats[seats.length - 1 - i]!;
      if (a !== null && b !== null) pairs.push(random.uniform() < 0.5 ? [a, b] : [b, a]);
    }
    rounds.push(shuffle(random, pairs));
    seats.splice(1, 0, seats.pop()!);
  }
  return shuffle(random, rounds).flat();
}

interface PlannedNight {
  startMs: number;
  /** One entry a slot of `dwellMinutes`: the antennas of the switched receivers. */
  slots: readonly (readonly [string, string])[];
}

export function createSwitchingPlan(seed: number, scenario: Scenario): SwitchingPlan {
  const { longitude } = scenario.place;
  const root = createRandom(seed).fork('switching');
  const firstNight = nightIndexOfDate(scenario.firstNight);
  const firstMs = nightStartMs(firstNight, longitude);
  const slotMs = scenario.dwellMinutes * minuteMs;
  const switched = scenario.receivers.filter((receiver) => receiver.fixedAntenna === null);
  if (switched.length !== 2 || scenario.restingAntennas.length !== 2) {
    throw new RangeError('the switching plan needs two switched receivers and a resting antenna for each');
  }
  const nights = new Map<number, PlannedNight>();

  const planNight = (index: number): PlannedNight => {
    const random = root.fork(index);
    const date = nightDate(index);
    const noonMs = nightStartMs(index, longitude);
    const { sunsetMs, sunriseMs } = nightSun(index, scenario.place);
    const marginMs = scenario.planMarginMinutes * minuteMs;
    // Where the sun never sets or never rises the plan simply runs from evening to morning.
    const fromMs = (sunsetMs ?? noonMs + 6 * 60 * minuteMs) - marginMs;
    const toMs = (sunriseMs ?? noonMs + 18 * 60 * minuteMs) + marginMs;
    const startMs = Math.max(Math.ceil(noonMs / slotMs), Math.floor(fromMs / slotMs)) * slotMs;
    const antennas = scenario.antennas
      .filter(({ inServiceFrom, inServiceTo }) => {
        return (
          (inServiceFrom === null || inServiceFrom <= date) && (inServiceTo === null || date <= inServiceTo)
        );
      })
      .map((antenna) => antenna.name);
    const count = Math.ceil((toMs - startMs) / slotMs);
    const slots: [string, string][] = [];
    while (slots.length < count) {
      for (const [a, b] of drawPairs(random, antennas)) slots.push([a, b], [b, a]);
    }
    return { startMs, slots: slots.slice(0, count) };
  };
  const nightAt = (index: number): PlannedNight => {
    let night = nights.get(index);
    if (!night) {
      night = planNight(index);
      nights.set(index, night);
    }
    return night;
  };
  const planEndMs = (night: PlannedNight): number => night.startMs + night.slots.length * slotMs;

  /** The mishap of a kind that a receiver is in, if any. */
  const mishapAt = (
    kind: ScenarioMishap['kind'],
    receiver: string,
    timeMs: number,
  ): ScenarioMishap | undefined => {
    const index = nightIndexOf(timeMs, longitude);
    const minute = (timeMs - nightStartMs(index, longitude)) / minuteMs;
    return scenario.mishaps.find(
      (mishap) =>
        mishap.kind === kind &&
        mishap.night === index - firstNight &&
        mishap.receivers.includes(receiver) &&
        minute >= mishap.fromMinute &&
        minute < mishap.toMinute,
    );
  };

  const antennaAt = (receiver: string, timeMs: number): string | null => {
    if (timeMs < firstMs || mishapAt('off', receiver, timeMs)) return null;
    const port = switched.findIndex(({ callSign }) => callSign === receiver);
    if (port === -1) {
      return scenario.receivers.find(({ callSign }) => callSign === receiver)?.fixedAntenna ?? null;
    }
    const night = nightAt(nightIndexOf(timeMs, longitude));
    const slot = night.slots[Math.floor((timeMs - night.startMs) / slotMs)];
    return slot?.[port] ?? scenario.restingAntennas[port] ?? null;
  };

  /** Moments in order at which one receiver's state may change, complete over [fromMs, toMs]. */
  const changes = (receiver: string, fromMs: number, toMs: number): number[] => {
    const times: number[] = [firstMs];
    for (const mishap of scenario.mishaps) {
      if (!mishap.receivers.includes(receiver)) continue;
      const noonMs = nightStartMs(firstNight + mishap.night, longitude);
      times.push(noonMs + mishap.fromMinute * minuteMs, noonMs + mishap.toMinute * minuteMs);
    }
    const port = switched.findIndex(({ callSign }) => callSign === receiver);
    // The night before the range too: a dwell of the range may continue one that began there.
    const first = Math.max(firstNight, nightIndexOf(fromMs, longitude) - 1);
    for (let index = first; port !== -1 && nightStartMs(index, longitude) <= toMs; index++) {
      const night = nightAt(index);
      night.slots.forEach((_, slot) => times.push(night.startMs + slot * slotMs));
      times.push(planEndMs(night));
    }
    return [...new Set(times)].sort((a, b) => a - b);
  };

  /** The logged dwells of one receiver that start in the range; a dwell's end is looked for up to two days on. */
  const receiverDwells = (receiver: string, fromMs: number, toMs: number): PlannedDwell[] => {
    const found: PlannedDwell[] = [];
    let open: PlannedDwell | null = null;
    for (const timeMs of changes(receiver, fromMs, toMs + 2 * 24 * 60 * minuteMs)) {
      const antenna: string | null = mishapAt('unlogged', receiver, timeMs)
        ? null
        : antennaAt(receiver, timeMs);
      if (open && open.antenna === antenna) continue;
      if (open) open.endMs = timeMs;
      open = antenna === null ? null : { receiver, antenna, startMs: timeMs, endMs: null };
      if (open) found.push(open);
    }
    return found.filter((dwell) => dwell.startMs >= fromMs && dwell.startMs < toMs);
  };

  return {
    antennaAt,
    dwells: (fromMs, toMs) =>
      scenario.receivers
        .flatMap(({ callSign }) => receiverDwells(callSign, fromMs, toMs))
        .sort((a, b) => a.startMs - b.startMs || a.receiver.localeCompare(b.receiver)),
  };
}
