import { z } from 'zod';
import { day, endpoint, id, stationParams } from './common.ts';
import { comparisonPending, hourRange, pairingRules, unitKind } from './comparison.ts';

/** "How do all antennas rank on ... toward ... from ... between ...?" Empty lists mean all. */
export const ladderQuestion = z
  .object({
    /** One band a ladder: receivers differ by band. null: the band with the most units in these nights. */
    bandMetres: z.number().int().nullable().default(null),
    /** Nights, both included. null: all there are. */
    fromNight: day.nullable().default(null),
    toNight: day.nullable().default(null),
    /** Sector numbers, 0 = the one that starts at north. */
    sectors: z.array(z.number().int().min(0).max(35)).max(36).default([]),
    /** Part of the night. */
    hours: hourRange.nullable().default(null),
    kinds: z.array(unitKind).max(2).default([]),
    receivers: z.array(id).max(50).default([]),
    /** null: the station's standing rules. */
    rules: pairingRules.nullable().default(null),
    /** Values are given against this antenna where it can be linked; null: against the rung's mean. */
    referenceAntennaId: id.nullable().default(null),
    /** Differences below this do not matter; null: the station's margin. */
    marginDb: z.number().min(0.1).max(20).nullable().default(null),
  })
  .refine((q) => q.fromNight === null || q.toNight === null || q.fromNight <= q.toNight, {
    path: ['toNight'],
    message: 'The last night must not come before the first.',
  });
export type LadderQuestion = z.output<typeof ladderQuestion>;
export type LadderQuestionInput = z.input<typeof ladderQuestion>;

const interval = z.tuple([z.number(), z.number()]);

/** One antenna of a component. All intervals are 95 %, from standard errors clustered by (call sign, night). */
export const ladderAntenna = z.object({
  id,
  name: z.string(),
  marker: z.string(),
  headingDeg: z.number().nullable(),
  /** In service on the day of the question. Antennas taken down stay on the ladder and are marked. */
  inService: z.boolean(),
  /**
   * dB against the component's mean, or against its reference (then 0 for the reference itself); higher
   * hears better. null when the component has this antenna only: there is nothing to measure against.
   */
  valueDb: z.number().nullable(),
  /** null where the data bear none (one station-night carries the link), and for the reference itself. */
  intervalDb: interval.nullable(),
  /** 1 is the highest value of the component; equal values share the better rank. null without a value. */
  rank: z.number().int().nullable(),
  /**
   * Share of seeded draws from the fitted normal in which this antenna has the component's highest value.
   * null where one station-night carries its link; it then does not count in the mean either.
   */
  chanceBest: z.number().nullable(),
  /** Units, station-nights, nights and stations in which this antenna takes part. */
  units: z.number().int(),
  clusters: z.number().int(),
  nights: z.number().int(),
  stations: z.number().int(),
  /** At least 8 clusters from at least 3 nights, and an interval (or it is the reference); else draw it as thin evidence. */
  speaks: z.boolean(),
});
export type LadderAntenna = z.infer<typeof ladderAntenna>;

/** A difference from a part of the evidence. */
const evidence = z.object({ estimateDb: z.number(), intervalDb: interval.nullable() });

/** Two antennas of one component. All differences are a minus b: above zero, a hears better. */
export const ladderPair = z.object({
  /** Antenna ids; a stands above b on the ladder. */
  a: id,
  b: id,
  differenceDb: z.number(),
  /** null with p and pAdjusted where the data bear no standard error. */
  intervalDb: interval.nullable(),
  /** Two-sided p of "no difference". */
  p: z.number().nullable(),
  /** Benjamini-Hochberg adjusted across all pairs of the answer. */
  pAdjusted: z.number().nullable(),
  /** Units, clusters, nights and stations that were heard on exactly these two antennas. 0: no direct evidence. */
  units: z.number().int(),
  clusters: z.number().int(),
  nights: z.number().int(),
  stations: z.number().int(),
  /**
   * How much of the whole ladder hangs on this pair's direct units: their share of all leverage, 0 to 1;
   * over all pairs the shares add up to 1 at most (the rest tells receivers apart). A lone bridge has a large
   * share however few its units are.
   */
  weightShare: z.number(),
  /** Share of this difference that comes from its direct units; the rest comes round other antennas. null: no direct units. */
  directShare: z.number().nullable(),
  /** From units of this pair only (receiver offsets shared with the rest). null: no direct units, or tangled without the rest. */
  direct: evidence.nullable(),
  /** From all other units. null: nothing but the direct units links the two. */
  indirect: evidence.nullable(),
  /** Direct minus indirect; null unless both exist. */
  inconsistency: evidence.nullable(),
  /** Two-sided p of "direct and indirect agree" (node splitting); null unless both exist. */
  consistencyP: z.number().nullable(),
  /** consistencyP adjusted over the pairs that have one (Benjamini-Hochberg) is at least 0.05. null: cannot be tested. */
  consistent: z.boolean().nullable(),
});
export type LadderPair = z.infer<typeof ladderPair>;

