import { mount } from '@vue/test-utils';
import { nextTick } from 'vue';
import { describe, expect, it } from 'vitest';
import type { Dwell } from '../../../shared/contracts/dwell.ts';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Receiver } from '../../../shared/contracts/receiver.ts';
import DwellPanel from './DwellPanel.vue';
import DwellTable from './DwellTable.vue';
import LogHistory from './LogHistory.vue';
import { offeredAntennas } from './now-on.ts';
import NowOnCard from './NowOnCard.vue';
import PreviewWords from './PreviewWords.vue';
import TimeControls from './TimeControls.vue';
import TimeLine from './TimeLine.vue';

const antenna = (id: number, name: string, marker: string, inServiceTo: string | null = null): Antenna => ({
  ...{ id, name, marker, kind: 'long wire', headingDeg: null, beamwidthDeg: null, lengthM: null },
  ...{ heightM: null, notes: '', inServiceFrom: null, inServiceTo },
});
const antennas = [
  antenna(1, 'North-east wire', 'N'),
  antenna(2, 'Vertical', 'V'),
  antenna(3, 'West wire', 'W'),
];
const antennaById = new Map(antennas.map((each) => [each.id, each]));
const receiver = (id: number): Receiver => ({
  ...{ id, callSign: `EI7QS${'ABC'[id - 1]}`, label: `Receiver ${id}`, notes: '', retiredAt: null },
});
const dwell = (
  id: number,
  receiverId: number,
  antennaId: number,
  from: string,
  to: string | null,
): Dwell => ({
  ...{ id, receiverId, antennaId, source: 'hand', note: '' },
  startsAt: `2026-11-30T${from}Z`,
  endsAt: to === null ? null : `2026-11-30T${to}Z`,
});
const nowMs = Date.parse('2026-11-30T19:00:00Z');

describe('the now-on panel of a receiver', () => {
  const mountCard = (change: Partial<InstanceType<typeof NowOnCard>['$props']> = {}) =>
    mount(NowOnCard, {
      props: {
        now: { receiver: receiver(1), dwell: dwell(5, 1, 2, '18:18:00', null) },
        ...{ antennas, nowMs, timeZone: 'Europe/Dublin', mayWrite: true, busy: false },
        ...{ outcome: null, problem: null },
        ...change,
      },
    });

  it('says what is on, since when in UTC and local time, and for how long', () => {
    const text = mountCard({ timeZone: 'Europe/Paris' }).find('header').text().replace(/\s+/g, ' ');
    expect(text).toContain('Vertical');
    expect(text).toContain('since 18:18Z (19:18 local), 42 min');
  });

  it('logs an antenna at one press, and disconnected likewise', async () => {
    const card = mountCard();
    const buttons = card.findAll('.buttons button');
    expect(buttons.map((button) => button.attributes('aria-pressed'))).toEqual([
      'false',
      'true',
      'false',
      'false',
    ]);
    await buttons[2]!.trigger('click');
    await buttons[3]!.trigger('click');
    expect(card.emitted('switch')).toEqual([
      [{ receiverId: 1, antennaId: 3, at: null }],
      [{ receiverId: 1, antennaId: null, at: null }],
    ]);
  });

  it('logs a past time once it is given, on the last day that had it', async () => {
    const card = mountCard({ nowMs: Date.parse('2026-12-01T00:10:00Z') });
    await card.find('.past > button').trigger('click');
    await card.find('.past input').setValue('23:50');
    await card.findAll('.buttons button')[0]!.trigger('click');
    expect(card.emitted('switch')).toEqual([
      [{ receiverId: 1, antennaId: 1, at: '2026-11-30T23:50:00.000Z' }],
    ]);
  });

  it('says beside the field that a time is unreadable, and logs nothing', async () => {
    const card = mountCard();
    await card.find('.past > button').trigger('click');
    await card.find('.past input').setValue('half past');
    await card.findAll('.buttons button')[0]!.trigger('click');
    expect(card.emitted('switch')).toBeUndefined();
    expect(card.find('.past .error').text()).toContain('This is no time.');
  });

  it("shows the server's refusal of a past time beside the field and keeps what was typed", async () => {
    const card = mountCard();
    await card.find('.past > button').trigger('click');
    await card.find('.past input').setValue('17:00');
    const message = '2026-11-30 17:00:00Z lies inside the log.';
    await card.setProps({ problem: { message, errors: [{ path: 'body.at', message }] } });
    expect(card.find('.past .error').text()).toBe(message);
    expect((card.find('.past input').element as HTMLInputElement).value).toBe('17:00');
    expect(card.find('.problem').exists()).toBe(false);
  });

  it('offers undo while it is possible', async () => {
    const card = mountCard({
      outcome: { words: 'Logged: Receiver 1 on West wire at 19:00:00Z.', warning: null, canUndo: true },
    });
    await card.find('.outcome button').trigger('click');
    expect(card.emitted('undo')).toHaveLength(1);
  });

  it('has no buttons for whoever may only read', () => {
    expect(mountCard({ mayWrite: false }).findAll('button')).toHaveLength(0);
  });

  it('offers antennas in service by their letters, and one out of service that is in use', () => {
    const old = antenna(4, 'Old wire', 'O', '2025-03-01');
    const names = (inUse: number[]) =>
      offeredAntennas([...antennas, old], '2026-11-30', new Set(inUse)).map(({ marker }) => marker);
    expect(names([])).toEqual(['N', 'V', 'W']);
    expect(names([4])).toEqual(['N', 'O', 'V', 'W']);
  });
});

