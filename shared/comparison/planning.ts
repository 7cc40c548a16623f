import type { ComparisonAnswer } from '../contracts/comparison.ts';
import { sampleSize } from '../stats/index.ts';
import { formatCount } from '../format.ts';
import { decibels } from './wording.ts';

type Planning = NonNullable<ComparisonAnswer['planning']>;

const wantedPower = 0.8;
/** Half-widths that people ask for, dB. */
const wantedHalfWidthsDb = [2, 1, 0.5, 0.25];

/**
 * What further nights would bring, from the comparison's own spread (2.4, item 10 of the method). The spread is
 * the one that the standard error shows, se times the root of the clusters: receiver offsets that have to be
 * estimated too are in it. `seDb` must be that of one-way clusters.
 */
export function comparisonPlanning(given: {
  seDb: number;
  clusters: number;
  nights: number;
  marginDb: number;
}): Planning {
  const { seDb, clusters, nights, marginDb } = given;
  const spreadDb = seDb * Math.sqrt(clusters);
  const clustersPerNight = clusters / nights;
  const moreNights = (needed: number) =>
    Math.max(0, Math.ceil((needed - clusters) / clustersPerNight - 1e-9));
  const now = sampleSize({ sd: spreadDb, n: clusters, power: wantedPower });
  const detectableDb = now.difference!;
  const powerClusters = sampleSize({ sd: spreadDb, difference: marginDb, power: wantedPower }).whole;
  const precision = wantedHalfWidthsDb.map((halfWidthDb) => {
    const needed = sampleSize({ sd: spreadDb, halfWidth: halfWidthDb }).whole;
    return { halfWidthDb, clusters: needed, moreNights: moreNights(needed) };
  });
  const plan = { clusters: powerClusters, moreNights: moreNights(powerClusters) };
  return {
    ...{ spreadDb, clustersPerNight, precision, power: plan },
    halfWidthNowDb: now.halfWidth,
    detectableDb,
    sentence: planningSentence(plan, detectableDb, marginDb),
  };
}

function planningSentence(plan: Planning['power'], detectableDb: number, marginDb: number): string {
  const found = `With the data so far a true difference of ${decibels(detectableDb)}\u2009dB would have been found in 80 of 100 cases.`;
  if (plan.moreNights === 0)
    return `${found} That is enough for the margin of ${decibels(marginDb)}\u2009dB.`;
  return (
    `${found} For one of the margin, ${decibels(marginDb)}\u2009dB, about ${formatCount(plan.moreNights)} more ` +
    `${plan.moreNights === 1 ? 'night' : 'nights'} like those so far are needed.`
  );
}