/** Antennas whose differences the data can tell: one scale. Largest component first. */
export const ladderComponent = z.object({
  /** The antenna that values are given against; null: the plain mean of the antennas that have a chanceBest, else of all. */
  referenceAntennaId: id.nullable(),
  /** Highest value first. */
  antennas: z.array(ladderAntenna),
  /** Every pair of `antennas`, largest difference first. */
  pairs: z.array(ladderPair),
});
export type LadderComponent = z.infer<typeof ladderComponent>;

/** Receivers whose offsets can be told from each other: a small ladder of its own. */
export const ladderReceiverGroup = z.object({
  receivers: z.array(
    z.object({
      receiverId: id,
      callSign: z.string(),
      label: z.string(),
      /** What it reports on this band above (below: negative) the mean of its group, dB. null when alone in it. */
      offsetDb: z.number().nullable(),
      intervalDb: interval.nullable(),
      /** Simultaneous units in which it took part; alternating units say nothing of a receiver. */
      units: z.number().int(),
      clusters: z.number().int(),
    }),
  ),
});

/** Why two components are no single ladder, or an antenna is on none, and what would change that. */
export const ladderObstacle = z.object({
  kind: z.enum([
    /** No units join the antennas to the others. */
    'unlinked',
    /** Units exist, but the antennas were only ever on receivers that nothing else links. */
    'inseparable',
    /** Antennas in service that have no units on this band in this choice at all; those taken down are not listed. */
    'no units',
  ]),
  /** The antennas that stand apart. */
  antennaIds: z.array(id),
  /** The receivers they are tangled with; empty unless inseparable. */
  receiverIds: z.array(id),
  sentence: z.string(),
  /** In plain words, cheapest first; each was worked out to remove this obstacle. Empty where an antenna is out of service. */
  cures: z.array(z.string()),
});
export type LadderObstacle = z.infer<typeof ladderObstacle>;

export const ladderAnswer = z.object({
  question: ladderQuestion,
  /** The band answered for; null only when the station has no units in these nights on any band. */
  bandMetres: z.number().int().nullable(),
  /** Bands with units in these nights, before any other choice; longest wave first. */
  bands: z.array(z.object({ bandMetres: z.number().int(), units: z.number().int() })),
  rules: pairingRules,
  marginDb: z.number(),
  sectorCount: z.number().int(),
  /** The answer in one or two sentences, also when there is none. */
  sentence: z.string(),
  /** Also components of a single antenna that has units. Empty when there are no units. */
  components: z.array(ladderComponent),
  receivers: z.array(ladderReceiverGroup),
  obstacles: z.array(ladderObstacle),
  counts: z.object({
    units: z.number().int(),
    clusters: z.number().int(),
    stations: z.number().int(),
    nights: z.number().int(),
    simultaneous: z.number().int(),
    alternating: z.number().int(),
    /** Degrees of freedom of all intervals: clusters less one. */
    df: z.number().int(),
    /** Draws behind chanceBest. */
    draws: z.number().int(),
  }),
  /** Units of this band and these nights that the choice leaves out, by the first reason that applies. */
  leftOut: z.object({
    outsideHoursUnits: z.number().int(),
    otherReceiverUnits: z.number().int(),
    otherKindUnits: z.number().int(),
    /** Left out only where sectors are chosen; counted in any case. */
    bearingUnsureUnits: z.number().int(),
    otherSectorUnits: z.number().int(),
  }),
  /** Thin evidence and disagreement, in sentences. */
  warnings: z.array(z.string()),
  preparation: z.object({
    rulesKey: z.string(),
    standing: z.boolean(),
    /** Nights in the range whose units wait to be made anew: ask again when they are. */
    nightsWaiting: z.number().int(),
    firstNight: day.nullable(),
    lastNight: day.nullable(),
  }),
});
export type LadderAnswer = z.infer<typeof ladderAnswer>;

export const rankAntennas = endpoint({
  method: 'POST',
  path: '/stations/:stationId/ladder',
  summary:
    'All antennas of a band on one dB scale (or 202 and a job, when units under other rules must be made first)',
  params: stationParams,
  body: ladderQuestion,
  reply: z.union([ladderAnswer, comparisonPending]),
});