describe('the time line', () => {
  const range = { fromMs: Date.parse('2026-11-30T17:00:00Z'), toMs: Date.parse('2026-11-30T21:00:00Z') };
  const mountLine = () =>
    mount(TimeLine, {
      props: {
        range,
        receivers: [receiver(1), receiver(2)],
        dwells: [
          dwell(1, 1, 1, '17:00:00', '18:00:00'),
          dwell(2, 1, 2, '18:30:00', null),
          dwell(3, 2, 3, '17:00:00', null),
        ],
        antennas: antennaById,
        place: { latitude: 53.5, longitude: -9 },
        ...{ timeZone: 'Europe/Dublin', guardSeconds: 20, nowMs, stale: false, chosenKey: null },
      },
    });
  const readout = (line: ReturnType<typeof mountLine>) => line.find('.readout').text();

  it('says in words what it shows', () => {
    expect(mountLine().find('p.visually-hidden').text()).toBe(
      'Switch log 2026-11-30 17:00Z to 21:00Z. Receiver 1: 2 dwells, 1 gap. Receiver 2: 1 dwell, 0 gaps.',
    );
  });

  it('walks from part to part and from row to row by arrow keys', async () => {
    const line = mountLine();
    const field = line.find('[role="listbox"]');
    await field.trigger('keydown', { key: 'Home' });
    expect(readout(line)).toBe('Receiver 1: North-east wire, 2026-11-30 17:00Z to 18:00Z, 1\u2009h');
    await field.trigger('keydown', { key: 'ArrowRight' });
    expect(readout(line)).toBe('Receiver 1: No dwell, 2026-11-30 18:00Z to 18:30Z, 30\u2009min');
    expect(line.find('[role="option"]').text()).toBe(readout(line));
    await field.trigger('keydown', { key: 'ArrowDown' });
    expect(readout(line)).toBe('Receiver 2: West wire, since 2026-11-30 17:00Z');
  });

  it('opens what Enter is pressed on', async () => {
    const line = mountLine();
    const field = line.find('[role="listbox"]');
    await field.trigger('keydown', { key: 'End' });
    await field.trigger('keydown', { key: 'Enter' });
    expect(line.emitted('choose')).toMatchObject([[1, { kind: 'dwell', dwell: { id: 2 } }]]);
  });

  it('zooms by plus and minus about the middle and moves by half its length', async () => {
    const line = mountLine();
    const field = line.find('[role="listbox"]');
    await field.trigger('keydown', { key: '+' });
    await field.trigger('keydown', { key: 'PageDown' });
    const hour = 3_600_000;
    expect(line.emitted('range')).toEqual([
      [{ fromMs: range.fromMs + hour, toMs: range.toMs - hour }, true],
      [{ fromMs: range.fromMs + 2 * hour, toMs: range.toMs + 2 * hour }, true],
    ]);
  });

  it('labels a gap and hatches the guard of a dwell that begins in view', () => {
    const line = mountLine();
    expect(line.findAll('.gap-word').map((word) => word.text())).toEqual(['no dwell']);
    expect(line.findAll('rect[fill$="-guard)"]').length).toBeGreaterThan(0);
    expect(line.findAll('line.now')).toHaveLength(2);
  });

  it('offers three usual stretches and buttons for moving and zooming', async () => {
    const controls = mount(TimeControls, { props: { range, preset: 'tonight', nowMs } });
    const [tonight, lastNight] = controls.findAll('[aria-label="Stretch of time"] button');
    expect(tonight!.attributes('aria-pressed')).toBe('true');
    await lastNight!.trigger('click');
    await controls.find('[aria-label="Earlier"]').trigger('click');
    expect(controls.emitted('preset')).toEqual([['last-night']]);
    expect(controls.emitted('range')).toEqual([
      [{ fromMs: range.fromMs - 7_200_000, toMs: range.toMs - 7_200_000 }],
    ]);
  });
});

