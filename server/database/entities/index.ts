import { User } from './user.ts';
import { Session } from './session.ts';
import { RefreshToken } from './refresh-token.ts';
import { PasswordReset } from './password-reset.ts';
import { Station } from './station.ts';
import { Membership } from './membership.ts';
import { Invitation } from './invitation.ts';
import { ApiToken } from './api-token.ts';
import { Receiver } from './receiver.ts';
import { Antenna } from './antenna.ts';
import { Feed } from './feed.ts';
import { FeedHealth } from './feed-health.ts';
import { FeedRefusal } from './feed-refusal.ts';
import { Dwell } from './dwell.ts';
import { DwellChange } from './dwell-change.ts';
import { CallSign } from './call-sign.ts';
import { CallBearing } from './call-bearing.ts';
import { PositionOverride } from './position-override.ts';
import { Spot } from './spot.ts';
import { SavedMapping } from './saved-mapping.ts';
import { ImportRecord } from './import-record.ts';
import { ImportChunk } from './import-chunk.ts';
import { ImportRefusal } from './import-refusal.ts';
import { Job } from './job.ts';
import { TimedRun } from './timed-run.ts';
import { DirtyBlock } from './dirty-block.ts';
import { UnitPack } from './unit-pack.ts';
import { UnitNight } from './unit-night.ts';
import { Trial } from './trial.ts';
import { Finding } from './finding.ts';
import { FindingDecision } from './finding-decision.ts';
import { FindingShare } from './finding-share.ts';
import { AuditEntry } from './audit-entry.ts';

/** Listed by hand, like the migrations; a table without an entity fails the drift check. */
export const entities = [
  User,
  Session,
  RefreshToken,
  PasswordReset,
  Station,
  Membership,
  Invitation,
  ApiToken,
  Receiver,
  Antenna,
  Feed,
  FeedHealth,
  FeedRefusal,
  Dwell,
  DwellChange,
  CallSign,
  CallBearing,
  PositionOverride,
  Spot,
  SavedMapping,
  ImportRecord,
  ImportChunk,
  ImportRefusal,
  Job,
  TimedRun,
  DirtyBlock,
  UnitPack,
  UnitNight,
  Trial,
  Finding,
  FindingDecision,
  FindingShare,
  AuditEntry,
];

export {
  User,
  Session,
  RefreshToken,
  PasswordReset,
  Station,
  Membership,
  Invitation,
  ApiToken,
  Receiver,
  Antenna,
  Feed,
  FeedHealth,
  FeedRefusal,
  Dwell,
  DwellChange,
  CallSign,
  CallBearing,
  PositionOverride,
  Spot,
  SavedMapping,
  ImportRecord,
  ImportChunk,
  ImportRefusal,
  Job,
  TimedRun,
  DirtyBlock,
  UnitPack,
  UnitNight,
  Trial,
  Finding,
  FindingDecision,
  FindingShare,
  AuditEntry,
};
