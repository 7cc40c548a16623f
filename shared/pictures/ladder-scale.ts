import type { LadderComponent } from '../contracts/ladder.ts';

/** The dB axis of one scale of the ladder; not symmetric, since its zero is only where values are counted from. */
export interface LadderScale {
  fromDb: number;
  toDb: number;
  stepDb: number;
}

export const stepsDb = [0.1, 0.2, 0.5, 1, 2, 5, 10, 20, 50];
/** How far a thin antenna's interval may widen the axis, as a share of what the others need; beyond, it is cut. */
const thinShare = 0.3;
const mostSteps = 9;

/** The value that the margin hangs from: the highest that speaks, else the highest there is. */
export function bestValueDb(component: LadderComponent): number | null {
  const valued = component.antennas.filter(({ valueDb }) => valueDb !== null);
  return (valued.find(({ speaks }) => speaks) ?? valued[0])?.valueDb ?? null;
}

/**
 * One axis for each component, each around its own antennas, all with the same number of dB from end to end:
 * they cannot be set beside each other, but a dB is as wide on one as on the other. Holds zero, all values, the
 * intervals of the antennas that speak, and the margin below the best.
 */
export function ladderScales(components: readonly LadderComponent[], marginDb: number): LadderScale[] {
  const needs = components.map((component) => neededRange(component, marginDb));
  const widest = Math.max(...needs.map(([from, to]) => to - from), 2 * marginDb);
  const stepDb = stepsDb.find((step) => widest / step <= mostSteps) ?? widest / mostSteps;
  const snapped = needs.map(([from, to]) => [
    Math.floor(from / stepDb + 1e-9),
    Math.ceil(to / stepDb - 1e-9),
  ]) as [number, number][];
  const steps = Math.max(2, ...snapped.map(([from, to]) => to - from));
  return snapped.map(([from, to]) => {
    const spare = steps - (to - from);
    const start = from - Math.ceil(spare / 2);
    return { fromDb: start * stepDb, toDb: (start + steps) * stepDb, stepDb };
  });
}

function neededRange(component: LadderComponent, marginDb: number): [number, number] {
  const valued = component.antennas.filter(({ valueDb }) => valueDb !== null);
  const best = bestValueDb(component);
  const firm = [
    0,
    ...valued.map(({ valueDb }) => valueDb!),
    ...valued.flatMap(({ speaks, intervalDb }) => (speaks && intervalDb ? intervalDb : [])),
    ...(best === null ? [] : [best - marginDb]),
  ];
  const [low, high] = [Math.min(...firm), Math.max(...firm)];
  const reach = Math.max(high - low, 2 * marginDb) * thinShare;
  const thin = valued.flatMap(({ speaks, intervalDb }) => (speaks || !intervalDb ? [] : intervalDb));
  return [Math.max(Math.min(low, ...thin), low - reach), Math.min(Math.max(high, ...thin), high + reach)];
}

/** An axis symmetric about zero that holds all these differences. */
export function symmetricScale(differencesDb: readonly number[]): LadderScale {
  const limit = Math.max(0.5, ...differencesDb.map(Math.abs));
  const stepDb = stepsDb.find((step) => Math.ceil(limit / step - 1e-9) <= 4) ?? limit / 4;
  const limitDb = Math.ceil(limit / stepDb - 1e-9) * stepDb;
  return { fromDb: -limitDb, toDb: limitDb, stepDb };
}

/** Place on the axis in per cent of its length; what lies beyond sits at the end. */
export function placeOnLadder(db: number, { fromDb, toDb }: LadderScale): number {
  return Math.min(100, Math.max(0, ((db - fromDb) / (toDb - fromDb)) * 100));
}

export function ladderTicks({ fromDb, toDb, stepDb }: LadderScale): number[] {
  const count = Math.round((toDb - fromDb) / stepDb);
  // Counted from zero, so that it is written "0" and not as what is left of a sum.
  const first = Math.round(fromDb / stepDb);
  return Array.from({ length: count + 1 }, (_, index) => (first + index) * stepDb);
}

/** Ends of an interval as they are drawn: cut at the axis, with a mark where it runs on. */
export function cutOnLadder(interval: readonly [number, number], { fromDb, toDb }: LadderScale) {
  const cut = (db: number) => Math.max(fromDb, Math.min(toDb, db));
  return {
    from: cut(interval[0]),
    to: cut(interval[1]),
    runsOnLow: interval[0] < fromDb - 1e-9,
    runsOnHigh: interval[1] > toDb + 1e-9,
  };
}
