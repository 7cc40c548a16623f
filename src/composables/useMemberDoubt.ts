import { ref, shallowRef } from 'vue';
import type { Ref, ShallowRef } from 'vue';
import type { Role } from '../../shared/contracts/permission.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { Doubt } from '../components/members/member-doubt.ts';
import { useMembersStore } from '../stores/members.ts';
import { useAnnouncer } from './useAnnouncer.ts';

export interface MemberDoubt {
  doubt: ShallowRef<Doubt | null>;
  /** The role chosen in the question about a role; the present one to begin with. */
  newRole: Ref<Role>;
  busy: Ref<boolean>;
  problem: ShallowRef<ApiProblem | null>;
  ask: (next: Doubt) => void;
  /** Does what was asked about. A failure is shown with the question, never thrown. */
  settle: () => Promise<void>;
}

/** What is asked about before a right changes or ends, and what becomes of it. */
export function useMemberDoubt(): MemberDoubt {
  const store = useMembersStore();
  const { announce } = useAnnouncer();
  const doubt = shallowRef<Doubt | null>(null);
  const newRole = ref<Role>('contester');
  const busy = ref(false);
  const problem = shallowRef<ApiProblem | null>(null);

  function ask(next: Doubt): void {
    problem.value = null;
    if (next.kind === 'role') newRole.value = next.member.role;
    doubt.value = next;
  }

  async function settle(): Promise<void> {
    const asked = doubt.value;
    if (!asked || busy.value) return;
    busy.value = true;
    problem.value = null;
    try {
      announce(await carryOut(asked));
      doubt.value = null;
    } catch (error) {
      problem.value = asProblem(error);
    } finally {
      busy.value = false;
    }
  }

  async function carryOut(asked: Doubt): Promise<string> {
    switch (asked.kind) {
      case 'role':
        await store.changeRole(asked.member.userId, newRole.value);
        return `${asked.member.name} is ${newRole.value} now.`;
      case 'remove':
        await store.remove(asked.member.userId);
        return `${asked.member.name} was removed.`;
      case 'withdraw':
        await store.withdraw(asked.invitation.id);
        return `The invitation to ${asked.invitation.email} was withdrawn.`;
      case 'revoke':
        await store.revoke(asked.token.id);
        return `${asked.token.name} was revoked.`;
    }
  }

  return { doubt, newRole, busy, problem, ask, settle };
}
