/**
 * The sun over a path. Positions come from suncalc 2 (J. Meeus, "Astronomical Algorithms", chapters
 * 12 and 25); everything here is turned into *geometric* altitude of the sun's centre, without
 * refraction, because sunrise and sunset are by custom the instants when that altitude is -0.833
 * degrees (34' of refraction and 16' of half diameter).
 */
import { getPosition, getTimes } from 'suncalc';
import { nightIndexOf, nightStartMs } from './night.ts';
import type { Place } from './place.ts';

/** Altitude of the sun's centre at sunrise and sunset, degrees. */
export const HORIZON_DEG = -0.833;
/** Greyline: the sun's altitude at either end of the path lies in this closed range, degrees. */
export const GREYLINE_DEG: readonly [lowest: number, highest: number] = [-6, 3];

export type PathState = 'both dark' | 'one dark' | 'both light';

export interface PathSun {
  state: PathState;
  greyline: boolean;
}

const radians = Math.PI / 180;
const hourMs = 3_600_000;
/** suncalc adds this constant refraction (Meeus 16.4 at the horizon) to every altitude at or below zero. */
const refractionBelowHorizonDeg = 0.0002967 / Math.tan(0.00312536 / 0.08901179) / radians;

/** Where the sun stands overhead: latitude is its declination. */
function overheadAt(timeMs: number): Place {
  const date = new Date(timeMs);
  // Seen from a pole the sun's altitude is plus or minus its declination and its azimuth the hour
  // angle. The pole in the dark is asked, since there suncalc's refraction is a known constant.
  const north = getPosition(date, 90, 0);
  const latitude =
    north.altitude <= refractionBelowHorizonDeg
      ? north.altitude - refractionBelowHorizonDeg
      : refractionBelowHorizonDeg - getPosition(date, -90, 0).altitude;
  return { latitude, longitude: 180 - north.azimuth };
}

interface Hour {
  sinDeclination: number;
  cosDeclination: number;
  sinStep: number;
  cosStep: number;
  longitude: number;
  longitudeStep: number;
}

/**
 * Sun altitudes for hundreds of thousands of instants: the sun's own place is computed once for each
 * hour and interpolated inside it (error under 0.0001 degrees), so that a call costs one sine and
 * cosine or two. Keep one sun for a batch or a process; it remembers at most some 18 months of hours.
 */
export class Sun {
  private readonly hours = new Map<number, Hour>();

  /**
   * Geometric altitude in degrees of the sun's centre at an instant (ms since 1970) and a place.
   * Throws a RangeError for an instant or a place that is not finite: NaN would read as daylight.
   */
  altitudeDeg(timeMs: number, place: Place): number {
    const hourIndex = Math.floor(timeMs / hourMs);
    const hour = this.hourOf(hourIndex);
    const fraction = timeMs / hourMs - hourIndex;
    const latitude = place.latitude * radians;
    const sinDeclination = hour.sinDeclination + fraction * hour.sinStep;
    const cosDeclination = hour.cosDeclination + fraction * hour.cosStep;
    const hourAngle = (place.longitude - hour.longitude - fraction * hour.longitudeStep) * radians;
    const sine =
      Math.sin(latitude) * sinDeclination + Math.cos(latitude) * cosDeclination * Math.cos(hourAngle);
    if (Number.isNaN(sine)) {
      throw new RangeError(
        `place must have finite coordinates, was latitude ${place.latitude}, longitude ${place.longitude}`,
      );
    }
    return Math.asin(Math.max(-1, Math.min(1, sine))) / radians;
  }

  /** Altitudes at one place for a column of instants. */
  altitudesDeg(timesMs: ArrayLike<number>, place: Place): Float64Array {
    return Float64Array.from(timesMs, (timeMs) => this.altitudeDeg(timeMs, place));
  }

  /** Darkness and greyline of a path at an instant. */
  path(timeMs: number, from: Place, to: Place): PathSun {
    return pathSun(this.altitudeDeg(timeMs, from), this.altitudeDeg(timeMs, to));
  }

  private hourOf(hourIndex: number): Hour {
    let hour = this.hours.get(hourIndex);
    if (hour === undefined) {
      if (!Number.isFinite(hourIndex)) throw new RangeError('timeMs must be a finite number of milliseconds');
      // A wall screen runs for years: forget everything rather than grow for ever.
      if (this.hours.size >= 13_000) this.hours.clear();
      hour = makeHour(hourIndex);
      this.hours.set(hourIndex, hour);
    }
    return hour;
  }
}

