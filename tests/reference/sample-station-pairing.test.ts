import { describe, expect, it } from 'vitest';
import { pairSpots, STANDING_RULES, type UnitColumns } from '../../shared/pairing/index.ts';
import { nightEndMs, nightIndexOf, nightStartMs } from '../../shared/radio/night.ts';
import expected from './sample-station/expected.json' with { type: 'json' };
import { loadSampleStation } from './sample-station/load.ts';

const LONGITUDE = expected.rules.station.longitude;
const BANDS = [40, 80, 160] as const;
/** All four nights: 2026-01-05 noon to 2026-01-12 noon. */
const WINDOW = { startMs: Date.UTC(2026, 0, 5, 12), endMs: Date.UTC(2026, 0, 12, 12) };

/** Each with its answers in R, worked from the same rules by another hand: see sample-station/README.md. */
const SETS = ['swap', 'alternate'] as const;

interface Unit {
  call: number;
  band: number;
  night: number;
  receiverA: number;
  receiverB: number;
  differenceDb: number;
}

function unitsOfPair(units: UnitColumns, a: number, b: number): Unit[] {
  const rows: Unit[] = [];
  for (let i = 0; i < units.call.length; i++) {
    if (units.antennaA[i] !== a || units.antennaB[i] !== b) continue;
    rows.push({
      call: units.call[i]!,
      band: units.band[i]!,
      night: nightIndexOf(units.blockMinute[i]! * 60_000, LONGITUDE),
      receiverA: units.receiverA[i]!,
      receiverB: units.receiverB[i]!,
      differenceDb: units.differenceDb[i]!,
    });
  }
  return rows;
}

function countsOf(units: Unit[]) {
  return {
    units: units.length,
    clusters: new Set(units.map((unit) => `${unit.call} ${unit.night}`)).size,
    stations: new Set(units.map((unit) => unit.call)).size,
    nights: new Set(units.map((unit) => unit.night)).size,
  };
}

function mean(values: number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}

/** Mean over clusters (call sign, night) of the clusters' own means. */
function meanOfClusters(units: Unit[]): number {
  const clusters = new Map<string, number[]>();
  for (const unit of units) {
    const key = `${unit.call} ${unit.night}`;
    clusters.set(key, [...(clusters.get(key) ?? []), unit.differenceDb]);
  }
  return mean([...clusters.values()].map(mean));
}

function paired(set: (typeof SETS)[number]) {
  const station = loadSampleStation(set);
  const result = pairSpots(station.spots, station.dwells, STANDING_RULES, WINDOW);
  const [a, b] = [station.antennaIds.get(expected[set].A)!, station.antennaIds.get(expected[set].B)!];
  return { station, result, a, b, units: unitsOfPair(result.units, a, b) };
}

describe.each(SETS)('the sample station, data set %s, against R', (set) => {
  const { station, result, units } = paired(set);

  it(`tags the spots of ${set} as R does`, () => {
    const guarded = result.tallies.reduce((sum, row) => sum + row.guarded, 0);
    const tagged = result.tallies.reduce((sum, row) => sum + row.tagged, 0);
    expect(tagged + guarded).toBe(expected[set].taggedSpots);
    expect(guarded).toBe(expected[set].guardedSpots);
    expect(result.tallies.reduce((sum, row) => sum + row.untagged, 0)).toBe(0);
    expect(result.doubles).toBe(0);
  });

  it(`counts units, clusters, stations and nights of ${set} as R does`, () => {
    const { units: n, clusters, stations, nights } = expected[set].all;
    expect(countsOf(units)).toEqual({ units: n, clusters, stations, nights });
  });

  it.each(BANDS)(`counts units of ${set} on %i m as R does`, (band) => {
    const { units: n, clusters, stations, nights } = expected[set].byBand[band];
    expect(countsOf(units.filter((unit) => unit.band === band))).toEqual({
      units: n,
      clusters,
      stations,
      nights,
    });
  });

  it(`gives the same units of ${set} night by night as in one run`, () => {
    const first = nightIndexOf(WINDOW.startMs, LONGITUDE);
    const last = nightIndexOf(WINDOW.endMs, LONGITUDE);
    const byNight: number[] = [];
    for (let night = first; night <= last; night++) {
      const window = { startMs: nightStartMs(night, LONGITUDE), endMs: nightEndMs(night, LONGITUDE) };
      byNight.push(pairSpots(station.spots, station.dwells, STANDING_RULES, window).units.call.length);
    }
    expect(byNight.reduce((sum, n) => sum + n, 0)).toBe(result.units.call.length);
  });
});

describe('the sample station, estimates against R', () => {
  it('counts the matches of swap as R does', () => {
    const { result, a, b } = paired('swap');
    let matches = 0;
    for (let i = 0; i < result.units.call.length; i++) {
      if (result.units.antennaA[i] === a && result.units.antennaB[i] === b)
        matches += result.units.countA[i]!;
    }
    expect(matches).toBe(expected.swap.matches);
  });

  it('averages the units of alternate to R’s intercept', () => {
    const { units } = paired('alternate');
    expect(mean(units.map((unit) => unit.differenceDb))).toBeCloseTo(expected.alternate.all.estimate, 8);
    expect(meanOfClusters(units)).toBeCloseTo(expected.alternate.all.meanClusters, 8);
  });

  it.each(BANDS)('averages the units of alternate on %i m to R’s intercept', (band) => {
    const units = paired('alternate').units.filter((unit) => unit.band === band);
    expect(mean(units.map((unit) => unit.differenceDb))).toBeCloseTo(
      expected.alternate.byBand[band].estimate,
      8,
    );
    expect(meanOfClusters(units)).toBeCloseTo(expected.alternate.byBand[band].meanClusters, 8);
  });

  it.each(BANDS)('finds antenna difference and receiver offset of swap on %i m as R does', (band) => {
    const { station, units } = paired('swap');
    const receiverC = station.receiverIds.get('EI7QSC')!;
    // With one receiver column of +1 and -1 the regression is the half sum and the half difference of
    // the two groups' means.
    const own = units.filter((unit) => unit.band === band);
    const cOnA = mean(own.filter((unit) => unit.receiverA === receiverC).map((unit) => unit.differenceDb));
    const cOnB = mean(own.filter((unit) => unit.receiverB === receiverC).map((unit) => unit.differenceDb));
    expect((cOnA + cOnB) / 2).toBeCloseTo(expected.swap.byBand[band].estimate, 8);
    expect((cOnA - cOnB) / 2).toBeCloseTo(expected.swap.byBand[band].offsets, 8);
  });

  it('finds the antenna difference of swap over all bands as R does', () => {
    const { station, units } = paired('swap');
    const receiverC = station.receiverIds.get('EI7QSC')!;
    // Least squares with one receiver column a band: the constant and the differences are each cleared
    // of that column within the band (Frisch and Waugh 1933), then theta is a ratio of sums.
    let numerator = 0;
    let denominator = 0;
    for (const band of BANDS) {
      const own = units.filter((unit) => unit.band === band);
      const z = own.map((unit) => (unit.receiverA === receiverC ? 1 : -1));
      const sumZ = z.reduce<number>((sum, value) => sum + value, 0);
      const sumD = own.reduce((sum, unit) => sum + unit.differenceDb, 0);
      const sumZd = own.reduce((sum, unit, i) => sum + z[i]! * unit.differenceDb, 0);
      numerator += sumD - (sumZ * sumZd) / own.length;
      denominator += own.length - (sumZ * sumZ) / own.length;
    }
    expect(numerator / denominator).toBeCloseTo(expected.swap.all.estimate, 8);
  });
});
