import type { AuditRow } from './audit-row.ts';

const actions: Record<string, string> = {
  'antenna.add': 'added an antenna',
  'antenna.remove': 'removed an antenna',
  'antenna.update': 'changed an antenna',
  'dwell.change': 'corrected the switch log',
  'dwell.switch': 'logged a switch',
  'dwell.undo': 'undid a correction of the switch log',
  'feed.add': 'added a feed',
  'feed.remove': 'removed a feed',
  'feed.update': 'changed a feed',
  'finding.decide': 'recorded a decision on a finding',
  'finding.freeze': 'froze a finding',
  'finding.share': 'shared a finding by a link',
  'finding.withdraw-share': 'withdrew a link to a finding',
  'import.cancel': 'stopped an import',
  'import.start': 'started an import',
  'import.undo': 'undid an import',
  'import.upload': 'uploaded a file',
  'job.cancel': 'stopped work in the background',
  'job.retry': 'started work in the background again',
  'mapping.remove': 'forgot a column mapping',
  'mapping.save': 'saved a column mapping',
  'member.change-role': "changed a member's role",
  'member.invite': 'invited somebody',
  'member.join': 'joined the station',
  'member.remove': 'removed a member',
  'member.withdraw-invitation': 'withdrew an invitation',
  'position.add': 'added a position correction',
  'position.remove': 'withdrew a position correction',
  'receiver.add': 'added a receiver',
  'receiver.update': 'changed a receiver',
  'station.set-up': 'set the station up',
  'station.update': 'changed position or rules',
  'token.make': 'made an API token',
  'token.revoke': 'revoked an API token',
  'trial.archive': 'put a trial away',
  'trial.save': 'saved a trial',
  'trial.update': 'changed a trial',
};

/** An action that has no words yet is shown by its name: nothing in the trail is hidden. */
export function auditAction(action: string): string {
  return actions[action] ?? action;
}

/** What it was done to, by name where the name is known; `names` by the noun of the action and the id. */
export function auditTarget(
  entry: AuditRow,
  names: (noun: string, id: string) => string | undefined,
): string {
  const noun = entry.action.split('.')[0]!;
  const named = entry.detail.name ?? entry.detail.fileName ?? entry.detail.email;
  if (typeof named === 'string') return named;
  if (noun === 'station' || entry.action === 'member.join') return '';
  return names(noun, entry.target) ?? entry.target;
}

/** The particulars in one line: "role analyst", "from operator, to analyst". */
export function auditDetail(detail: Record<string, unknown>): string {
  return Object.entries(detail)
    .filter(([key]) => !['name', 'fileName', 'email'].includes(key))
    .map(([key, value]) => `${spaced(key)} ${written(value)}`)
    .join(', ');
}

const spaced = (key: string) => key.replace(/([A-Z])/g, (letter) => ` ${letter.toLowerCase()}`);

function written(value: unknown): string {
  if (Array.isArray(value)) return value.map(written).join(' and ');
  if (value === null || value === '') return 'nothing';
  return typeof value === 'object' ? JSON.stringify(value) : String(value);
}
