import { computed, ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import { listNowOn } from '../../shared/contracts/dwell.ts';
import type { Dwell } from '../../shared/contracts/dwell.ts';
import type { StationEvent } from '../../shared/contracts/event.ts';
import { may as roleMay } from '../../shared/contracts/permission.ts';
import type { Permission, Role } from '../../shared/contracts/permission.ts';
import { listAntennas } from '../../shared/contracts/antenna.ts';
import { listFeeds } from '../../shared/contracts/feed.ts';
import { listReceivers } from '../../shared/contracts/receiver.ts';
import { readStation } from '../../shared/contracts/station.ts';
import type { Antenna } from '../../shared/contracts/antenna.ts';
import type { Feed } from '../../shared/contracts/feed.ts';
import type { Receiver } from '../../shared/contracts/receiver.ts';
import type { Station } from '../../shared/contracts/station.ts';
import { request } from '../api/client.ts';
import { asProblem, isAbort } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import type { LoadState } from '../composables/useLoad.ts';
import { useSessionStore } from './session.ts';

/** The station on the screen (from the route), its receivers and antennas, and what each receiver is on now. */
export const useStationStore = defineStore('station', () => {
  const session = useSessionStore();
  const stationId = ref<number | null>(null);
  const state = ref<LoadState>('idle');
  const problem = shallowRef<ApiProblem | null>(null);
  const station = shallowRef<Station | null>(null);
  const receivers = shallowRef<Receiver[]>([]);
  const antennas = shallowRef<Antenna[]>([]);
  const feeds = shallowRef<Feed[]>([]);
  const nowOnState = ref<LoadState>('idle');
  const nowOn = shallowRef<{ receiverId: number; dwell: Dwell | null }[]>([]);
  let opening = new AbortController();

  const membership = computed(
    () => session.profile?.memberships.find((each) => each.stationId === stationId.value) ?? null,
  );
  const role = computed<Role | null>(() => membership.value?.role ?? null);
  const activeReceivers = computed(() => receivers.value.filter((each) => each.retiredAt === null));
  const antennaById = computed(() => new Map(antennas.value.map((each) => [each.id, each])));
  const receiverById = computed(() => new Map(receivers.value.map((each) => [each.id, each])));

  /** Whether this person may do that here. For hiding what would be refused; the server decides. */
  function may(permission: Permission): boolean {
    return role.value !== null && roleMay(role.value, permission);
  }

  /** Shows another station. Nothing of the former one stays. Never rejects. */
  async function open(id: number): Promise<void> {
    if (stationId.value === id && state.value !== 'failed') return;
    close();
    stationId.value = id;
    await reload();
  }

  function close(): void {
    opening.abort();
    stationId.value = null;
    state.value = 'idle';
    nowOnState.value = 'idle';
    problem.value = null;
    station.value = null;
    receivers.value = [];
    antennas.value = [];
    feeds.value = [];
    nowOn.value = [];
  }

  /** Station, receivers and antennas anew: after a change of any of them. Never rejects. */
  async function reload(): Promise<void> {
    const id = stationId.value;
    if (id === null) return;
    opening.abort();
    opening = new AbortController();
    const input = { params: { stationId: id }, signal: opening.signal };
    state.value = 'loading';
    void reloadNowOn();
    void reloadFeeds();
    try {
      const [nextStation, nextReceivers, nextAntennas] = await Promise.all([
        request(readStation, input),
        request(listReceivers, input),
        request(listAntennas, input),
      ]);
      station.value = nextStation;
      receivers.value = nextReceivers.items;
      antennas.value = nextAntennas.items;
      problem.value = null;
      state.value = 'ready';
    } catch (error) {
      if (isAbort(error) || input.signal.aborted) return;
      problem.value = asProblem(error);
      state.value = 'failed';
    }
  }

  async function reloadNowOn(): Promise<void> {
    const id = stationId.value;
    if (id === null) return;
    nowOnState.value = 'loading';
    try {
      const { items } = await request(listNowOn, { params: { stationId: id }, signal: opening.signal });
      if (stationId.value !== id) return;
      nowOn.value = items;
      nowOnState.value = 'ready';
    } catch (error) {
      if (!isAbort(error) && stationId.value === id) nowOnState.value = 'failed';
    }
  }

  async function reloadFeeds(): Promise<void> {
    const id = stationId.value;
    if (id === null) return;
    try {
      const { items } = await request(listFeeds, { params: { stationId: id }, signal: opening.signal });
      if (stationId.value === id) feeds.value = items;
    } catch {
      // The status line then shows no hint about feeds; the Station page asks again and says why.
      if (stationId.value === id) feeds.value = [];
    }
  }

  /** Keeps the frame true: the frame's view feeds the station's events in here. */
  function follow(event: StationEvent): void {
    if (event.type === 'switch') void reloadNowOn();
    else if (event.type === 'station') void reload();
    else if (event.type === 'feed') void reloadFeeds();
  }

  return {
    stationId,
    state,
    problem,
    station,
    receivers,
    activeReceivers,
    receiverById,
    antennas,
    antennaById,
    feeds,
    nowOn,
    nowOnState,
    membership,
    role,
    may,
    open,
    close,
    reload,
    reloadNowOn,
    reloadFeeds,
    follow,
  };
});
