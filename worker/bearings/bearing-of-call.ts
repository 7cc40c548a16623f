import type { BearingSource } from '../../server/database/entities/call-bearing.ts';
import {
  checkOverride,
  compileOverrides,
  positionOfCall,
  type CompiledOverrides,
  type PositionOverride,
  type PositionSource,
} from '../../shared/radio/call-position.ts';
import { parseCallSign } from '../../shared/radio/call-sign.ts';
import { pathWithSpread } from '../../shared/radio/geodesic.ts';
import { parseLocator } from '../../shared/radio/locator.ts';
import { isRefusal, type Place } from '../../shared/radio/place.ts';

/** Where a call is, seen from a station. All null but the source when it has no known position. */
export interface Bearing {
  country: string | null;
  source: BearingSource;
  latitudeDeg: number | null;
  longitudeDeg: number | null;
  radiusKm: number | null;
  azimuthDeg: number | null;
  distanceKm: number | null;
  spreadDeg: number | null;
}

/** A row of the station's own corrections. */
export interface OverrideRow {
  matches: 'call' | 'prefix';
  pattern: string;
  locator: string;
  radius_km: number;
}

const sources: Readonly<Record<PositionSource, BearingSource>> = {
  'user-locator': 'locator',
  'call-area': 'call area',
  country: 'country',
};

const unplaced: Bearing = {
  country: null,
  source: 'none',
  latitudeDeg: null,
  longitudeDeg: null,
  radiusKm: null,
  azimuthDeg: null,
  distanceKm: null,
  spreadDeg: null,
};

/** Never throws: a call that cannot be read or placed simply has no bearing. */
export function bearingOfCall(call: string, station: Place, overrides: CompiledOverrides): Bearing {
  const parsed = parseCallSign(call);
  if (isRefusal(parsed)) return unplaced;
  const position = positionOfCall(parsed, overrides);
  if (isRefusal(position)) return unplaced;
  const path = pathWithSpread(station, position, position.radiusKm);
  return {
    country: position.country,
    source: sources[position.source],
    latitudeDeg: position.latitude,
    longitudeDeg: position.longitude,
    radiusKm: position.radiusKm,
    azimuthDeg: path.azimuthDeg,
    distanceKm: path.distanceKm,
    spreadDeg: path.bearingSpreadDeg,
  };
}

/**
 * The station's corrections, ready for look-ups, and a sentence for each that cannot be used: one unfit
 * row must not take the bearings of all calls away.
 */
export function readOverrides(rows: readonly OverrideRow[]): {
  overrides: CompiledOverrides;
  unfit: string[];
} {
  const entries: PositionOverride[] = [];
  const unfit: string[] = [];
  for (const row of rows) {
    const cell = parseLocator(row.locator);
    if (isRefusal(cell)) {
      unfit.push(cell.reason);
      continue;
    }
    const entry: PositionOverride =
      row.matches === 'call'
        ? { match: 'call', call: row.pattern, locator: row.locator }
        : {
            match: 'prefix',
            prefix: row.pattern,
            area: row.locator,
            latitude: cell.latitude,
            longitude: cell.longitude,
            // A place is known no better than the locator's own cell says.
            radiusKm: Math.max(row.radius_km, cell.radiusKm),
          };
    const fault = checkOverride(entry);
    if (fault === null) entries.push(entry);
    else unfit.push(fault.reason);
  }
  return { overrides: compileOverrides(entries), unfit };
}
