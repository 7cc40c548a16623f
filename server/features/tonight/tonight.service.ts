import { nightDate, nightIndexOf } from '../../../shared/radio/night.ts';
import { HORIZON_DEG, nightSun, sunAltitudeDeg } from '../../../shared/radio/sun.ts';
import { rulesKey } from '../../../shared/pairing/index.ts';
import type { TonightAnswer } from '../../../shared/contracts/tonight.ts';
import type { Station } from '../../../shared/contracts/station.ts';
import { readRecentPairs } from '../../database/recent-pairs.ts';
import type { Deps } from '../../platform/deps.ts';
import { listReceivers, readStation } from '../station/station.read-model.ts';
import { readPairUnits } from '../units/units.read-model.ts';
import { adviseBand, holdContests } from './band-advice.ts';
import type { BandAdvice, Rival } from './band-advice.ts';
import { advisedHour } from './hour-of-night.ts';
import { readBusyBands, readReceiversNow, readUsableAntennas } from './tonight.read-model.ts';

/** How far back the evidence of this hour reaches. */
const evidenceNights = 30;
/** The pairs that a screen starts with; later ones come by events. */
const pairsShownMs = 10 * 60_000;
const pairsShown = 40;
const usualBands = [160, 80, 40];
/** Advice changes by the minute at most; screens that watch must not make it be computed each second. */
const adviceKeptMs = 30_000;

export function createTonightService(deps: Deps) {
  const { manager } = deps.dataSource;
  const kept = new Map<string, { atMs: number; bands: Promise<BandAdvice[]> }>();

  /** Concurrent and repeated questions share one answer; a failed one is not kept. */
  function adviceFor(station: Station, inUseId: number | null, atMs: number): Promise<BandAdvice[]> {
    const id = `${station.id} ${inUseId}`;
    const known = kept.get(id);
    if (known && atMs - known.atMs < adviceKeptMs) return known.bands;
    if (kept.size > 500) kept.clear();
    const bands = advise(station, inUseId, atMs);
    kept.set(id, { atMs, bands });
    bands.catch(() => kept.delete(id));
    return bands;
  }

  async function advise(station: Station, inUseId: number | null, atMs: number): Promise<BandAdvice[]> {
    const place = { latitude: station.latitudeDeg, longitude: station.longitudeDeg };
    const tonight = nightIndexOf(atMs, station.longitudeDeg);
    const nights = { fromNight: nightDate(tonight - evidenceNights), toNight: nightDate(tonight) };
    const [busy, antennas, receivers] = await Promise.all([
      readBusyBands(manager, station.id, new Date(atMs)),
      readUsableAntennas(manager, station.id, new Date(atMs).toISOString().slice(0, 10)),
      listReceivers(manager, station.id),
    ]);
    const bands = [...new Set([...busy, ...usualBands])].slice(0, 6).sort((a, b) => b - a);
    const inUse = antennas.find((antenna) => antenna.id === inUseId) ?? null;
    const { about, range } = advisedHour(atMs, place);
    if (!inUse) return bands.map((band) => adviseBand(band, null, [], about));

    const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds, marginDb, sectorCount } = station;
    const rules = { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds };
    const rivals: Rival[] = [];
    for (const antenna of antennas.filter((candidate) => candidate.id !== inUse.id)) {
      const pair = await readPairUnits(manager, station.id, rulesKey(rules), [antenna.id, inUse.id], nights);
      rivals.push({
        antenna,
        input: {
          ...pair,
          receivers,
          rules: { ...rules, blockMinutes: blockMinutes as 15 },
          ...{ marginDb, sectorCount, station: place, calls: new Map(), nights: [] },
        },
      });
    }
    const question = { ...nights, hours: range };
    return bands.map((band) => adviseBand(band, inUse, holdContests(band, inUse, rivals, question), about));
  }

  return {
    async read(stationId: number, inUseId: number | undefined): Promise<TonightAnswer> {
      const atMs = deps.now();
      const station = await readStation(manager, stationId);
      const [receivers, pairs] = await Promise.all([
        readReceiversNow(manager, stationId, new Date(atMs)),
        readRecentPairs(deps.dataSource, stationId, {
          fromMs: atMs - pairsShownMs,
          toMs: atMs,
          limit: pairsShown,
        }),
      ]);
      const inUse = inUseId ?? receivers.find((receiver) => receiver.antenna_id !== null)?.antenna_id ?? null;
      return {
        at: new Date(atMs).toISOString(),
        night: nightDate(nightIndexOf(atMs, station.longitudeDeg)),
        sun: sunOf(station, atMs),
        receivers: receivers.map((row) => ({
          receiverId: row.id,
          callSign: row.call_sign,
          label: row.label,
          antennaId: row.antenna_id,
          antennaName: row.antenna_name,
          antennaMarker: row.antenna_marker,
          since: row.since?.toISOString() ?? null,
          spotsLastTenMinutes: row.spots,
        })),
        about: advisedHour(atMs, { latitude: station.latitudeDeg, longitude: station.longitudeDeg }).about,
        bands: await adviceFor(station, inUse, atMs),
        pairs,
      };
    },
  };
}

function sunOf(station: Station, atMs: number): TonightAnswer['sun'] {
  const place = { latitude: station.latitudeDeg, longitude: station.longitudeDeg };
  const { sunsetMs, sunriseMs } = nightSun(nightIndexOf(atMs, place.longitude), place);
  const altitudeDeg = sunAltitudeDeg(atMs, place);
  const isDark = altitudeDeg < HORIZON_DEG;
  const minutesUntil = (ms: number | null) =>
    ms === null || ms < atMs ? null : Math.round((ms - atMs) / 60_000);
  return {
    sunset: sunsetMs === null ? null : new Date(sunsetMs).toISOString(),
    sunrise: sunriseMs === null ? null : new Date(sunriseMs).toISOString(),
    altitudeDeg,
    darknessLeftMinutes: isDark ? minutesUntil(sunriseMs) : null,
    minutesToSunset: isDark ? null : minutesUntil(sunsetMs),
  };
}
