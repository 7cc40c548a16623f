import { computed, ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import type { BodyInput, ReplyOf } from '../../shared/contracts/endpoint.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import * as auditContract from '../../shared/contracts/audit.ts';
import * as memberContract from '../../shared/contracts/member.ts';
import * as tokenContract from '../../shared/contracts/token.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';

export type Member = ReplyOf<typeof memberContract.listMembers>['members'][number];
export type Invitation = ReplyOf<typeof memberContract.listMembers>['invitations'][number];
export type ApiToken = ReplyOf<typeof tokenContract.listTokens>['items'][number];
export type AuditEntry = ReplyOf<typeof auditContract.listAudit>['items'][number];

const auditPage = 50;

/** People, tokens and the audit trail of one station. Changes reject with an ApiProblem for who asked for them. */
export const useMembersStore = defineStore('members', () => {
  const stationId = ref<number | null>(null);
  const members = shallowRef<Member[]>([]);
  const invitations = shallowRef<Invitation[]>([]);
  const tokens = shallowRef<ApiToken[]>([]);
  const audit = shallowRef<AuditEntry[]>([]);
  const auditNext = ref<string | null>(null);
  const auditMore = ref(false);
  const people = part();
  const keys = part();
  const trail = part();
  let opening = new AbortController();

  const managers = computed(() => members.value.filter(({ role }) => role === 'manager').length);

  /** Nothing of the former station stays. */
  function open(id: number): void {
    if (stationId.value === id) return;
    opening.abort();
    opening = new AbortController();
    stationId.value = id;
    members.value = [];
    invitations.value = [];
    tokens.value = [];
    audit.value = [];
    auditNext.value = null;
    for (const each of [people, keys, trail]) {
      each.state.value = 'idle';
      each.problem.value = null;
    }
  }

  const target = () => {
    if (stationId.value === null) throw new Error('No station is open.');
    return { stationId: stationId.value };
  };

  /** Never rejects: a failure becomes the part's state. An answer for a former station is dropped. */
  async function load(of: Part, ask: (signal: AbortSignal) => Promise<() => void>): Promise<void> {
    const { signal } = opening;
    of.state.value = 'loading';
    try {
      const put = await ask(signal);
      if (signal.aborted) return;
      put();
      of.problem.value = null;
      of.state.value = 'ready';
    } catch (error) {
      if (isAbort(error) || signal.aborted) return;
      of.problem.value = asProblem(error);
      of.state.value = 'failed';
    }
  }

  function loadPeople(): Promise<void> {
    return load(people, async (signal) => {
      const answer = await request(memberContract.listMembers, { params: target(), signal });
      return () => {
        members.value = answer.members;
        invitations.value = answer.invitations;
      };
    });
  }
  function loadTokens(): Promise<void> {
    return load(keys, async (signal) => {
      const { items } = await request(tokenContract.listTokens, { params: target(), signal });
      return () => (tokens.value = items);
    });
  }
  /** From the newest entry on; what was read of older ones is let go. */
  function loadAudit(): Promise<void> {
    return load(trail, async (signal) => {
      const page = await request(auditContract.listAudit, {
        params: target(),
        query: { limit: auditPage },
        signal,
      });
      return () => {
        audit.value = page.items;
        auditNext.value = page.next;
      };
    });
  }
  async function loadMoreAudit(): Promise<void> {
    const after = auditNext.value;
    if (after === null || auditMore.value) return;
    auditMore.value = true;
    await load(trail, async (signal) => {
      const page = await request(auditContract.listAudit, {
        params: target(),
        query: { limit: auditPage, after },
        signal,
      });
      return () => {
        audit.value = [...audit.value, ...page.items];
        auditNext.value = page.next;
      };
    });
    auditMore.value = false;
  }

  async function invite(body: BodyInput<typeof memberContract.inviteMember>): Promise<void> {
    await request(memberContract.inviteMember, { params: target(), body });
    await loadPeople();
  }
  async function withdraw(invitationId: string): Promise<void> {
    await request(memberContract.withdrawInvitation, { params: { ...target(), invitationId } });
    await loadPeople();
  }
  async function changeRole(userId: string, role: Role): Promise<void> {
    await request(memberContract.changeMemberRole, { params: { ...target(), userId }, body: { role } });
    await loadPeople();
  }
  async function remove(userId: string): Promise<void> {
    await request(memberContract.removeMember, { params: { ...target(), userId } });
    await loadPeople();
  }
  /** The secret is in this answer and nowhere else, this store included. */
  async function makeToken(body: BodyInput<typeof tokenContract.makeToken>): Promise<string> {
    const { secret } = await request(tokenContract.makeToken, { params: target(), body });
    await loadTokens();
    return secret;
  }
  async function revoke(tokenId: string): Promise<void> {
    await request(tokenContract.revokeToken, { params: { ...target(), tokenId } });
    await loadTokens();
  }

  return {
    stationId,
    members,
    invitations,
    managers,
    tokens,
    audit,
    auditNext,
    auditMore,
    peopleState: people.state,
    peopleProblem: people.problem,
    tokensState: keys.state,
    tokensProblem: keys.problem,
    auditState: trail.state,
    auditProblem: trail.problem,
    open,
    loadPeople,
    loadTokens,
    loadAudit,
    loadMoreAudit,
    invite,
    withdraw,
    changeRole,
    remove,
    makeToken,
    revoke,
  };
});

type Part = ReturnType<typeof part>;
function part() {
  return { state: ref<LoadState>('idle'), problem: shallowRef<ApiProblem | null>(null) };
}
