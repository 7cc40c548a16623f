import { z } from 'zod';
import { day, endpoint, id, instant, longId, stationParams } from './common.ts';
import { blockMinutes } from './station.ts';

/** An hour of the night: by the UTC clock, or hours after (before: negative) the station's sunset or sunrise. */
export const hourMark = z.object({
  reference: z.enum(['utc', 'sunset', 'sunrise']),
  hours: z.number().min(-12).max(24),
});
export type HourMark = z.infer<typeof hourMark>;
/** Half-open; a UTC range may run over midnight (22 to 4). */
export const hourRange = z.object({ from: hourMark, to: hourMark });
export type HourRange = z.infer<typeof hourRange>;

export const pairingRules = z.object({
  blockMinutes,
  windowSeconds: z.number().int().min(1).max(300),
  freqToleranceKhz: z.number().min(0).max(5),
  guardSeconds: z.number().int().min(0).max(600),
});
export type PairingRulesInput = z.infer<typeof pairingRules>;

export const unitKind = z.enum(['simultaneous', 'alternating']);

/** "Does A hear better than B on ... toward ... from ... between ...?" Empty lists mean all. */
export const comparisonQuestion = z
  .object({
    antennaA: id,
    antennaB: id,
    /** Nights, both included. null: all there are. */
    fromNight: day.nullable().default(null),
    toNight: day.nullable().default(null),
    bandsMetres: z.array(z.number().int()).max(20).default([]),
    hours: hourRange.nullable().default(null),
    /** Sector numbers, 0 = the one that starts at north. */
    sectors: z.array(z.number().int().min(0).max(35)).max(36).default([]),
    receivers: z.array(id).max(50).default([]),
    kinds: z.array(unitKind).max(2).default([]),
    /** null: the station's standing rules. */
    rules: pairingRules.nullable().default(null),
    marginDb: z.number().min(0.1).max(20).nullable().default(null),
    /** Differences of exactly zero in the rank view: dropped before ranking (Wilcoxon), or kept (Pratt). */
    zeros: z.enum(['drop', 'pratt']).default('drop'),
    /** What is taken as independent: (call sign, night), or both call signs and nights (two-way). */
    clustering: z.enum(['one-way', 'two-way']).default('one-way'),
    /** How the band-by-hour map counts its hours. */
    hourBasis: z.enum(['utc', 'sunset', 'sunrise']).default('utc'),
  })
  .refine((q) => q.antennaA !== q.antennaB, { path: ['antennaB'], message: 'Choose two different antennas.' })
  .refine((q) => q.fromNight === null || q.toNight === null || q.fromNight <= q.toNight, {
    path: ['toNight'],
    message: 'The last night must not come before the first.',
  });
export type ComparisonQuestion = z.output<typeof comparisonQuestion>;
export type ComparisonQuestionInput = z.input<typeof comparisonQuestion>;

export const verdictCode = z.enum([
  'a clearly better',
  'a better',
  'b clearly better',
  'b better',
  'no practical difference',
  'not settled',
  'not enough yet',
  'cannot be separated',
]);
export type VerdictCode = z.infer<typeof verdictCode>;

const interval = z.tuple([z.number(), z.number()]);

/** One cell of a picture: a night, a sector, or a band in an hour. Positive: A hears better. */
export const comparisonCell = z.object({
  /** Band in metres, sector number, hour number or night number, whichever the picture has. */
  bandMetres: z.number().int().nullable(),
  sector: z.number().int().nullable(),
  hour: z.number().int().nullable(),
  night: day.nullable(),
  units: z.number().int(),
  clusters: z.number().int(),
  nights: z.number().int(),
  estimateDb: z.number().nullable(),
  intervalDb: interval.nullable(),
  p: z.number().nullable(),
  /** Benjamini-Hochberg adjusted across the cells of the same picture. */
  pAdjusted: z.number().nullable(),
  /** At least 8 clusters from at least 3 nights; a single night speaks with 8 clusters. */
  speaks: z.boolean(),
  /** Drawn toward the mean of the picture's cells, the more the less the cell knows. null: no pooling here. */
  pooledDb: z.number().nullable(),
  pooledIntervalDb: interval.nullable(),
});
export type ComparisonCell = z.infer<typeof comparisonCell>;

