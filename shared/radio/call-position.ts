/**
 * Where a station is, as far as its call tells: a locator given by a user, else its call area, else
 * its country, each with a radius of uncertainty. Server and worker only: this module pulls in the
 * tables and the country data (world-countries, ODbL 1.0), which the client has no use for.
 */
import countries from 'world-countries';
import { parseCallSign, type CallSign } from './call-sign.ts';
import { holderOf } from './call-sign-series.ts';
import { CALL_AREAS } from './data/call-areas.ts';
import { CALL_TERRITORIES } from './data/call-territories.ts';
import { ISLAND_SPREAD_KM } from './data/country-spread.ts';
import type { CallArea } from './data/call-area.ts';
import { parseLocator, type LocatorCell } from './locator.ts';
import { isRefusal, type Place, type Refusal } from './place.ts';

export type PositionSource = 'user-locator' | 'call-area' | 'country';

export interface CallPosition extends Place {
  /** The station lies within this of the position, most likely. */
  radiusKm: number;
  source: PositionSource;
  /** ISO 3166-1 alpha-2 code (XK for Kosovo) and common English name; null where no country holds the prefix. */
  countryCode: string | null;
  country: string | null;
  /** "Ontario", "Canary Islands", or the name a station gave to its own entry; null for the whole country. */
  area: string | null;
  /** True when one of the station's own entries decided. */
  overridden: boolean;
}

/**
 * A station's own word against the tables. "call": where one call sign is, as a locator of 4 or more
 * characters. "prefix": where all calls are whose location begins so ("VE7", "EI", "VP8"), instead
 * of whatever the tables say about them.
 */
export type PositionOverride =
  | { match: 'call'; call: string; locator: string }
  | ({ match: 'prefix'; prefix: string; area: string; radiusKm: number } & Place);

type PrefixOverride = Extract<PositionOverride, { match: 'prefix' }>;

/** A station's overrides, made ready for many look-ups by `compileOverrides`. */
export interface CompiledOverrides {
  calls: ReadonlyMap<string, LocatorCell>;
  /** Longest prefix first. */
  prefixes: readonly PrefixOverride[];
}

/** No circle is smaller: nobody knows a station to better than this from a table. */
const smallestRadiusKm = 10;

const organisations: Readonly<Record<string, string>> = {
  UN: 'the United Nations',
  WMO: 'the World Meteorological Organization',
  ICAO: 'the International Civil Aviation Organization',
};

interface CountryPosition extends Place {
  name: string;
  radiusKm: number;
}

const countryByCode = new Map<string, CountryPosition>(
  countries.map(({ cca2, name, latlng, area }) => [
    cca2,
    {
      name: name.common,
      latitude: latlng[0],
      longitude: latlng[1],
      radiusKm: Math.max(
        smallestRadiusKm,
        Math.sqrt(Math.max(0, area) / Math.PI),
        ISLAND_SPREAD_KM[cca2] ?? 0,
      ),
    },
  ]),
);

/** What is wrong with an override, as a sentence; null when it is fit for use. */
export function checkOverride(entry: PositionOverride): Refusal | null {
  if (entry.match === 'call') {
    const parsed = parseCallSign(entry.call);
    if (isRefusal(parsed)) return parsed;
    const cell = parseLocator(entry.locator);
    if (isRefusal(cell)) return cell;
    if (cell.locator.length === 2) {
      return {
        reason: `The locator ${cell.locator} is too coarse for one station; give 4 characters or more.`,
      };
    }
    return null;
  }
  if (!/^[A-Z0-9]{1,8}$/.test(entry.prefix)) {
    return { reason: `The prefix "${entry.prefix}" must be 1 to 8 capital letters and digits, such as VE7.` };
  }
  if (!(Math.abs(entry.latitude) <= 90) || !(Math.abs(entry.longitude) <= 180)) {
    return {
      reason: `The position of prefix ${entry.prefix} must lie within latitude -90 to 90 and longitude -180 to 180.`,
    };
  }
  if (!(entry.radiusKm >= 0 && entry.radiusKm <= 20_000)) {
    return { reason: `The radius of prefix ${entry.prefix} must be 0 to 20000 km.` };
  }
  return null;
}

