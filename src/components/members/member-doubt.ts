import type { Role } from '../../../shared/contracts/permission.ts';

/** What is asked about before it is done. */
export type Doubt =
  | { kind: 'role' | 'remove'; member: { userId: string; name: string; role: Role } }
  | { kind: 'withdraw'; invitation: { id: string; email: string } }
  | { kind: 'revoke'; token: { id: string; name: string } };
