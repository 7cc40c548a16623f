import type { EntityManager } from 'typeorm';
import type { z } from 'zod';
import type {
  decision,
  finding,
  findingSummary,
  PictureName,
  share,
} from '../../../shared/contracts/finding.ts';
import { numberCursor, pageOf } from '../../platform/keyset.ts';
import type { FrozenPictures } from './pictures.ts';

type Summary = z.input<typeof findingSummary>;
type Reply = z.input<typeof finding>;
type DecisionReply = z.input<typeof decision>;
type ShareReply = z.input<typeof share>;

/** What a list shows of an answer; stored beside it, so that a list need not read whole answers. */
export type Headline = Pick<Summary, 'antennas' | 'verdict' | 'estimate' | 'marginDb' | 'counts'>;
/** What was so around the answer when it was frozen. */
export type Circumstances = Pick<Reply, 'station' | 'receivers' | 'leftOutNight'>;

interface SummaryRow {
  id: number;
  title: string;
  note: string;
  sentence: string;
  headline: Headline;
  first_night: string;
  last_night: string;
  trial_id: number | null;
  trial_name: string | null;
  frozen_by_name: string;
  frozen_at: Date;
  decision: DecisionRow | null;
}
interface DecisionRow {
  id: number;
  decision: DecisionReply['decision'];
  about: 'a' | 'b' | null;
  look_again_on: string | null;
  reason: string;
  decided_by_name: string;
  decided_at: Date | string;
}
interface WholeRow extends SummaryRow {
  question: Reply['question'];
  answer: Reply['answer'];
  circumstances: Circumstances;
  digest: Buffer;
  night_digests: Reply['nightDigests'];
  dwell_count: number;
  program_version: string;
}

const summaryColumns = `f.id, f.title, f.note, f.sentence, f.headline, f.first_night, f.last_night,
  f.trial_id, t.name AS trial_name, f.frozen_by_name, f.frozen_at`;
const trialJoin = 'LEFT JOIN trial t ON t.station_id = f.station_id AND t.id = f.trial_id';

/** Findings, newest first, each with the decision that counts. */
export async function listFindings(
  manager: EntityManager,
  stationId: number,
  after: string | undefined,
  limit: number,
): Promise<{ items: Summary[]; next: string | null }> {
  const rows: SummaryRow[] = await manager.query(
    `SELECT ${summaryColumns}, to_jsonb(d) AS decision
     FROM finding f ${trialJoin}
     LEFT JOIN LATERAL (
       SELECT id, decision, about, look_again_on, reason, decided_by_name, decided_at FROM finding_decision
       WHERE station_id = f.station_id AND finding_id = f.id ORDER BY id DESC LIMIT 1) d ON true
     WHERE f.station_id = $1 AND ($2::int IS NULL OR f.id < $2)
     ORDER BY f.id DESC LIMIT $3`,
    [stationId, numberCursor(after), limit + 1],
  );
  const page = pageOf(rows, limit, (row) => String(row.id));
  return { items: page.items.map(presentSummary), next: page.next };
}

/** One finding as it was frozen, with all its decisions; null when the station has no such finding. */
export async function readFinding(
  manager: EntityManager,
  stationId: number,
  findingId: number,
): Promise<Reply | null> {
  const rows: Omit<WholeRow, 'decision'>[] = await manager.query(
    `SELECT ${summaryColumns}, f.question, f.answer, f.circumstances, f.digest, f.night_digests,
       f.dwell_count, f.program_version
     FROM finding f ${trialJoin} WHERE f.station_id = $1 AND f.id = $2`,
    [stationId, findingId],
  );
  const row = rows[0];
  if (!row) return null;
  const decisions = await listDecisions(manager, stationId, findingId, row.headline);
  return {
    ...presentSummary({ ...row, decision: null }),
    latestDecision: decisions.at(-1) ?? null,
    question: row.question,
    answer: row.answer,
    ...row.circumstances,
    digest: row.digest.toString('hex'),
    nightDigests: row.night_digests,
    dwells: row.dwell_count,
    programVersion: row.program_version,
    decisions,
  };
}

