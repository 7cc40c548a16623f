/**
 * Bearing and distance on the WGS-84 ellipsoid (GeographicLib: C. F. F. Karney, "Algorithms for
 * geodesics", Journal of Geodesy 87, 2013), and how far a bearing can be trusted.
 */
import geodesic from 'geographiclib-geodesic';
import type { Place } from './place.ts';

const wgs84 = geodesic.Geodesic.WGS84;
const wanted = geodesic.Geodesic.DISTANCE | geodesic.Geodesic.AZIMUTH | geodesic.Geodesic.REDUCEDLENGTH;
const metresPerKm = 1000;
const meanEarthRadiusKm = 6371.0088;
const degrees = 180 / Math.PI;

export interface Path {
  /** Initial azimuth at the first place, 0 <= azimuth < 360, clockwise from true north. */
  azimuthDeg: number;
  distanceKm: number;
}

/** An angle brought into 0 <= a < 360. */
export function normaliseAzimuth(azimuthDeg: number): number {
  const turned = azimuthDeg % 360;
  // Adding 360 to a tiny negative number rounds to 360 itself, which is north again.
  const positive = turned < 0 ? turned + 360 : turned;
  return positive === 360 ? 0 : positive + 0;
}

function checkPlace(name: string, place: Place): void {
  if (!(Math.abs(place.latitude) <= 90)) {
    throw new RangeError(`${name}.latitude must be between -90 and 90 degrees, was ${place.latitude}`);
  }
  if (!Number.isFinite(place.longitude)) {
    throw new RangeError(`${name}.longitude must be a finite number of degrees, was ${place.longitude}`);
  }
}

interface FullPath extends Path {
  arcDeg: number;
  /** Metres by which the far end moves sideways for each radian of azimuth at the near end. */
  reducedLength: number;
}

function inverse(from: Place, to: Place): FullPath {
  checkPlace('from', from);
  checkPlace('to', to);
  const line = wgs84.Inverse(from.latitude, from.longitude, to.latitude, to.longitude, wanted);
  return {
    azimuthDeg: normaliseAzimuth(line.azi1 ?? 0),
    distanceKm: (line.s12 ?? 0) / metresPerKm,
    arcDeg: line.a12,
    reducedLength: line.m12 ?? 0,
  };
}

/** Shortest path between two places. Throws a RangeError for a place outside the globe. */
export function pathTo(from: Place, to: Place): Path {
  const { azimuthDeg, distanceKm } = inverse(from, to);
  return { azimuthDeg, distanceKm };
}

/** The place reached by travelling a distance along an initial azimuth. */
export function placeAt(from: Place, azimuthDeg: number, distanceKm: number): Place {
  checkPlace('from', from);
  const end = wgs84.Direct(from.latitude, from.longitude, azimuthDeg, distanceKm * metresPerKm);
  return { latitude: end.lat2 ?? from.latitude, longitude: end.lon2 ?? from.longitude };
}

function spread({ arcDeg, reducedLength }: FullPath, radiusKm: number): number {
  if (!(radiusKm >= 0)) throw new RangeError(`radiusKm must be zero or more, was ${radiusKm}`);
  const radius = radiusKm / meanEarthRadiusKm;
  const arc = arcDeg / degrees;
  if (radius >= arc || radius >= Math.PI - arc) return 360;
  const sidewaysArc = reducedLength / metresPerKm / meanEarthRadiusKm;
  if (!(sidewaysArc > 0)) return 360;
  return 2 * Math.asin(Math.min(1, Math.sin(radius) / sidewaysArc)) * degrees;
}

/**
 * The whole angle, in degrees, that a circle of uncertainty around `to` fills as seen from `from`:
 * between its two tangents, 2 asin(sin(radius) / sin(arc)) on the sphere. In place of sin(arc) stands
 * the reduced length of the geodesic, which carries the earth's flattening (it matters toward the
 * antipode). 360 when the circle holds the station itself or its antipode, where any bearing is
 * possible.
 */
export function bearingSpreadDeg(from: Place, to: Place, radiusKm: number): number {
  return spread(inverse(from, to), radiusKm);
}

/** `pathTo` and `bearingSpreadDeg` for the price of one geodesic. */
export function pathWithSpread(
  from: Place,
  to: Place,
  radiusKm: number,
): Path & { bearingSpreadDeg: number } {
  const path = inverse(from, to);
  const { azimuthDeg, distanceKm } = path;
  return { azimuthDeg, distanceKm, bearingSpreadDeg: spread(path, radiusKm) };
}

function checkSectorCount(sectorCount: number): void {
  if (!Number.isInteger(sectorCount) || sectorCount < 1) {
    throw new RangeError(`sectorCount must be a whole number of at least 1, was ${sectorCount}`);
  }
}

/** The sector 0 .. sectorCount - 1 of an azimuth. Sector k covers [k w, (k + 1) w) with w = 360 / sectorCount. */
export function sectorOf(azimuthDeg: number, sectorCount: number): number {
  checkSectorCount(sectorCount);
  const sector = Math.floor((normaliseAzimuth(azimuthDeg) * sectorCount) / 360);
  // An azimuth a hair below 360 may round up in the product.
  return Math.min(sector, sectorCount - 1);
}

/**
 * Whether a bearing is too loose for questions of direction ("bearing unsure").
 *
 * Usable means: the sector would not change for most of the circle of uncertainty, which is held
 * to be so exactly when the whole bearing spread is no wider than one sector. A station in the
 * middle of its sector then stays inside it wherever in its circle it sits; one at the very edge
 * may fall into the neighbour by at most half of the spread, never further. Where the bearing lies
 * inside the sector is left out on purpose, so that moving a sector boundary by a degree does not
 * move whole countries in and out of the evidence.
 */
export function sectorUnsure(spreadDeg: number, sectorCount: number): boolean {
  checkSectorCount(sectorCount);
  return !(Math.abs(spreadDeg) <= 360 / sectorCount);
}
