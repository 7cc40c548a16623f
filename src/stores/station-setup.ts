import { ref, shallowRef } from 'vue';
import { defineStore } from 'pinia';
import type { BodyInput, ReplyOf } from '../../shared/contracts/endpoint.ts';
import * as antennaContract from '../../shared/contracts/antenna.ts';
import * as feedContract from '../../shared/contracts/feed.ts';
import * as positionContract from '../../shared/contracts/position.ts';
import * as receiverContract from '../../shared/contracts/receiver.ts';
import * as stationContract from '../../shared/contracts/station.ts';
import { download, request } from '../api/client.ts';
import { asProblem } from '../api/problem.ts';
import type { ApiProblem } from '../api/problem.ts';
import { saveBlob } from '../composables/save-file.ts';
import type { LoadState } from '../composables/useLoad.ts';
import { useStationStore } from './station.ts';

export type PositionOverride = ReplyOf<typeof positionContract.listPositionOverrides>['items'][number];

/** Changes of the station on the screen. Each rejects with an ApiProblem for its form, and else shows at once. */
export const useStationSetupStore = defineStore('station-setup', () => {
  const here = useStationStore();
  const corrections = shallowRef<PositionOverride[]>([]);
  const correctionsState = ref<LoadState>('idle');
  const correctionsProblem = shallowRef<ApiProblem | null>(null);
  let correctionsOf: number | null = null;

  /** The station that a change is meant for: the one on the screen when it was asked, whatever shows later. */
  function params(): { stationId: number } {
    if (here.stationId === null) throw new Error('No station is open.');
    return { stationId: here.stationId };
  }

  async function saveStation(body: BodyInput<typeof stationContract.updateStation>): Promise<void> {
    await request(stationContract.updateStation, { params: params(), body });
    await here.reload();
  }

  async function addReceiver(body: BodyInput<typeof receiverContract.addReceiver>): Promise<void> {
    await request(receiverContract.addReceiver, { params: params(), body });
    await here.reload();
  }
  async function saveReceiver(
    receiverId: number,
    body: BodyInput<typeof receiverContract.updateReceiver>,
  ): Promise<void> {
    await request(receiverContract.updateReceiver, { params: { ...params(), receiverId }, body });
    await here.reload();
  }

  async function addAntenna(body: BodyInput<typeof antennaContract.addAntenna>): Promise<void> {
    await request(antennaContract.addAntenna, { params: params(), body });
    await here.reload();
  }
  async function saveAntenna(
    antennaId: number,
    body: BodyInput<typeof antennaContract.updateAntenna>,
  ): Promise<void> {
    await request(antennaContract.updateAntenna, { params: { ...params(), antennaId }, body });
    await here.reload();
  }
  async function removeAntenna(antennaId: number): Promise<void> {
    await request(antennaContract.removeAntenna, { params: { ...params(), antennaId } });
    await here.reload();
  }

  async function addFeed(body: BodyInput<typeof feedContract.addFeed>): Promise<void> {
    await request(feedContract.addFeed, { params: params(), body });
    await here.reloadFeeds();
  }
  async function saveFeed(feedId: number, body: BodyInput<typeof feedContract.updateFeed>): Promise<void> {
    await request(feedContract.updateFeed, { params: { ...params(), feedId }, body });
    await here.reloadFeeds();
  }
  async function removeFeed(feedId: number): Promise<void> {
    await request(feedContract.removeFeed, { params: { ...params(), feedId } });
    await here.reloadFeeds();
  }
  async function saveRefusals(feedId: number): Promise<void> {
    const { blob, fileName } = await download(feedContract.downloadFeedRefusals, {
      params: { ...params(), feedId },
    });
    saveBlob(blob, fileName ?? `feed-${feedId}-refused.csv`);
  }

  /** Never rejects: a failure becomes the state. */
  async function loadCorrections(): Promise<void> {
    const wanted = params();
    if (correctionsOf !== wanted.stationId) corrections.value = [];
    correctionsOf = wanted.stationId;
    correctionsState.value = 'loading';
    try {
      const { items } = await request(positionContract.listPositionOverrides, { params: wanted });
      if (correctionsOf !== wanted.stationId) return;
      corrections.value = items;
      correctionsProblem.value = null;
      correctionsState.value = 'ready';
    } catch (error) {
      if (correctionsOf !== wanted.stationId) return;
      correctionsProblem.value = asProblem(error);
      correctionsState.value = 'failed';
    }
  }
  async function addCorrection(body: BodyInput<typeof positionContract.addPositionOverride>): Promise<void> {
    await request(positionContract.addPositionOverride, { params: params(), body });
    await loadCorrections();
  }
  async function removeCorrection(positionId: number): Promise<void> {
    await request(positionContract.removePositionOverride, { params: { ...params(), positionId } });
    await loadCorrections();
  }

  return {
    corrections,
    correctionsState,
    correctionsProblem,
    saveStation,
    addReceiver,
    saveReceiver,
    addAntenna,
    saveAntenna,
    removeAntenna,
    addFeed,
    saveFeed,
    removeFeed,
    saveRefusals,
    loadCorrections,
    addCorrection,
    removeCorrection,
  };
});
