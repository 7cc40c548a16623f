import { CELL_MIN_CLUSTERS, CELL_MIN_NIGHTS } from '../comparison/cells.ts';
import { halfWeightStations, thinEvidence } from '../comparison/fairness.ts';
import type { LadderAnswer, LadderAntenna, LadderComponent, LadderPair } from '../contracts/ladder.ts';
import { ladder } from '../stats/index.ts';
import type { LadderEstimate, LadderPair as FittedPair, LadderResult as Fit } from '../stats/index.ts';
import { measureBreadth } from './breadth.ts';
import type { MeasuredBreadth } from './breadth.ts';
import type { LadderInput } from './input.ts';
import { findObstacles } from './obstacles.ts';
import { selectLadderUnits } from './selection.ts';
import type { LadderUnits } from './selection.ts';
import { ladderSentence, ladderWarnings, whereText } from './wording.ts';

/** What only the caller knows: which units are ready. Filled in by the server. */
export type LadderResult = Omit<LadderAnswer, 'preparation'>;

/** A test of consistency below this, over all pairs, is a disagreement. */
const disagreement = 0.05;

/**
 * The ladder of one band (2.6 of the method): d = theta_A - theta_B + rho_rA - rho_rB + error, clusters
 * (call sign, night). Values in dB, higher hears better. Never NaN: what cannot be computed is null, and an
 * obstacle or a warning says why. O(units).
 */
export function answerLadder(input: LadderInput): LadderResult {
  const { question, rules, marginDb, sectorCount } = input;
  const { bandMetres, bands, units, leftOut } = selectLadderUnits(input);
  const breadth = measureBreadth(units);
  const fit = breadth.units === 0 ? null : fitUnits(units, breadth.clusters, question.referenceAntennaId);
  const components = fit ? fit.groups.map((ids, group) => componentOf(input, fit, breadth, ids, group)) : [];
  const counts = countsOf(units, fit, breadth);
  const where = whereText(bandMetres, question.sectors, sectorCount);
  const halfWeight = halfWeightStations(breadth.unitsOfStation);
  return {
    ...{ question, bandMetres, bands, rules, marginDb, sectorCount },
    sentence: ladderSentence({ bandMetres, components, counts, marginDb, where }),
    components,
    receivers: fit ? receiverGroups(input, fit) : [],
    obstacles: findObstacles(input, fit, where),
    ...{ counts, leftOut },
    warnings: [
      ...thinEvidence(counts.clusters, counts.nights, halfWeight, counts.stations),
      ...ladderWarnings(components),
    ],
  };
}

function fitUnits(units: LadderUnits, clusters: Int32Array, reference: number | null): Fit {
  const { antennaA, antennaB, receiverA, receiverB, differenceDb: difference } = units;
  const rows = { antennaA, antennaB, receiverA, receiverB, difference, clusters };
  return ladder(rows, { reference: reference ?? undefined });
}

function componentOf(
  input: LadderInput,
  fit: Fit,
  breadth: MeasuredBreadth,
  ids: number[],
  group: number,
): LadderComponent {
  const reference = input.question.referenceAntennaId;
  const referenceAntennaId =
    reference !== null && ids.length > 1 && ids.includes(reference) ? reference : null;
  const antennas = ids.map((id): LadderAntenna => {
    const rung = fit.antennas.find((each) => each.id === id)!;
    const { name, marker, headingDeg, inService } = input.antennas.find((each) => each.id === id) ?? {
      name: `Antenna ${id}`,
      marker: '',
      headingDeg: null,
      inService: false,
    };
    const { nights, stations } = breadth.ofAntenna(id);
    const known = rung.interval !== null || rung.reason === 'reference';
    return {
      ...{ id, name, marker, headingDeg, inService },
      valueDb: rung.value,
      intervalDb: rung.interval,
      rank: rung.rank,
      chanceBest: rung.chanceBest,
      ...{ units: rung.rows, clusters: rung.clusters, nights, stations },
      speaks: known && rung.clusters >= CELL_MIN_CLUSTERS && nights >= CELL_MIN_NIGHTS,
    };
  });
  const pairs = fit.pairs
    .filter((pair) => pair.group === group)
    .map((pair) => pairOf(pair, ids.indexOf(pair.a) > ids.indexOf(pair.b) ? -1 : 1, breadth))
    .sort((x, y) => y.differenceDb - x.differenceDb);
  return { referenceAntennaId, antennas, pairs };
}

/** An estimate for the pair taken the other way round when the sign is -1. */
function turned({ estimate, interval }: Pick<LadderEstimate, 'estimate' | 'interval'>, sign: 1 | -1) {
  const intervalDb: [number, number] | null =
    interval && (sign > 0 ? [interval[0], interval[1]] : [-interval[1], -interval[0]]);
  return { estimateDb: sign > 0 ? estimate : 0 - estimate, intervalDb };
}

function pairOf(pair: FittedPair, sign: 1 | -1, breadth: MeasuredBreadth): LadderPair {
  const { estimateDb, intervalDb } = turned(pair, sign);
  const part = (own: LadderEstimate | null) => own && turned(own, sign);
  const consistencyP = pair.consistencyPAdjusted;
  return {
    ...(sign > 0 ? { a: pair.a, b: pair.b } : { a: pair.b, b: pair.a }),
    ...{ differenceDb: estimateDb, intervalDb, p: pair.p, pAdjusted: pair.pAdjusted },
    ...{ units: pair.rows, clusters: pair.clusters, ...breadth.ofPair(pair.a, pair.b) },
    ...{ weightShare: pair.weightShare, directShare: pair.directShare },
    direct: part(pair.direct),
    indirect: part(pair.indirect),
    inconsistency: part(pair.inconsistency),
    consistencyP: pair.inconsistency?.p ?? null,
    consistent: consistencyP === null ? null : consistencyP >= disagreement,
  };
}

function receiverGroups({ receivers }: LadderInput, fit: Fit): LadderResult['receivers'] {
  return fit.receiverGroups.map((ids) => ({
    receivers: ids.map((id) => {
      const rung = fit.receivers.find((each) => each.id === id)!;
      const facts = receivers.find((each) => each.id === id);
      return {
        receiverId: id,
        callSign: facts?.callSign ?? `receiver ${id}`,
        label: facts?.label ?? '',
        offsetDb: rung.value,
        intervalDb: rung.interval,
        units: rung.rows,
        clusters: rung.clusters,
      };
    }),
  }));
}

function countsOf(units: LadderUnits, fit: Fit | null, breadth: MeasuredBreadth): LadderResult['counts'] {
  const alternating = units.alternating.reduce((sum, flag) => sum + flag, 0);
  return {
    units: breadth.units,
    clusters: breadth.clusterCount,
    ...breadth.all,
    simultaneous: breadth.units - alternating,
    alternating,
    df: fit?.df ?? 0,
    draws: fit?.draws ?? 0,
  };
}