describe('the correction panel', () => {
  const props = {
    ...{ gap: null, receiver: receiver(1), antennas, timeZone: 'Europe/Dublin', nowMs },
    ...{ mayWrite: true, busy: false, refused: null },
  };
  const closed = dwell(7, 1, 1, '18:00:00', '18:30:00');

  it('proposes an edit that names only what was changed', async () => {
    const panel = mount(DwellPanel, { props: { ...props, dwell: closed } });
    await panel.find('form select').setValue('2');
    await panel.find('form').trigger('submit');
    expect(panel.emitted('propose')).toEqual([
      [{ action: 'edit', dwellId: 7, antennaId: 2 }, 'Change this dwell'],
    ]);
  });

  it('proposes a split, a deletion, and for an open dwell an end', async () => {
    const panel = mount(DwellPanel, { props: { ...props, dwell: dwell(8, 1, 1, '18:00:00', null) } });
    await panel.find('[aria-label="Split"] select').setValue('3');
    await panel.find('[aria-label="Split"]').trigger('submit');
    await panel.find('[aria-label="End"] input').setValue('18:45');
    await panel.find('[aria-label="End"]').trigger('submit');
    await panel.find('.button.danger').trigger('click');
    expect(panel.emitted('propose')!.map(([change]) => change)).toEqual([
      { action: 'split', dwellId: 8, at: '2026-11-30T18:30:00.000Z', antennaId: 3 },
      { action: 'close', dwellId: 8, at: '2026-11-30T18:45:00.000Z' },
      { action: 'delete', dwellId: 8 },
    ]);
  });

  it('adds a dwell that fills a gap', async () => {
    const gap = { receiverId: 1, fromMs: Date.parse('2026-11-30T18:30:00Z'), toMs: nowMs };
    const panel = mount(DwellPanel, { props: { ...props, dwell: null, gap } });
    await panel.find('form').trigger('submit');
    expect(panel.emitted('propose')).toMatchObject([
      [
        {
          action: 'add',
          dwell: {
            receiverId: 1,
            antennaId: 1,
            startsAt: '2026-11-30T18:30:00.000Z',
            endsAt: '2026-11-30T19:00:00.000Z',
          },
        },
        'Add this dwell',
      ],
    ]);
  });

  it('shows an overlap beside the time that was moved and keeps what was typed', async () => {
    const panel = mount(DwellPanel, { props: { ...props, dwell: closed } });
    const end = () => panel.findAll('form input.input')[1]!;
    await end().setValue('18:45');
    await panel.find('form').trigger('submit');
    const change = { action: 'edit' as const, dwellId: 7, endsAt: '2026-11-30T18:45:00.000Z' };
    const message = 'Two antennas at once cannot be. Shorten or delete one of them.';
    await panel.setProps({
      refused: { change, problem: { message, errors: [{ path: 'body.changes.0', message }] } },
    });
    expect(panel.findAll('.error').map((error) => error.text())).toEqual([message]);
    expect(end().attributes('aria-invalid')).toBe('true');
    expect((end().element as HTMLInputElement).value).toBe('18:45');
  });

  it('keeps what was typed when the log is loaded anew', async () => {
    const panel = mount(DwellPanel, { props: { ...props, dwell: closed } });
    const note = () => panel.findAll('form input.input')[2]!;
    await note().setValue('Rain on the feed line');
    await panel.setProps({ dwell: { ...closed } });
    expect((note().element as HTMLInputElement).value).toBe('Rain on the feed line');
  });

  it('has no fields for whoever may only read', () => {
    const panel = mount(DwellPanel, { props: { ...props, dwell: closed, mayWrite: false } });
    expect(panel.findAll('form')).toHaveLength(0);
    expect(panel.text()).toContain('Your role can read the switch log and not change it.');
  });
});