/** How much the cells of one picture differ beyond chance (random effects over the cells that speak). */
export const comparisonPooling = z.object({
  cells: z.number().int(),
  /** Mean over cells and its interval. */
  meanDb: z.number(),
  intervalDb: interval,
  /** Spread of the true cell values, dB (Paule-Mandel). */
  tauDb: z.number(),
  /** Cochran's Q, its degrees of freedom and p. */
  q: z.number(),
  df: z.number().int(),
  p: z.number(),
  /** Share of the spread that is not chance, 0 to 1. */
  iSquared: z.number(),
  /** All of it in words. */
  sentence: z.string(),
});
export type ComparisonPooling = z.infer<typeof comparisonPooling>;

/** The differences with the stations that only one antenna heard, as censored values. */
export const censoredView = z.object({
  estimateDb: z.number(),
  seDb: z.number(),
  intervalDb: interval,
  /** Standard deviation of a single difference, dB. */
  spreadDb: z.number(),
  /** Differences heard on both, A only and B only. */
  both: z.number().int(),
  onlyA: z.number().int(),
  onlyB: z.number().int(),
  /** 2nd percentile of the SNR of each receiver on each band: what a station must exceed to be heard. */
  limits: z.array(z.object({ receiverId: id, bandMetres: z.number().int(), limitDb: z.number() })),
  /** Whether it differs from the plain estimate by more than the margin. */
  disagrees: z.boolean(),
  sentence: z.string(),
});

/** Stations heard on one antenna only, in one sector; each (call sign, night) counted once. */
export const heardOnlySector = z.object({
  sector: z.number().int(),
  onlyA: z.number().int(),
  onlyB: z.number().int(),
  oddsRatio: z.number().nullable(),
  /** Upper end null: without limit. */
  intervalRatio: z.tuple([z.number(), z.number().nullable()]).nullable(),
  midP: z.number().nullable(),
  /** Benjamini-Hochberg adjusted across the sectors. */
  pAdjusted: z.number().nullable(),
});

/** The interval that may be watched while data come in, after each night. */
export const peekProofLine = z.object({
  /** The number of station-nights at which the interval is tightest for its kind; fixed beforehand. */
  tunedForClusters: z.number().int(),
  points: z.array(
    z.object({
      night: day,
      clusters: z.number().int(),
      estimateDb: z.number(),
      intervalDb: interval.nullable(),
    }),
  ),
  sentence: z.string(),
});

/** What further nights like those so far would bring. */
export const comparisonPlanning = z.object({
  /** Spread of one station-night as it acts on the estimate, dB. */
  spreadDb: z.number(),
  clustersPerNight: z.number(),
  halfWidthNowDb: z.number(),
  /** Smallest true difference that data as many as these find in 80 of 100 cases. */
  detectableDb: z.number(),
  precision: z.array(
    z.object({
      halfWidthDb: z.number(),
      clusters: z.number().int(),
      /** Nights still needed; 0 where it is reached. */
      moreNights: z.number().int(),
    }),
  ),
  /** For finding a true difference of the margin in 80 of 100 cases. */
  power: z.object({ clusters: z.number().int(), moreNights: z.number().int() }),
  sentence: z.string(),
});

