import type { BodyInput } from '../../../shared/contracts/endpoint.ts';
import type { Antenna, addAntenna } from '../../../shared/contracts/antenna.ts';
import type { Feed, addFeed } from '../../../shared/contracts/feed.ts';
import type { addPositionOverride } from '../../../shared/contracts/position.ts';
import type { Receiver, addReceiver } from '../../../shared/contracts/receiver.ts';
import type { Station, updateStation } from '../../../shared/contracts/station.ts';
import { feetToMetres, metresToFeet } from '../../../shared/radio/convert.ts';
import type { LengthUnit } from '../../../shared/format.ts';

/** What is typed: texts, so that a half-written number survives; lengths in the reader's unit. */
export interface AntennaDraft {
  name: string;
  marker: string;
  kind: Antenna['kind'];
  heading: string;
  beamwidth: string;
  length: string;
  height: string;
  notes: string;
  from: string;
  to: string;
}

/** Decimal comma or point; an empty field is nothing, and what is no number becomes NaN, which the contract refuses. */
export function numberFrom(text: string): number | null {
  const written = text.trim().replace('\u2212', '-').replace(',', '.');
  return written === '' ? null : Number(written);
}

const decimals = (value: number, places: number) => String(Number(value.toFixed(places)));

function lengthText(metres: number | null, unit: LengthUnit): string {
  if (metres === null) return '';
  return decimals(unit === 'ft' ? metresToFeet(metres) : metres, 2);
}

function metresFrom(text: string, unit: LengthUnit): number | null {
  const length = numberFrom(text);
  // Centimetres: finer than any wire is known, and 100 ft must come back as 100 ft.
  return length === null ? null : Number((unit === 'ft' ? feetToMetres(length) : length).toFixed(3));
}

/**
 * A refusal of a length, its limit in the reader's unit: the contract names metres. Rounded down, so that the limit
 * that is named is taken.
 */
export function lengthRefusal(sentence: string | undefined, unit: LengthUnit): string | undefined {
  if (unit === 'm') return sentence;
  return sentence?.replace(
    /(\d+) metres/,
    (_, metres: string) => `${Math.floor(metresToFeet(Number(metres)))} feet`,
  );
}

export function antennaDraft(antenna: Antenna | null, unit: LengthUnit): AntennaDraft {
  return {
    name: antenna?.name ?? '',
    marker: antenna?.marker ?? '',
    kind: antenna?.kind ?? 'long wire',
    heading: antenna?.headingDeg?.toString() ?? '',
    beamwidth: antenna?.beamwidthDeg?.toString() ?? '',
    length: lengthText(antenna?.lengthM ?? null, unit),
    height: lengthText(antenna?.heightM ?? null, unit),
    notes: antenna?.notes ?? '',
    from: antenna?.inServiceFrom ?? '',
    to: antenna?.inServiceTo ?? '',
  };
}

export function antennaBody(draft: AntennaDraft, unit: LengthUnit): BodyInput<typeof addAntenna> {
  return {
    name: draft.name,
    marker: draft.marker.trim().toUpperCase(),
    kind: draft.kind,
    headingDeg: numberFrom(draft.heading),
    beamwidthDeg: numberFrom(draft.beamwidth),
    lengthM: metresFrom(draft.length, unit),
    heightM: metresFrom(draft.height, unit),
    notes: draft.notes,
    inServiceFrom: draft.from.trim() || null,
    inServiceTo: draft.to.trim() || null,
  };
}

/**
 * Only what the form changed. What it did not touch is not sent: a length shown in feet would come back a
 * millimetre off, and another person's change of another field would be overwritten.
 */
export function changesOf<Body extends object>(body: Body, storedBody: Body): Partial<Body> {
  return Object.fromEntries(
    Object.entries(body).filter(([key, value]) => value !== storedBody[key as keyof Body]),
  ) as Partial<Body>;
}