describe('the list, the history and the preview', () => {
  it('lists the newest dwell first and opens one', async () => {
    const table = mount(DwellTable, {
      props: {
        dwells: [dwell(1, 1, 1, '17:00:00', '18:00:00'), dwell(2, 1, 2, '18:30:00', null)],
        receivers: new Map([[1, receiver(1)]]),
        antennas: antennaById,
        ...{ nowMs, chosenId: null, mayWrite: true },
      },
    });
    const rows = table.findAll('tbody tr').map((row) => row.text().replace(/\s+/g, ' '));
    expect(rows[0]).toContain('2026-11-30 18:30:00Z');
    expect(rows[0]).toContain('still on');
    expect(rows[1]).toContain('North-east wire');
    await table.findAll('tbody button')[1]!.trigger('click');
    expect(table.emitted('choose')).toMatchObject([[{ id: 1 }]]);
  });

  it('shows thousands of dwells in parts', async () => {
    const dwells = Array.from({ length: 450 }, (_, i) => ({
      ...dwell(i + 1, 1, 1, '17:00:00', '18:00:00'),
      startsAt: new Date(nowMs - (450 - i) * 60_000).toISOString(),
    }));
    const table = mount(DwellTable, {
      props: { dwells, receivers: new Map(), antennas: antennaById, nowMs, chosenId: null, mayWrite: false },
    });
    expect(table.findAll('tbody tr')).toHaveLength(200);
    await table.findAll('button').at(-1)!.trigger('click');
    await nextTick();
    expect(table.findAll('tbody tr')).toHaveLength(400);
  });

  it('offers undo only where the server says that it is possible', async () => {
    const entries = [
      { batchId: 'a', at: '2026-11-30T18:55:00Z', who: 'Orla', summary: 'Deleted a dwell.', canUndo: true },
      {
        batchId: 'b',
        at: '2026-11-30T18:50:00Z',
        who: 'Niall',
        summary: 'Import of a file: 9 dwells.',
        canUndo: false,
      },
    ];
    const history = mount(LogHistory, {
      props: { entries, nowMs, mayWrite: true, hasMore: false, loading: false, busyId: null },
    });
    expect(history.text()).toContain('Orla, 2026-11-30 18:55Z (5\u2009min ago)');
    await history.find('[aria-label="Undo: Deleted a dwell."]').trigger('click');
    expect(history.emitted('undo')).toEqual([['a']]);
    expect(history.findAll('button')).toHaveLength(1);
  });

  it('shows warnings below the counts of a preview, and that it is counting before', async () => {
    const words = mount(PreviewWords, { props: { preview: null } });
    expect(words.text()).toBe('Counting the spots that this touches');
    await words.setProps({
      preview: {
        ...{ spotsChangingAntenna: 1, spotsGainingAntenna: 0, spotsLosingAntenna: 0, spotsChangingGuard: 0 },
        ...{ blocksTouched: 1, nightsTouched: [], warnings: ['Old wire was in service to 2025-03-01.'] },
      },
    });
    expect(words.findAll('li').map((line) => line.text())).toEqual([
      '1 spot changes antenna',
      '1 block touched',
    ]);
    expect(words.find('.warning').text()).toBe('Note: Old wire was in service to 2025-03-01.');
  });
});