function makeHour(hourIndex: number): Hour {
  const start = overheadAt(hourIndex * hourMs);
  const end = overheadAt((hourIndex + 1) * hourMs);
  const sinDeclination = Math.sin(start.latitude * radians);
  const cosDeclination = Math.cos(start.latitude * radians);
  // The sun moves about 15 degrees west in an hour; the step may cross the date line.
  const turned = end.longitude - start.longitude;
  return {
    sinDeclination,
    cosDeclination,
    sinStep: Math.sin(end.latitude * radians) - sinDeclination,
    cosStep: Math.cos(end.latitude * radians) - cosDeclination,
    longitude: start.longitude,
    longitudeStep: turned - 360 * Math.round(turned / 360),
  };
}

/** Geometric altitude in degrees of the sun's centre, for a single question; `Sun` is the fast form. */
export function sunAltitudeDeg(timeMs: number, place: Place): number {
  return new Sun().altitudeDeg(timeMs, place);
}

/** Dark is when the sun has set: its altitude is below -0.833 degrees, so that "dark" begins at sunset. */
export function isDark(altitudeDeg: number): boolean {
  return altitudeDeg < HORIZON_DEG;
}

/** Path state and greyline from the sun's altitudes at both ends. */
export function pathSun(fromAltitudeDeg: number, toAltitudeDeg: number): PathSun {
  const fromDark = isDark(fromAltitudeDeg);
  const toDark = isDark(toAltitudeDeg);
  return {
    state: fromDark && toDark ? 'both dark' : fromDark || toDark ? 'one dark' : 'both light',
    greyline: isGreyline(fromAltitudeDeg) || isGreyline(toAltitudeDeg),
  };
}

function isGreyline(altitudeDeg: number): boolean {
  return altitudeDeg >= GREYLINE_DEG[0] && altitudeDeg <= GREYLINE_DEG[1];
}

export interface NightSun {
  /** Sunset of the night's evening, ms since 1970; null when the sun does not set that evening. */
  sunsetMs: number | null;
  /** Sunrise of the night's morning, ms since 1970; null when the sun does not rise that morning. */
  sunriseMs: number | null;
  /** Why both are null: the sun stays up, or stays down. Null in an ordinary night. */
  polar: 'midnight sun' | 'polar night' | null;
}

/**
 * Sunset and sunrise (-0.833 degrees) of one night (see night.ts) at a place. At the two ends of a
 * polar summer or winter one of them may be null alone.
 */
export function nightSun(nightIndex: number, place: Place): NightSun {
  const evening = getTimes(
    new Date(nightStartMs(nightIndex, place.longitude)),
    place.latitude,
    place.longitude,
  );
  const morning = getTimes(
    new Date(nightStartMs(nightIndex + 1, place.longitude)),
    place.latitude,
    place.longitude,
  );
  const sunsetMs = evening.sunset?.getTime() ?? null;
  const sunriseMs = morning.sunrise?.getTime() ?? null;
  const polar =
    sunsetMs !== null || sunriseMs !== null
      ? null
      : evening.alwaysUp === true
        ? 'midnight sun'
        : 'polar night';
  return { sunsetMs, sunriseMs, polar };
}

/** The nights of one station, each worked out once: hours from sunset and sunrise for whole seasons. */
export class StationNights {
  private readonly nights = new Map<number, NightSun>();

  constructor(private readonly place: Place) {}

  night(nightIndex: number): NightSun {
    let night = this.nights.get(nightIndex);
    if (night === undefined) {
      if (this.nights.size >= 20_000) this.nights.clear();
      night = nightSun(nightIndex, this.place);
      this.nights.set(nightIndex, night);
    }
    return night;
  }

  /** Hours since the sunset of the night that holds the instant (negative before it); null without a sunset. */
  hoursFromSunset(timeMs: number): number | null {
    const { sunsetMs } = this.night(nightIndexOf(timeMs, this.place.longitude));
    return sunsetMs === null ? null : (timeMs - sunsetMs) / hourMs;
  }

  /** Hours since the sunrise of the night that holds the instant (negative before it); null without a sunrise. */
  hoursFromSunrise(timeMs: number): number | null {
    const { sunriseMs } = this.night(nightIndexOf(timeMs, this.place.longitude));
    return sunriseMs === null ? null : (timeMs - sunriseMs) / hourMs;
  }
}