export interface ReceiverDraft {
  callSign: string;
  label: string;
  notes: string;
}
export function receiverDraft(receiver: Receiver | null): ReceiverDraft {
  return {
    callSign: receiver?.callSign ?? '',
    label: receiver?.label ?? '',
    notes: receiver?.notes ?? '',
  };
}
export function receiverBody(draft: ReceiverDraft): BodyInput<typeof addReceiver> {
  return { ...draft };
}

export interface FeedDraft {
  name: string;
  host: string;
  port: string;
  loginCall: string;
  enabled: boolean;
}
export function feedDraft(feed: Feed | null, stationCall: string): FeedDraft {
  return {
    name: feed?.name ?? '',
    host: feed?.host ?? '',
    port: feed?.port.toString() ?? '',
    loginCall: feed?.loginCall ?? stationCall,
    enabled: feed?.enabled ?? true,
  };
}
export function feedBody(draft: FeedDraft): BodyInput<typeof addFeed> {
  return { ...draft, host: draft.host.trim(), port: numberFrom(draft.port) ?? NaN };
}

export interface StationDraft {
  name: string;
  callSign: string;
  locator: string;
  timeZone: string;
  ituRegion: string;
  guardSeconds: string;
  blockMinutes: string;
  windowSeconds: string;
  freqToleranceKhz: string;
  marginDb: string;
  sectorCount: string;
}
export function stationDraft(station: Station): StationDraft {
  return {
    name: station.name,
    callSign: station.callSign,
    locator: station.locator,
    timeZone: station.timeZone,
    ituRegion: String(station.ituRegion),
    guardSeconds: String(station.guardSeconds),
    blockMinutes: String(station.blockMinutes),
    windowSeconds: String(station.windowSeconds),
    freqToleranceKhz: decimals(station.freqToleranceKhz, 1),
    marginDb: decimals(station.marginDb, 2),
    sectorCount: String(station.sectorCount),
  };
}
export function stationBody(draft: StationDraft): BodyInput<typeof updateStation> {
  const number = (text: string) => numberFrom(text) ?? NaN;
  return {
    name: draft.name,
    callSign: draft.callSign,
    locator: draft.locator,
    timeZone: draft.timeZone,
    ituRegion: number(draft.ituRegion),
    guardSeconds: number(draft.guardSeconds),
    blockMinutes: number(draft.blockMinutes),
    windowSeconds: number(draft.windowSeconds),
    freqToleranceKhz: number(draft.freqToleranceKhz),
    marginDb: number(draft.marginDb),
    sectorCount: number(draft.sectorCount),
  };
}

const pairingRules = ['guardSeconds', 'blockMinutes', 'windowSeconds', 'freqToleranceKhz'] as const;

/** What the program will make anew after these changes, in sentences; empty when nothing is. */
export function madeAnew(changes: Partial<BodyInput<typeof updateStation>>): string[] {
  const sentences: string[] = [];
  const moves = changes.locator !== undefined;
  if (moves) {
    sentences.push(
      'Every bearing and distance is computed anew from the new position, and the edges of the nights move.',
    );
    if (changes.timeZone === undefined) sentences.push('Time zone and ITU region follow the new position.');
  }
  if (moves || pairingRules.some((rule) => changes[rule] !== undefined)) {
    sentences.push(
      'The units of every night are made anew in the background. Until that is done, answers say how many nights are still waiting. Spots and the switch log stay as they are.',
    );
  }
  if (changes.sectorCount !== undefined)
    sentences.push('Saved trials that name sectors keep their numbers: look through them.');
  if (changes.marginDb !== undefined)
    sentences.push('Verdicts are given by the new margin from now on; nothing is computed anew.');
  return sentences;
}

export interface CorrectionDraft {
  matches: 'call' | 'prefix';
  pattern: string;
  locator: string;
  radiusKm: string;
}
export function correctionBody(draft: CorrectionDraft): BodyInput<typeof addPositionOverride> {
  return { ...draft, radiusKm: numberFrom(draft.radiusKm) ?? NaN };
}
