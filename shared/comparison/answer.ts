import { byBandAndHour, byNight, bySector, comparisonCells } from './cells.ts';
import type { Layout } from './cells.ts';
import { censoredView } from './censored.ts';
import {
  countExclusions,
  halfWeightStations,
  heardOnlyBySector,
  heardOnlyTest,
  listeningHours,
  receiverBalance,
  thinEvidence,
} from './fairness.ts';
import { fitComparison } from './fit.ts';
import type { ComparisonResult } from './fit.ts';
import type { ComparisonInput } from './input.ts';
import { peekProofLine } from './peek-proof.ts';
import { comparisonPlanning } from './planning.ts';
import { pooledPictures, poolCells } from './pooling.ts';
import { rankView } from './rank-view.ts';
import { selectHeardOnly } from './heard-only-selection.ts';
import { histogram, stationRows } from './stations.ts';

/** Rows of the station table that travel to the browser; the CSV has all. */
const mostStationRows = 1000;

/**
 * The answer to one comparison (2.3, 2.4 and 2.5 of the method): d = theta + receiver offsets + error,
 * clusters (call sign, night). Units in dB, above zero when A hears better. Never NaN: what cannot be
 * computed is null and the verdict says why. O(units).
 */
export function answerComparison(input: ComparisonInput): ComparisonResult {
  const { question, antennas, rules, marginDb, sectorCount } = input;
  const fitted = fitComparison(input);
  const { selected: units, offsets, clusters, counts, correctedDb, separable, test } = fitted;
  const heardOnly = selectHeardOnly(input);
  const stations = stationRows(input, units, correctedDb, heardOnly);
  const cellsOf = (layout: Layout) =>
    comparisonCells(units, fitted.rows, offsets, clusters, layout, question.clustering);
  const [sectors, bandHours, nights] = [cellsOf(bySector), cellsOf(byBandAndHour), cellsOf(byNight)];
  // Writes the pooled values into the cells.
  const pooling = {
    sectors: poolCells(sectors, pooledPictures.sectors),
    bandHours: poolCells(bandHours, pooledPictures.bandHours),
    nights: poolCells(nights, pooledPictures.nights),
  };
  const censored = separable
    ? censoredView(input, fitted, heardOnly)
    : { view: null, why: 'The antennas cannot be separated from the receivers.' };
  const peekProof =
    separable && units.n > 0
      ? peekProofLine(units, correctedDb, clusters, counts.clusters, {
          a: antennas.a.name,
          b: antennas.b.name,
        })
      : null;
  const planning =
    fitted.oneWaySeDb === null
      ? null
      : comparisonPlanning({
          ...{ seDb: fitted.oneWaySeDb, clusters: counts.clusters, nights: counts.nights, marginDb },
        });
  const halfWeight = halfWeightStations(stations.map((s) => s.units));

  return {
    ...{ question, antennas, rules, marginDb, sectorCount },
    ...{ verdict: fitted.verdict, estimate: fitted.estimate, counts },
    offsets: offsets.flatMap((o, k) => {
      const c = fitted.coefficients[k + 1];
      if (!c || c.estimate === null) return [];
      const { receiverId, againstReceiverId, bandMetres } = o;
      return [
        { receiverId, againstReceiverId, bandMetres, offsetDb: c.estimate, intervalDb: tuple(c.interval) },
      ];
    }),
    rank: separable ? rankView(correctedDb, clusters, counts.clusters, question.zeros) : null,
    equivalence: test && test.p !== null ? { p: test.p, equivalent: test.equivalent } : null,
    ...{ censored: censored.view, peekProof, planning },
    views: {
      censored: censored.why,
      peekProof: peekProof === null ? 'Too early: 8 station-nights from 3 nights are needed first.' : null,
      planning: planning === null ? 'There is no spread yet to plan with.' : null,
    },
    histogram: histogram(correctedDb),
    sectors: sectors.map(({ cell }) => cell),
    bandHours: { basis: question.hourBasis, cells: bandHours.map(({ cell }) => cell) },
    nights: nights.map(({ cell }) => cell),
    pooling,
    heardOnlySectors: heardOnlyBySector(heardOnly),
    fairness: {
      exclusions: countExclusions(input, fitted.leftOut),
      receiverBalance: receiverBalance(units),
      listening: listeningHours(input),
      separable,
      heardOnly: heardOnlyTest(heardOnly),
      halfWeightStations: halfWeight,
      warnings: thinEvidence(counts.clusters, counts.nights, halfWeight, counts.stations),
    },
    stations: stations.slice(0, mostStationRows),
    stationsTruncated: stations.length > mostStationRows,
  };
}

function tuple(interval: readonly [number, number] | null): [number, number] | null {
  return interval && [interval[0], interval[1]];
}
