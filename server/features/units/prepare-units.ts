import type { DataSource } from 'typeorm';
import type { PairingRulesInput } from '../../../shared/contracts/comparison.ts';
import { may } from '../../../shared/contracts/permission.ts';
import type { Station as StationReply } from '../../../shared/contracts/station.ts';
import { rulesKey } from '../../../shared/pairing/index.ts';
import type { PairingRules } from '../../../shared/pairing/index.ts';
import { nightDate, nightIndexOf } from '../../../shared/radio/night.ts';
import { findMissingNights } from '../../database/missing-nights.ts';
import { inTransaction } from '../../database/transaction.ts';
import { NotAllowed } from '../../platform/errors.ts';
import { enqueueJob } from '../../platform/job-queue.ts';
import type { Actor } from '../../platform/route.ts';
import { findUnitsJob, type NightRange } from './units.read-model.ts';

export interface UnitsWanted {
  station: StationReply;
  /** null: the standing rules of the station. */
  rules: PairingRulesInput | null;
  nights: NightRange;
  actor: Actor;
  nowMs: number;
}

export interface RulesInForce {
  rules: PairingRulesInput;
  rulesKey: string;
  standing: boolean;
}

/** The rules that a question is answered under. */
export function rulesInForce(station: StationReply, asked: PairingRulesInput | null): RulesInForce {
  const standing = standingRules(station);
  const rules = asked ?? {
    ...standing,
    blockMinutes: standing.blockMinutes as PairingRulesInput['blockMinutes'],
  };
  const key = rulesKey(rules);
  return { rules, rulesKey: key, standing: key === rulesKey(standing) };
}

export function standingRules(station: StationReply): PairingRules {
  const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds } = station;
  return { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds };
}

/**
 * Sees to it that the units of these nights exist under these rules: null when they do; else the job that makes
 * them, queued now unless one waits or runs already. Standing rules are the worker's own business. Throws
 * NotAllowed when a job is needed and the role may not have one.
 */
export async function prepareUnits(dataSource: DataSource, wanted: UnitsWanted): Promise<number | null> {
  const state = await unitsState(dataSource, wanted);
  if (state.ready) return null;
  if (state.jobId !== null) return state.jobId;
  const { actor, station } = wanted;
  if (!actor.role || !may(actor.role, 'comparison:prepare')) {
    throw new NotAllowed(
      'Nobody has asked under these rules yet, and your role cannot have the units made. Use the rules of the station, or ask an analyst.',
    );
  }
  const { rulesKey: key } = rulesInForce(station, wanted.rules);
  return inTransaction(dataSource, async (transaction) => {
    // Two people asking at once get the same job.
    await transaction.query('SELECT pg_advisory_xact_lock(hashtext($1))', [`units ${station.id} ${key}`]);
    return (
      (await findUnitsJob(transaction, station.id, key)) ??
      (await enqueueJob(transaction, station.id, 'units', { rulesKey: key }, actor.userId))
    );
  });
}

/** Whether the units exist, and the job that is making them; changes nothing. */
export async function unitsState(
  dataSource: DataSource,
  { station, rules, nights, nowMs }: Omit<UnitsWanted, 'actor'>,
): Promise<{ ready: boolean; jobId: number | null }> {
  const { rulesKey: key, standing } = rulesInForce(station, rules);
  if (standing) return { ready: true, jobId: null };
  const { manager } = dataSource;
  const missing = await findMissingNights(manager, {
    stationId: station.id,
    standingKey: rulesKey(standingRules(station)),
    rulesKey: key,
    fromNight: nights.fromNight,
    toNight: nights.toNight,
    tonight: nightDate(nightIndexOf(nowMs, station.longitudeDeg)),
  });
  if (missing.length === 0) return { ready: true, jobId: null };
  return { ready: false, jobId: await findUnitsJob(manager, station.id, key) };
}

/**
 * Nights whose units follow a correction or an import. The night of the present does not count: live spots
 * mark it all the time, and it is followed every few seconds anyway.
 */
export function nightsWaiting(
  dirtyHoursMs: number[],
  longitudeDeg: number,
  nights: NightRange,
  nowMs: number,
): number {
  const dates = new Set(dirtyHoursMs.map((ms) => nightDate(nightIndexOf(ms, longitudeDeg))));
  dates.delete(nightDate(nightIndexOf(nowMs, longitudeDeg)));
  return [...dates].filter(
    (date) =>
      (nights.fromNight === null || date >= nights.fromNight) &&
      (nights.toNight === null || date <= nights.toNight),
  ).length;
}
