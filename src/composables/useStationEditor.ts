import { shallowRef } from 'vue';
import type { ShallowRef } from 'vue';
import * as antennaContract from '../../shared/contracts/antenna.ts';
import * as feedContract from '../../shared/contracts/feed.ts';
import * as receiverContract from '../../shared/contracts/receiver.ts';
import * as stationContract from '../../shared/contracts/station.ts';
import type { Antenna } from '../../shared/contracts/antenna.ts';
import type { Feed } from '../../shared/contracts/feed.ts';
import type { Receiver } from '../../shared/contracts/receiver.ts';
import * as drafts from '../components/station/station-drafts.ts';
import { useSessionStore } from '../stores/session.ts';
import { useStationSetupStore } from '../stores/station-setup.ts';
import { useStationStore } from '../stores/station.ts';
import { useAnnouncer } from './useAnnouncer.ts';
import { useSaving } from './useSaving.ts';
import type { Saving } from './useSaving.ts';

/** Which form is open, and what of; null: a new one. */
export type StationEdit =
  | { kind: 'antenna'; of: Antenna | null }
  | { kind: 'receiver'; of: Receiver | null }
  | { kind: 'feed'; of: Feed | null }
  | { kind: 'station'; part: 'position' | 'rules' };

/** `saved` is called once the server has it: the form then forgets its draft. */
type Save<Draft> = (draft: Draft, saved: () => void) => Promise<void>;

export interface StationEditor {
  editor: ShallowRef<StationEdit | null>;
  saving: Saving;
  edit: (next: StationEdit) => void;
  close: () => void;
  saveAntenna: Save<drafts.AntennaDraft>;
  saveReceiver: Save<drafts.ReceiverDraft>;
  saveFeed: Save<drafts.FeedDraft>;
  saveStation: Save<drafts.StationDraft>;
}

/** The forms of the Station page, one open at a time. A form stays open until what it says is stored. */
export function useStationEditor(): StationEditor {
  const here = useStationStore();
  const setup = useStationSetupStore();
  const session = useSessionStore();
  const { announce } = useAnnouncer();
  const saving = useSaving();
  const editor = shallowRef<StationEdit | null>(null);

  function edit(next: StationEdit): void {
    saving.reset();
    editor.value = next;
  }

  function close(): void {
    editor.value = null;
  }

  async function finish(worked: Promise<boolean>, saved: () => void, words: string): Promise<void> {
    if (!(await worked)) return;
    saved();
    close();
    announce(words);
  }

  function saveAntenna(draft: drafts.AntennaDraft, saved: () => void): Promise<void> {
    const of = editor.value?.kind === 'antenna' ? editor.value.of : null;
    const unit = session.lengthUnit;
    const body = drafts.antennaBody(draft, unit);
    if (!of) {
      const added = saving.save(antennaContract.addAntenna.body, body, () => setup.addAntenna(body));
      return finish(added, saved, `${draft.name} was added.`);
    }
    const changes = drafts.changesOf(body, drafts.antennaBody(drafts.antennaDraft(of, unit), unit));
    const done = saving.save(antennaContract.updateAntenna.body, changes, () =>
      setup.saveAntenna(of.id, changes),
    );
    return finish(done, saved, `${draft.name} was saved.`);
  }

  function saveReceiver(draft: drafts.ReceiverDraft, saved: () => void): Promise<void> {
    const of = editor.value?.kind === 'receiver' ? editor.value.of : null;
    const body = drafts.receiverBody(draft);
    if (!of) {
      const added = saving.save(receiverContract.addReceiver.body, body, () => setup.addReceiver(body));
      return finish(added, saved, `${draft.label} was added.`);
    }
    const changes = drafts.changesOf(body, drafts.receiverBody(drafts.receiverDraft(of)));
    const done = saving.save(receiverContract.updateReceiver.body, changes, () =>
      setup.saveReceiver(of.id, changes),
    );
    return finish(done, saved, `${draft.label} was saved.`);
  }

  function saveFeed(draft: drafts.FeedDraft, saved: () => void): Promise<void> {
    const of = editor.value?.kind === 'feed' ? editor.value.of : null;
    const body = drafts.feedBody(draft);
    if (!of) {
      const added = saving.save(feedContract.addFeed.body, body, () => setup.addFeed(body));
      return finish(added, saved, `${draft.name} was added.`);
    }
    const changes = drafts.changesOf(body, drafts.feedBody(drafts.feedDraft(of, '')));
    const done = saving.save(feedContract.updateFeed.body, changes, () => setup.saveFeed(of.id, changes));
    return finish(done, saved, `${draft.name} was saved.`);
  }

  function saveStation(draft: drafts.StationDraft, saved: () => void): Promise<void> {
    const stored = drafts.stationBody(drafts.stationDraft(here.station!));
    const changes = drafts.changesOf(drafts.stationBody(draft), stored);
    const done = saving.save(stationContract.updateStation.body, changes, () => setup.saveStation(changes));
    return finish(done, saved, 'The station was saved.');
  }

  return { editor, saving, edit, close, saveAntenna, saveReceiver, saveFeed, saveStation };
}