export const comparisonAnswer = z.object({
  question: comparisonQuestion,
  antennas: z.object({
    a: z.object({ id, name: z.string(), marker: z.string(), headingDeg: z.number().nullable() }),
    b: z.object({ id, name: z.string(), marker: z.string(), headingDeg: z.number().nullable() }),
  }),
  rules: pairingRules,
  marginDb: z.number(),
  sectorCount: z.number().int(),
  verdict: z.object({ code: verdictCode, sentence: z.string(), cures: z.array(z.string()) }),
  /** null where nothing can be estimated; the verdict says why. */
  estimate: z
    .object({
      estimateDb: z.number(),
      seDb: z.number(),
      df: z.number(),
      interval95Db: interval,
      interval90Db: interval,
      p: z.number(),
      designEffect: z.number().nullable(),
    })
    .nullable(),
  counts: z.object({
    units: z.number().int(),
    matches: z.number().int(),
    clusters: z.number().int(),
    stations: z.number().int(),
    nights: z.number().int(),
    simultaneous: z.number().int(),
    alternating: z.number().int(),
  }),
  offsets: z.array(
    z.object({
      receiverId: id,
      againstReceiverId: id,
      bandMetres: z.number().int(),
      offsetDb: z.number(),
      intervalDb: interval.nullable(),
    }),
  ),
  rank: z
    .object({
      clusterMeanDb: z.number(),
      hodgesLehmannDb: z.number(),
      hodgesLehmannIntervalDb: interval.nullable(),
      signedRankP: z.number().nullable(),
      signTestP: z.number().nullable(),
      pairedTP: z.number().nullable(),
      effectSizeDz: z.number().nullable(),
      chanceAHearsBetter: z.number(),
    })
    .nullable(),
  equivalence: z.object({ p: z.number(), equivalent: z.boolean() }).nullable(),
  /** null where it cannot be fitted; `views` says why. */
  censored: censoredView.nullable(),
  peekProof: peekProofLine.nullable(),
  planning: comparisonPlanning.nullable(),
  /** Why a view above is missing, one sentence each. */
  views: z.object({
    censored: z.string().nullable(),
    peekProof: z.string().nullable(),
    planning: z.string().nullable(),
  }),
  histogram: z.object({
    binWidthDb: z.number(),
    bins: z.array(z.object({ fromDb: z.number(), units: z.number().int() })),
  }),
  sectors: z.array(comparisonCell),
  bandHours: z.object({ basis: z.enum(['utc', 'sunset', 'sunrise']), cells: z.array(comparisonCell) }),
  nights: z.array(comparisonCell),
  /** null where fewer than two cells speak. */
  pooling: z.object({
    sectors: comparisonPooling.nullable(),
    bandHours: comparisonPooling.nullable(),
    nights: comparisonPooling.nullable(),
  }),
  heardOnlySectors: z.array(heardOnlySector),
  fairness: z.object({
    exclusions: z.object({
      guardedSpots: z.number().int(),
      untaggedSpots: z.number().int(),
      doubledSpots: z.number().int(),
      bearingUnsureUnits: z.number().int(),
      outsideHoursUnits: z.number().int(),
      otherReceiverUnits: z.number().int(),
      otherKindUnits: z.number().int(),
    }),
    receiverBalance: z.array(
      z.object({ receiverId: id, unitsOnA: z.number().int(), unitsOnB: z.number().int() }),
    ),
    listening: z.object({ aHours: z.number(), bHours: z.number() }),
    separable: z.boolean(),
    heardOnly: z
      .object({
        onA: z.number().int(),
        onB: z.number().int(),
        stationsOnlyA: z.number().int(),
        stationsOnlyB: z.number().int(),
        oddsRatio: z.number().nullable(),
        oddsRatioInterval: z.tuple([z.number(), z.number().nullable()]).nullable(),
        exactP: z.number().nullable(),
        midP: z.number().nullable(),
      })
      .nullable(),
    /** How many stations carry half of all units. */
    halfWeightStations: z.number().int(),
    warnings: z.array(z.string()),
  }),
  /** By station, most units first. */
  stations: z.array(
    z.object({
      call: z.string(),
      country: z.string().nullable(),
      azimuthDeg: z.number().nullable(),
      distanceKm: z.number().nullable(),
      units: z.number().int(),
      nights: z.number().int(),
      meanDb: z.number(),
      onlyA: z.number().int(),
      onlyB: z.number().int(),
    }),
  ),
  stationsTruncated: z.boolean(),
  preparation: z.object({
    rulesKey: z.string(),
    standing: z.boolean(),
    /** Nights in the range whose units wait to be made anew: the answer follows when they are. */
    nightsWaiting: z.number().int(),
    firstNight: day.nullable(),
    lastNight: day.nullable(),
  }),
});
export type ComparisonAnswer = z.infer<typeof comparisonAnswer>;

