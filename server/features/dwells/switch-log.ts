import { randomUUID } from 'node:crypto';
import type { EntityManager } from 'typeorm';
import type { DwellPreview } from '../../../shared/contracts/dwell.ts';
import { nightEndMs, nightIndexOf, nightStartMs } from '../../../shared/radio/night.ts';
import { markHoursDirty } from '../../database/dirty-blocks.ts';
import type { Antenna } from '../../database/entities/antenna.ts';
import type { Receiver } from '../../database/entities/receiver.ts';
import { Station } from '../../database/entities/station.ts';
import { Conflict, NotFound } from '../../platform/errors.ts';
import { publish, wakeWorkers } from '../../platform/notify.ts';
import { spotExtent } from '../spots/spot-extent.read-model.ts';
import { overlapWithin } from './dwell-plan.ts';
import type { DwellStep } from './dwell-record.ts';
import { dwellRepository } from './dwell.repository.ts';
import { dwellText, overlapSentence } from './dwell-wording.ts';
import type { LogNames } from './dwell-wording.ts';
import { countTagChanges } from './spot-recount.ts';
import { clipStretches, mergeStretches, nightsOf, slicesOf, touchedStretches } from './touched-stretches.ts';
import type { Stretch } from './touched-stretches.ts';

/** What the rules of the switch log need to know of a station. */
export interface LogBook {
  station: Station;
  receivers: ReadonlyMap<number, Receiver>;
  antennas: ReadonlyMap<number, Antenna>;
  names: LogNames;
}

export interface LogActor {
  userId: string | null;
  tokenId: string | null;
}

const hourMs = 3_600_000;
/** A match reaches 1.5 windows (at most 600 s) past a block's end, and with it what a dwell decides. */
const pairingReachMs = 900_000;

export async function readLogBook(manager: EntityManager, stationId: number): Promise<LogBook> {
  const station = await manager.findOneBy(Station, { id: stationId });
  if (!station) throw new NotFound('This station');
  const receivers = new Map(
    (await dwellRepository.receivers(manager, stationId)).map((row) => [row.id, row]),
  );
  const antennas = new Map((await dwellRepository.antennas(manager, stationId)).map((row) => [row.id, row]));
  const names = {
    receiver: (id: number) => receivers.get(id)?.callSign ?? `receiver ${id}`,
    antenna: (id: number) => antennas.get(id)?.name ?? `antenna ${id} (removed)`,
  };
  return { station, receivers, antennas, names };
}

/** Throws Conflict, naming both dwells, when the outcome of the steps overlaps itself or the stored log. */
export async function refuseOverlaps(
  manager: EntityManager,
  book: LogBook,
  steps: readonly DwellStep[],
): Promise<void> {
  const overlap = overlapWithin(steps) ?? (await dwellRepository.overlapped(manager, book.station.id, steps));
  if (!overlap) return;
  const { step, inTheWay } = overlap;
  const message = overlapSentence(step.after!, inTheWay, book.names);
  const path = step.changeIndex === null ? null : `body.changes.${step.changeIndex}`;
  throw new Conflict(message, path === null ? [] : [{ path, message }], 'overlap');
}

/** Counts what the steps do to the spots that are stored now; the steps may be stored before or after. */
export async function measure(
  manager: EntityManager,
  book: LogBook,
  steps: readonly DwellStep[],
): Promise<DwellPreview> {
  const { station } = book;
  const extent = await spotExtent(manager, station.id);
  const touched = touchedStretches(steps, station.guardSeconds * 1000);
  const stretches = extent ? clipStretches(touched, extent.firstMs, extent.lastMs + 1000) : [];
  const changes = await countTagChanges(
    manager,
    station.id,
    stretches,
    steps.flatMap((step) => (step.before ? [step.before] : [])),
    steps.flatMap((step) => (step.after ? [step.after] : [])),
    station.guardSeconds,
  );
  const blockMs = station.blockMinutes * 60_000;
  return {
    ...changes,
    blocksTouched: slicesOf(stretches, (timeMs) => Math.floor(timeMs / blockMs)).length,
    nightsTouched: nightsOf(stretches, station.longitudeDeg),
    warnings: serviceWarnings(book, steps),
  };
}

/**
 * Stores the steps as one batch of the log's history, marks the hours whose units they touch and tells
 * everybody. Returns the batch's id. Overlaps must have been refused, and the receivers locked, before.
 */
export async function storeSteps(
  manager: EntityManager,
  book: LogBook,
  steps: readonly DwellStep[],
  actor: LogActor,
): Promise<string> {
  const stationId = book.station.id;
  const batchId = randomUUID();
  await dwellRepository.replace(manager, stationId, steps);
  await dwellRepository.record(manager, stationId, batchId, steps, actor);
  if (await markTouchedHours(manager, book.station, steps)) await wakeWorkers(manager);
  const receiverIds = [...new Set(steps.map((step) => (step.before ?? step.after)!.receiverId))];
  await publish(manager, stationId, { type: 'switch', receiverIds });
  return batchId;
}

/** Says of each new statement about an antenna whether it lies outside the antenna's dates of service. */
export function serviceWarnings(book: LogBook, steps: readonly DwellStep[]): string[] {
  const warnings = new Set<string>();
  for (const { before, after } of steps) {
    if (!after) continue;
    const antenna = book.antennas.get(after.antennaId);
    const saidBefore =
      before?.antennaId === after.antennaId &&
      before.startMs === after.startMs &&
      before.endMs === after.endMs;
    if (!antenna || saidBefore) continue;
    // A date holds in whatever time zone its writer had in mind: from UTC+14 to UTC-12.
    const { inServiceFrom: from, inServiceTo: to } = antenna;
    const early = from !== null && after.startMs < Date.parse(`${from}T00:00:00Z`) - 14 * hourMs;
    const late = to !== null && (after.endMs ?? after.startMs) > Date.parse(`${to}T00:00:00Z`) + 36 * hourMs;
    if (!early && !late) continue;
    const dates = [from && `from ${from}`, to && `to ${to}`].filter(Boolean).join(' ');
    warnings.add(
      `${antenna.name} was in service ${dates}: ${dwellText(after, book.names)} lies outside of that.`,
    );
  }
  return [...warnings];
}

/**
 * Every hour that the changed dwells reach, within the nights that have spots: also hours without a spot,
 * because the time that each antenna listened is part of a night's units.
 */
async function markTouchedHours(
  manager: EntityManager,
  station: Station,
  steps: readonly DwellStep[],
): Promise<boolean> {
  const extent = await spotExtent(manager, station.id);
  if (!extent) return false;
  const { longitudeDeg } = station;
  const anyReceiver = touchedStretches(steps, station.guardSeconds * 1000).map(
    ({ fromMs, toMs }): Stretch => ({
      receiverId: 0,
      fromMs: fromMs - pairingReachMs,
      toMs: toMs + pairingReachMs,
    }),
  );
  const stretches = clipStretches(
    mergeStretches(anyReceiver),
    nightStartMs(nightIndexOf(extent.firstMs, longitudeDeg), longitudeDeg),
    nightEndMs(nightIndexOf(extent.lastMs, longitudeDeg), longitudeDeg),
  );
  const hours = slicesOf(stretches, (timeMs) => Math.floor(timeMs / hourMs));
  if (hours.length === 0) return false;
  await markHoursDirty(
    manager,
    station.id,
    hours.map((hour) => new Date(hour * hourMs)),
  );
  return true;
}
