/**
 * The great-circle map: azimuthal equidistant about the station, so that a direction on the map is the bearing and a
 * length from the middle is the distance. North is up; y runs downwards, as on screens.
 */
import { geoAzimuthalEquidistant, geoPath } from 'd3-geo';
import type { GeoProjection } from 'd3-geo';
import type { GeoPermissibleObjects } from 'd3-geo';
import { feature } from 'topojson-client';
import type { Topology } from 'topojson-specification';
import land from 'world-atlas/land-110m.json';

export interface MapCentre {
  latitudeDeg: number;
  longitudeDeg: number;
}

/** Half way round a sphere of the earth's mean radius: the rim of the map. */
export const rimKm = Math.PI * 6371.0088;

/** Where something at a bearing and distance sits, on a map whose rim has that radius. */
export function mapPoint(azimuthDeg: number, distanceKm: number, radius: number): [x: number, y: number] {
  const angle = (azimuthDeg * Math.PI) / 180;
  const length = Math.min(1, distanceKm / rimKm) * radius;
  return [length * Math.sin(angle), -length * Math.cos(angle)];
}

/** For coast lines. Its earth is a sphere: a bearing on it is within half a degree of the ellipsoid’s, but near the antipode. */
export function stationProjection(centre: MapCentre, radius: number): GeoProjection {
  return (
    geoAzimuthalEquidistant()
      .rotate([-centre.longitudeDeg, -centre.latitudeDeg])
      .translate([0, 0])
      .scale(radius / Math.PI)
      // The antipode is the whole rim: a hair short of it, or polygons around it turn inside out.
      .clipAngle(180 - 1e-3)
      .precision(0.3)
  );
}

/** The land of the earth as an SVG path about the origin. */
export function landPath(centre: MapCentre, radius: number): string {
  const topology = land as unknown as Topology;
  const shape = feature(topology, topology.objects.land!) as GeoPermissibleObjects;
  return geoPath(stationProjection(centre, radius)).digits(1)(shape) ?? '';
}
