import { describe, expect, it } from 'vitest';
import { positionOfCall } from '../../shared/radio/call-position.ts';
import { parseCallSign } from '../../shared/radio/call-sign.ts';
import { pathTo } from '../../shared/radio/geodesic.ts';
import { isRefusal } from '../../shared/radio/place.ts';
import { stationAreas } from './station-areas.ts';
import { createStationPopulation, populationSize } from './station-population.ts';

const home = { latitude: 53.5, longitude: -9 };
const bands = [160, 80, 40, 30] as const;
const stations = createStationPopulation(4077, home, bands);

function positionOf(call: string) {
  const parsed = parseCallSign(call);
  if (isRefusal(parsed)) throw new Error(parsed.reason);
  const position = positionOfCall(parsed);
  if (isRefusal(position)) throw new Error(position.reason);
  return position;
}

describe('the simulated stations', () => {
  it('carry a suffix that no licence can have, QRA to QUZ, each call once', () => {
    expect(stations).toHaveLength(populationSize);
    for (const { call } of stations) expect(call).toMatch(/^[A-Z0-9]{1,2}\d?\dQ[R-U][A-Z]$/);
    expect(new Set(stations.map(({ call }) => call)).size).toBe(populationSize);
  });

  it('live in the country that the ITU gave their prefix to', () => {
    for (const { call, area } of stations)
      expect([call, positionOf(call).countryCode]).toEqual([call, area.country]);
  });

  it('could be placed whatever prefix and digit an area draws', () => {
    for (const area of stationAreas) {
      for (const prefix of area.prefixes) {
        for (const digit of area.digits) {
          expect(positionOf(`${prefix}${digit}QSH`).countryCode).toBe(area.country);
        }
      }
    }
  });

  it('of a call area live there', () => {
    // Cities by call area, from any atlas; the areas' digits are each administration's own (common knowledge).
    const cities: [area: string, latitude: number, longitude: number, withinKm: number][] = [
      ['United States 1', 42.4, -71.1, 500], // Boston
      ['United States 4', 33.7, -84.4, 1300], // Atlanta
      ['United States 6', 36.7, -119.8, 900], // Fresno
      ['United States 0', 41.3, -96, 1300], // Omaha
      ['Canada 7', 49.3, -123.1, 1200], // Vancouver
      ['Canary Islands', 28.5, -16.3, 450], // Santa Cruz
      ['Russia 0', 62, 129.7, 2500], // Yakutsk
      ['Japan 8', 43.1, 141.3, 400], // Sapporo
      ['Brazil 7', -8.1, -34.9, 900], // Recife
      ['Australia 6', -32, 115.9, 1500], // Perth
      ['China 7', 23.1, 113.3, 1200], // Guangzhou
    ];
    for (const [name, latitude, longitude, withinKm] of cities) {
      const inside = stations.filter((station) => station.area.name === name);
      expect([name, inside.length > 0]).toEqual([name, true]);
      for (const { call, place } of inside) {
        const { distanceKm } = pathTo(place, { latitude, longitude });
        expect([call, distanceKm < withinKm]).toEqual([call, true]);
      }
    }
  });

  it('come from all sides', () => {
    const sectors = new Set(stations.map(({ azimuthDeg }) => Math.floor(azimuthDeg / 30)));
    expect(sectors.size).toBe(12);
  });

  it('are the same for a seed and different for another', () => {
    const calls = (seed: number) => createStationPopulation(seed, home, bands).map(({ call }) => call);
    expect(calls(4077)).toEqual(stations.map(({ call }) => call));
    expect(calls(4078)).not.toEqual(stations.map(({ call }) => call));
  });
});