/** The units of these rules do not exist yet: a job makes them. */
export const comparisonPending = z.object({ pending: z.literal(true), jobId: longId });

export const compare = endpoint({
  method: 'POST',
  path: '/stations/:stationId/comparisons',
  summary:
    'Ask a question, get the answer (or 202 and a job, when units under other rules must be made first)',
  params: stationParams,
  body: comparisonQuestion,
  reply: z.union([comparisonAnswer, comparisonPending]),
});
export const sensitivityGroup = z.enum([
  'as asked',
  'block length',
  'matching window',
  'guard',
  'zeros',
  'clustering',
  'stations',
  'weights',
]);

/** The same question under one changed choice. */
export const sensitivityVariant = z.object({
  /** Unique within the reply, the same from one call to the next. */
  key: z.string(),
  group: sensitivityGroup,
  /** "Block of 5 min", "Without the five heaviest stations". */
  label: z.string(),
  /** 'not made': units under these rules do not exist and this person may not have them made. */
  state: z.enum(['ready', 'waiting', 'not made']),
  /** The job that makes the units, while it waits or runs. */
  jobId: longId.nullable(),
  /** null unless ready and computable. */
  estimateDb: z.number().nullable(),
  intervalDb: interval.nullable(),
  units: z.number().int(),
  clusters: z.number().int(),
  verdict: verdictCode.nullable(),
});
export type SensitivityVariant = z.infer<typeof sensitivityVariant>;

export const sensitivity = endpoint({
  method: 'POST',
  path: '/stations/:stationId/comparisons/sensitivity',
  summary: 'The answer under other choices; units under other rules are made first where `prepare` says so',
  params: stationParams,
  body: z.object({ question: comparisonQuestion, prepare: z.boolean().default(false) }),
  reply: z.object({
    marginDb: z.number(),
    variants: z.array(sensitivityVariant),
    /** What the variants say together; null while some wait. */
    sentence: z.string().nullable(),
  }),
});

export const exportUnits = endpoint({
  method: 'POST',
  path: '/stations/:stationId/comparisons/units.csv',
  summary: 'The units behind an answer as CSV',
  params: stationParams,
  body: comparisonQuestion,
  reply: z.string(),
  media: { reply: 'text/csv' },
});

export const trial = z.object({
  id,
  name: z.string(),
  question: comparisonQuestion,
  notes: z.string(),
  createdBy: z.string().nullable(),
  createdAt: instant,
  updatedAt: instant,
});
export type Trial = z.infer<typeof trial>;
/** Without defaults: a default in a change would overwrite what the change does not name. */
const trialFields = z.object({
  name: z.string().trim().min(1, 'Give the trial a name.').max(80, 'Use at most 80 characters.'),
  question: comparisonQuestion,
  notes: z.string().max(4000, 'Use at most 4000 characters.'),
});
const trialParams = stationParams.extend({ trialId: id });
export const listTrials = endpoint({
  method: 'GET',
  path: '/stations/:stationId/trials',
  summary: 'Saved comparison questions',
  params: stationParams,
  reply: z.object({ items: z.array(trial) }),
});
export const saveTrial = endpoint({
  method: 'POST',
  path: '/stations/:stationId/trials',
  summary: 'Save a question as a trial',
  params: stationParams,
  body: trialFields.extend({ notes: trialFields.shape.notes.default('') }),
  reply: trial,
  status: 201,
});
export const readTrial = endpoint({
  method: 'GET',
  path: '/stations/:stationId/trials/:trialId',
  summary: 'One trial',
  params: trialParams,
  reply: trial,
});
export const updateTrial = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/trials/:trialId',
  summary: 'Rename a trial or change its question',
  params: trialParams,
  body: trialFields.partial(),
  reply: trial,
});
export const archiveTrial = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/trials/:trialId',
  summary: 'Put a trial away; nothing is erased',
  params: trialParams,
  status: 204,
});
