import { may, permissions } from '../../../shared/contracts/permission.ts';
import type { Permission, Role, TokenScope } from '../../../shared/contracts/permission.ts';

export const roleDoes: Record<Role, string> = {
  manager: 'Runs the station and its membership; may do everything.',
  operator: 'Sits at the switch: logs what is on, mends the log, imports files.',
  analyst: 'Decides on antennas: asks, saves trials, corrects positions, mends the log.',
  contester: 'Reads everything that helps tonight; changes nothing but their own settings.',
};

/** What each permission lets a person do, as it ends a sentence that begins with "May". */
const permissionDoes: Record<Permission, string> = {
  'station:read': 'see the station, its antennas and receivers',
  'station:manage': 'change the station, its antennas, receivers and feeds',
  'position:write': 'correct where calls are',
  'member:read': 'see the members',
  'member:manage': 'invite, change and remove members',
  'token:manage': 'make and revoke API tokens',
  'audit:read': 'read the audit trail',
  'dwell:read': 'see the switch log',
  'dwell:write': 'log switching and mend the switch log',
  'spot:read': 'see spots',
  'import:read': 'see imports and what was refused',
  'import:write': 'import files and undo imports',
  'comparison:read': 'read comparisons',
  'comparison:prepare': 'compare under other rules than the standing ones',
  'trial:read': 'read trials',
  'trial:write': 'save, change and put away trials',
  'finding:read': 'read findings',
  'finding:write': 'freeze findings and record decisions',
  'finding:share': 'share findings with guests',
  'job:read': 'see work in the background',
  'job:cancel': 'stop work in the background',
};

/** What somebody may do no longer, and newly, when their role changes; `to` null: leaves the station. */
export function roleChange(from: Role, to: Role | null): { loses: string[]; gains: string[] } {
  const all = Object.keys(permissions) as Permission[];
  const before = (permission: Permission) => may(from, permission);
  const after = (permission: Permission) => to !== null && may(to, permission);
  return {
    loses: all.filter((each) => before(each) && !after(each)).map((each) => permissionDoes[each]),
    gains: all.filter((each) => !before(each) && after(each)).map((each) => permissionDoes[each]),
  };
}

export const scopeDoes: Record<TokenScope, { word: string; does: string }> = {
  'dwell:write': {
    word: 'Log switching',
    does: 'For a switch controller: says which receiver is now on which antenna.',
  },
  'dwell:read': { word: 'Read the switch log', does: 'For scripts that need to know what was on when.' },
  'spot:read': { word: 'Read spots', does: 'For scripts that take tagged spots elsewhere.' },
};