/** Makes overrides ready for use; of two for the same call or prefix the later counts. Throws a RangeError on an unfit one. */
export function compileOverrides(entries: readonly PositionOverride[]): CompiledOverrides {
  const calls = new Map<string, LocatorCell>();
  const prefixes = new Map<string, PrefixOverride>();
  for (const entry of entries) {
    const fault = checkOverride(entry);
    if (fault !== null) throw new RangeError(fault.reason);
    if (entry.match === 'prefix') {
      prefixes.set(entry.prefix, entry);
      continue;
    }
    const parsed = parseCallSign(entry.call);
    const cell = parseLocator(entry.locator);
    if (!isRefusal(parsed) && !isRefusal(cell)) calls.set(parsed.call, cell);
  }
  return {
    calls,
    prefixes: [...prefixes.values()].sort((one, other) => other.prefix.length - one.prefix.length),
  };
}

/**
 * The best known position of a call, or a sentence why it has none. Trust goes down in this order: a
 * locator that the station gave for the exact call (or for the base call, when the operator is at
 * home), the station's entry for a prefix, the call area, the country. Stations at sea and in the
 * air have no position whatever is known about their call.
 */
export function positionOfCall(parsed: CallSign, overrides?: CompiledOverrides): CallPosition | Refusal {
  if (parsed.mobile !== null) {
    const station =
      parsed.mobile === 'maritime' ? 'at sea: a maritime mobile' : 'in the air: an aeronautical mobile';
    return { reason: `${parsed.call} is ${station} station has no bearing.` };
  }
  const holder = holderOf(parsed.location);
  const entry = areaOf(parsed.location, holder);
  const code = entry?.country ?? (holder !== null && countryByCode.has(holder) ? holder : null);
  const country = code === null ? undefined : countryByCode.get(code);
  const named = { countryCode: code, country: country?.name ?? null };
  const own = ownPosition(parsed, overrides);
  if (own !== null) return { ...own, ...named };
  if (entry !== null && entry.unplaced !== null) {
    return { reason: `${parsed.call} cannot be placed: by its prefix ${entry.unplaced}.` };
  }
  if (entry !== null && entry.place !== null) {
    return { ...entry.place, source: 'call-area', ...named, area: entry.area, overridden: false };
  }
  if (country !== undefined) {
    const { latitude, longitude, radiusKm } = country;
    return { latitude, longitude, radiusKm, source: 'country', ...named, area: null, overridden: false };
  }
  const organisation = holder === null ? undefined : organisations[holder];
  return {
    reason:
      organisation === undefined
        ? `${parsed.call} cannot be placed: its prefix is allocated to no country.`
        : `${parsed.call} cannot be placed: its prefix belongs to ${organisation}, whose stations may be anywhere.`,
  };
}

function areaOf(location: string, holder: string | null): CallArea | null {
  const key = holder ?? 'none';
  const fits = ({ pattern }: CallArea): boolean => pattern.test(location);
  return CALL_TERRITORIES[key]?.find(fits) ?? CALL_AREAS[key]?.find(fits) ?? null;
}

function ownPosition(
  parsed: CallSign,
  overrides: CompiledOverrides | undefined,
): Omit<CallPosition, 'countryCode' | 'country'> | null {
  if (overrides === undefined) return null;
  const cell =
    overrides.calls.get(parsed.call) ?? (parsed.away ? undefined : overrides.calls.get(parsed.base));
  if (cell !== undefined) {
    const { latitude, longitude, radiusKm } = cell;
    return { latitude, longitude, radiusKm, source: 'user-locator', area: null, overridden: true };
  }
  const entry = overrides.prefixes.find(({ prefix }) => parsed.location.startsWith(prefix));
  if (entry === undefined) return null;
  const { latitude, longitude, radiusKm, area } = entry;
  return { latitude, longitude, radiusKm, source: 'call-area', area, overridden: true };
}
