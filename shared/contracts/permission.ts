import { z } from 'zod';

export const role = z.enum(['manager', 'operator', 'analyst', 'contester']);
export type Role = z.infer<typeof role>;

/**
 * Who may do what. The server refuses by it, the client hides by it. A contester changes nothing but their
 * own settings; whoever decides on antennas may also bring in data and mend the log behind the decision.
 */
export const permissions = {
  'station:read': ['manager', 'operator', 'analyst', 'contester'],
  'station:manage': ['manager'],
  'position:write': ['manager', 'analyst'],
  'member:read': ['manager'],
  'member:manage': ['manager'],
  'token:manage': ['manager'],
  'audit:read': ['manager'],
  'dwell:read': ['manager', 'operator', 'analyst', 'contester'],
  'dwell:write': ['manager', 'operator', 'analyst'],
  'spot:read': ['manager', 'operator', 'analyst', 'contester'],
  'import:read': ['manager', 'operator', 'analyst'],
  'import:write': ['manager', 'operator', 'analyst'],
  'comparison:read': ['manager', 'operator', 'analyst', 'contester'],
  'comparison:prepare': ['manager', 'analyst'],
  'trial:read': ['manager', 'operator', 'analyst', 'contester'],
  'trial:write': ['manager', 'analyst'],
  'finding:read': ['manager', 'operator', 'analyst', 'contester'],
  'finding:write': ['manager', 'analyst'],
  'finding:share': ['manager', 'analyst'],
  'job:read': ['manager', 'operator', 'analyst'],
  'job:cancel': ['manager', 'operator', 'analyst'],
} as const satisfies Record<string, readonly Role[]>;

export type Permission = keyof typeof permissions;

export function may(who: Role, permission: Permission): boolean {
  return (permissions[permission] as readonly Role[]).includes(who);
}

/** What an API token may be allowed to do; deliberately few. */
export const tokenScope = z.enum(['dwell:write', 'dwell:read', 'spot:read']);
export type TokenScope = z.infer<typeof tokenScope>;