/** Oldest first: the last one counts. */
export async function listDecisions(
  manager: EntityManager,
  stationId: number,
  findingId: number,
  headline: Pick<Headline, 'antennas'>,
): Promise<DecisionReply[]> {
  const rows: DecisionRow[] = await manager.query(
    `SELECT id, decision, about, look_again_on, reason, decided_by_name, decided_at FROM finding_decision
     WHERE station_id = $1 AND finding_id = $2 ORDER BY id`,
    [stationId, findingId],
  );
  return rows.map((row) => presentDecision(row, headline));
}

/** What a finding is called and what a list shows of it; null when the station has no such finding. */
export async function readHeadline(
  manager: EntityManager,
  stationId: number,
  findingId: number,
): Promise<(Headline & { title: string }) | null> {
  const rows: { title: string; headline: Headline }[] = await manager.query(
    'SELECT title, headline FROM finding WHERE station_id = $1 AND id = $2',
    [stationId, findingId],
  );
  const row = rows[0];
  return row ? { ...row.headline, title: row.title } : null;
}

export async function readPictures(
  manager: EntityManager,
  stationId: number,
  findingId: number,
): Promise<FrozenPictures | null> {
  const rows: { pictures: FrozenPictures }[] = await manager.query(
    'SELECT pictures FROM finding WHERE station_id = $1 AND id = $2',
    [stationId, findingId],
  );
  return rows[0]?.pictures ?? null;
}

export async function readPicture(
  manager: EntityManager,
  stationId: number,
  findingId: number,
  name: PictureName,
): Promise<string | null> {
  const rows: { svg: string | null }[] = await manager.query(
    `SELECT pictures #>> ARRAY[$3, 'whole'] AS svg FROM finding WHERE station_id = $1 AND id = $2`,
    [stationId, findingId, name],
  );
  return rows[0]?.svg ?? null;
}

export async function readEvidence(
  manager: EntityManager,
  stationId: number,
  findingId: number,
): Promise<Buffer | null> {
  const rows: { evidence: Buffer }[] = await manager.query(
    'SELECT evidence FROM finding WHERE station_id = $1 AND id = $2',
    [stationId, findingId],
  );
  return rows[0]?.evidence ?? null;
}

/** Share links of one finding, newest first; never their tokens. */
export async function listShares(
  manager: EntityManager,
  stationId: number,
  findingId: number,
  shareId?: string,
): Promise<ShareReply[]> {
  const rows: {
    id: string;
    label: string;
    created_by: string | null;
    created_at: Date;
    expires_at: Date;
    withdrawn_at: Date | null;
    last_read_at: Date | null;
    times_read: number;
  }[] = await manager.query(
    `SELECT s.id, s.label, u.name AS created_by, s.created_at, s.expires_at, s.withdrawn_at, s.last_read_at,
       s.times_read
     FROM finding_share s LEFT JOIN app_user u ON u.id = s.created_by
     WHERE s.station_id = $1 AND s.finding_id = $2 AND ($3::uuid IS NULL OR s.id = $3)
     ORDER BY s.created_at DESC, s.id`,
    [stationId, findingId, shareId ?? null],
  );
  return rows.map((row) => ({
    id: row.id,
    label: row.label,
    createdBy: row.created_by,
    createdAt: row.created_at.toISOString(),
    expiresAt: row.expires_at.toISOString(),
    withdrawnAt: row.withdrawn_at?.toISOString() ?? null,
    lastReadAt: row.last_read_at?.toISOString() ?? null,
    timesRead: row.times_read,
  }));
}

function presentSummary(row: SummaryRow): Summary {
  return {
    id: row.id,
    title: row.title,
    note: row.note,
    sentence: row.sentence,
    ...row.headline,
    firstNight: row.first_night,
    lastNight: row.last_night,
    trial: row.trial_id === null ? null : { id: row.trial_id, name: row.trial_name ?? '' },
    frozenBy: row.frozen_by_name,
    frozenAt: row.frozen_at.toISOString(),
    latestDecision: row.decision && presentDecision(row.decision, row.headline),
  };
}

function presentDecision(row: DecisionRow, { antennas }: Pick<Headline, 'antennas'>): DecisionReply {
  return {
    id: row.id,
    decision: row.decision,
    antennaName: row.about === null ? null : antennas[row.about].name,
    lookAgainOn: row.look_again_on,
    reason: row.reason,
    decidedBy: row.decided_by_name,
    decidedAt: new Date(row.decided_at).toISOString(),
  };
}
