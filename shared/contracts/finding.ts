import { z } from 'zod';
import { comparisonAnswer, comparisonPending, comparisonQuestion, pairingRules } from './comparison.ts';
import { day, endpoint, id, instant, longText, shortText, stationParams, uuid } from './common.ts';

/** What a station does about an antenna after reading a finding. */
export const decisionKind = z.enum(['keep', 'rebuild', 'take down', 'look again']);
export type DecisionKind = z.infer<typeof decisionKind>;

/** Decisions are added, never changed; the last one counts. */
export const decision = z.object({
  id,
  decision: decisionKind,
  /** The antenna that it is about; null: the finding as a whole. */
  antennaName: z.string().nullable(),
  /** Set for 'look again', null otherwise. */
  lookAgainOn: day.nullable(),
  reason: z.string(),
  decidedBy: z.string(),
  decidedAt: instant,
});
export type Decision = z.infer<typeof decision>;

const comparedAntenna = z.object({
  id,
  name: z.string(),
  marker: z.string(),
  headingDeg: z.number().nullable(),
});

/** A line of the list of findings. Names and numbers are those of the day on which it was frozen. */
export const findingSummary = z.object({
  id,
  title: z.string(),
  note: z.string(),
  /** The question in words; it heads the finding everywhere. */
  sentence: z.string(),
  antennas: z.object({ a: comparedAntenna, b: comparedAntenna }),
  verdict: comparisonAnswer.shape.verdict,
  estimate: comparisonAnswer.shape.estimate,
  marginDb: z.number(),
  counts: comparisonAnswer.shape.counts,
  firstNight: day,
  lastNight: day,
  /** The trial that was frozen; null: a question that was not saved. */
  trial: z.object({ id, name: z.string() }).nullable(),
  frozenBy: z.string(),
  frozenAt: instant,
  latestDecision: decision.nullable(),
});
export type FindingSummary = z.infer<typeof findingSummary>;

export const pictureName = z.enum(['histogram', 'rose', 'band-hour', 'forest']);
export type PictureName = z.infer<typeof pictureName>;

/** The whole frozen record, as a member reads it. */
export const finding = findingSummary.extend({
  /** Every default resolved: nights, margin and rules are concrete. */
  question: comparisonQuestion.safeExtend({
    fromNight: day,
    toNight: day,
    rules: pairingRules,
    marginDb: z.number(),
  }),
  /**
   * The answer of that day, with all its numbers. One frozen by an earlier release lacks what has been added
   * to answers since: whoever adds a field there says here what such an answer shows instead.
   */
  answer: comparisonAnswer,
  /** A night that was still going on when the finding was frozen and is therefore not part of it. */
  leftOutNight: day.nullable(),
  station: z.object({
    name: z.string(),
    callSign: z.string(),
    locator: z.string(),
    latitudeDeg: z.number(),
    longitudeDeg: z.number(),
  }),
  receivers: z.array(z.object({ id, callSign: z.string(), label: z.string() })),
  /** SHA-256, hexadecimal, over the units and heard-only stations that the answer used. */
  digest: z.string().regex(/^[0-9a-f]{64}$/),
  nightDigests: z.array(
    z.object({
      night: day,
      units: z.number().int(),
      heardOnly: z.number().int(),
      digest: z.string(),
    }),
  ),
  /** Dwells of the switch log that were kept with it. */
  dwells: z.number().int(),
  programVersion: z.string(),
  decisions: z.array(decision),
});
export type Finding = z.infer<typeof finding>;

const findingParams = stationParams.extend({ findingId: id });

export const listFindings = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings',
  summary: 'Frozen findings, newest first',
  params: stationParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(200).default(50),
  }),
  reply: z.object({ items: z.array(findingSummary), next: z.string().nullable() }),
});
export const freezeFinding = endpoint({
  method: 'POST',
  path: '/stations/:stationId/findings',
  summary:
    'Freeze the answer to a question or a trial (or 202 and a job, when units under its rules must be made first)',
  params: stationParams,
  body: z
    .object({
      title: shortText(120),
      note: longText.default(''),
      /** Freezes the trial's own question when no question is given; else only says where it came from. */
      trialId: id.nullable().default(null),
      question: comparisonQuestion.nullable().default(null),
    })
    .refine((body) => body.trialId !== null || body.question !== null, {
      path: ['question'],
      message: 'Give a question or a trial to freeze.',
    }),
  reply: z.union([finding, comparisonPending]),
  status: 201,
});
export const readFinding = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings/:findingId',
  summary: 'One finding, as it was frozen',
  params: findingParams,
  reply: finding,
});

/** What a finding says, in the few numbers that are compared. */
const numbers = z.object({
  verdict: comparisonAnswer.shape.verdict,
  estimate: comparisonAnswer.shape.estimate,
  counts: comparisonAnswer.shape.counts,
});
export const dwellFacts = z.object({
  receiver: z.string(),
  antenna: z.string(),
  /** Cut to the nights of the finding. */
  startsAt: instant,
  endsAt: instant,
});
export type DwellFacts = z.infer<typeof dwellFacts>;

/** The frozen question asked of today's data, held against the frozen answer. */
export const recomputation = z.object({
  /** Same units and the same numbers to the last bit. */
  same: z.boolean(),
  /** "Same data, same numbers." or what is different, in one sentence. */
  sentence: z.string(),
  checkedAt: instant,
  units: z.object({ same: z.boolean(), digestThen: z.string(), digestNow: z.string() }),
  program: z.object({
    same: z.boolean(),
    versionThen: z.string(),
    versionNow: z.string(),
    /** Today's program over the frozen units gives the frozen numbers. */
    sameNumbers: z.boolean(),
  }),
  then: numbers,
  now: numbers,
  /** What today's program makes of the frozen units; differs from `then` only when the program changed. */
  frozenUnitsNow: numbers,
  /** Everything that changed, one sentence each, the most telling first. */
  changes: z.array(
    z.object({
      about: z.enum([
        'numbers',
        'dwells',
        'nights',
        'imports',
        'bearings',
        'position',
        'rules',
        'names',
        'program',
        'preparation',
      ]),
      sentence: z.string(),
    }),
  ),
  nights: z.array(
    z.object({
      night: day,
      unitsThen: z.number().int(),
      unitsNow: z.number().int(),
      /** Units that were not there, are gone, or are there with another difference or other counts. */
      added: z.number().int(),
      removed: z.number().int(),
      changed: z.number().int(),
      heardOnlyThen: z.number().int(),
      heardOnlyNow: z.number().int(),
    }),
  ),
  dwells: z.array(
    z.object({
      change: z.enum(['added', 'removed', 'changed']),
      before: dwellFacts.nullable(),
      after: dwellFacts.nullable(),
      /** From the history of the switch log, where it knows. */
      by: z.string().nullable(),
      at: instant.nullable(),
      sentence: z.string(),
    }),
  ),
  /** The lists above end where this is true; the counts in the sentences are whole. */
  truncated: z.boolean(),
});
export type Recomputation = z.infer<typeof recomputation>;

export const recomputeFinding = endpoint({
  method: 'POST',
  path: '/stations/:stationId/findings/:findingId/recompute',
  summary:
    "Ask the frozen question of today's data and hold the two answers against each other (or 202 and a job)",
  params: findingParams,
  reply: z.union([recomputation, comparisonPending]),
});

export const addDecision = endpoint({
  method: 'POST',
  path: '/stations/:stationId/findings/:findingId/decisions',
  summary: 'Add a decision; earlier ones stay, the last one counts',
  params: findingParams,
  body: z
    .object({
      decision: decisionKind,
      /** Which of the two antennas it is about; null: the finding as a whole. */
      about: z.enum(['a', 'b']).nullable().default(null),
      lookAgainOn: day.nullable().default(null),
      reason: z.string().trim().min(1, 'Say why.').max(2000, 'Use at most 2000 characters.'),
    })
    .refine((body) => (body.decision === 'look again') === (body.lookAgainOn !== null), {
      path: ['lookAgainOn'],
      message: 'Give a date for "look again", and none for the other decisions.',
    }),
  reply: decision,
  status: 201,
});

/** A link for somebody without an account. The token itself is shown once, when it is made. */
export const share = z.object({
  id: uuid,
  /** Whom it is for. */
  label: z.string(),
  createdBy: z.string().nullable(),
  createdAt: instant,
  expiresAt: instant,
  withdrawnAt: instant.nullable(),
  lastReadAt: instant.nullable(),
  timesRead: z.number().int(),
});
export type Share = z.infer<typeof share>;

export const listShares = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings/:findingId/shares',
  summary: 'Share links of a finding, newest first, withdrawn and expired ones too',
  params: findingParams,
  reply: z.object({ items: z.array(share) }),
});
export const createShare = endpoint({
  method: 'POST',
  path: '/stations/:stationId/findings/:findingId/shares',
  summary: 'Make a link for guests; its token is shown this once',
  params: findingParams,
  body: z.object({
    label: shortText(80),
    days: z.number().int().min(1, 'Give 1 to 365 days.').max(365, 'Give 1 to 365 days.').default(30),
  }),
  /** The page for guests is `/f#token`: a fragment reaches neither a server nor its logs. */
  reply: z.object({ share, token: z.string(), url: z.string() }),
  status: 201,
});
export const withdrawShare = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/findings/:findingId/shares/:shareId',
  summary: 'Withdraw a share link; it stops working at once',
  params: findingParams.extend({ shareId: uuid }),
  status: 204,
});

export const paper = z.enum(['a4', 'letter']);
export type Paper = z.infer<typeof paper>;

export const findingPdf = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings/:findingId/report.pdf',
  summary: 'A finding on paper',
  params: findingParams,
  query: z.object({ paper: paper.default('a4') }),
  reply: z.string(),
  media: { reply: 'application/pdf' },
});
export const findingUnits = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings/:findingId/units.csv',
  summary: 'The units that the finding froze, as CSV',
  params: findingParams,
  reply: z.string(),
  media: { reply: 'text/csv' },
});
export const findingPicture = endpoint({
  method: 'GET',
  path: '/stations/:stationId/findings/:findingId/pictures/:picture.svg',
  summary: 'One of the four pictures, as it was frozen',
  params: findingParams.extend({ picture: pictureName }),
  reply: z.string(),
  media: { reply: 'image/svg+xml' },
});

const token = z.string().min(20, 'The link is not complete.').max(200, 'The link is not complete.');

/** What a guest sees: the finding and its decisions, nothing else of the station; `trial` is null for them. */
export const sharedFinding = finding.extend({ linkExpiresAt: instant });
export type SharedFinding = z.infer<typeof sharedFinding>;

export const readSharedFinding = endpoint({
  method: 'POST',
  path: '/shared-findings/read',
  summary: 'What a share link shows (the token goes in the body, so that no log keeps it)',
  body: z.object({ token }),
  reply: sharedFinding,
});
export const sharedFindingPdf = endpoint({
  method: 'POST',
  path: '/shared-findings/report.pdf',
  summary: 'The finding of a share link on paper',
  body: z.object({ token, paper: paper.default('a4') }),
  reply: z.string(),
  media: { reply: 'application/pdf' },
});
