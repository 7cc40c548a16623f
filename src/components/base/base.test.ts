import { mount } from '@vue/test-utils';
import { afterEach, describe, expect, it } from 'vitest';
import { h, nextTick } from 'vue';
import AntennaMark from './AntennaMark.vue';
import ConfirmPreview from './ConfirmPreview.vue';
import DataState from './DataState.vue';
import DataTable from './DataTable.vue';
import DbValue from './DbValue.vue';
import FormField from './FormField.vue';
import ProblemNotice from './ProblemNotice.vue';
import UtcTime from './UtcTime.vue';

afterEach(() => (document.body.innerHTML = ''));

describe('DataState', () => {
  const problem = { message: 'The server did not answer.' };
  const face = (props: Partial<InstanceType<typeof DataState>['$props']>) =>
    mount(DataState, {
      props: {
        state: 'idle',
        hasContent: false,
        what: 'the spots',
        emptyTitle: 'No spots',
        emptyNext: 'Import a file.',
        ...props,
      },
      slots: { default: () => h('p', 'content') },
    });

  it('says what is loading until the first answer is there', () => {
    expect(face({ state: 'loading' }).get('[role=status]').text()).toBe('Loading the spots');
  });
  it('keeps old content, dimmed, while newer is on its way', () => {
    const shown = face({ state: 'loading', hasContent: true });
    expect([shown.text(), shown.get('.content').classes()]).toEqual(['content', ['content', 'stale']]);
    expect(shown.attributes('aria-busy')).toBe('true');
  });
  it('shows what went wrong above the old content, and asks again on request', async () => {
    const shown = face({ state: 'failed', hasContent: true, problem });
    expect(shown.text()).toContain('The server did not answer.');
    expect(shown.text()).toContain('content');
    await shown.get('button').trigger('click');
    expect(shown.emitted('retry')).toHaveLength(1);
  });
  it('says what to do next when there is nothing', () => {
    const shown = face({ state: 'ready', hasContent: true, isEmpty: true });
    expect(shown.text()).toBe('No spotsImport a file.');
  });
});

describe('DataTable', () => {
  const table = (props: object = {}) =>
    mount(DataTable<{ id: number; name: string; db: number }>, {
      props: {
        caption: 'Antennas',
        columns: [
          { key: 'name', label: 'Antenna', value: (row) => row.name, isRowHeader: true },
          { key: 'db', label: 'Gain', unit: 'dB', value: (row) => row.db, align: 'end', sortable: true },
        ],
        rows: [
          { id: 1, name: 'Loop', db: 3 },
          { id: 2, name: 'Wire', db: 1 },
        ],
        rowKey: (row) => row.id,
        ...props,
      },
    });
  const names = (shown: ReturnType<typeof table>) => shown.findAll('tbody th').map((cell) => cell.text());

  it('sorts by a press on the header, and the other way by a second one, telling screen readers', async () => {
    const shown = table();
    await shown.get('.sort').trigger('click');
    expect([names(shown), shown.findAll('thead th')[1]?.attributes('aria-sort')]).toEqual([
      ['Wire', 'Loop'],
      'ascending',
    ]);
    await shown.get('.sort').trigger('click');
    expect([names(shown), shown.findAll('thead th')[1]?.attributes('aria-sort')]).toEqual([
      ['Loop', 'Wire'],
      'descending',
    ]);
  });
  it('leaves the order to the server where the server sorts', async () => {
    const shown = table({ serverSorted: true });
    await shown.get('.sort').trigger('click');
    expect(names(shown)).toEqual(['Loop', 'Wire']);
    expect(shown.emitted('update:sorting')).toEqual([[{ key: 'db', descending: false }]]);
  });
  it('asks for more rows, and hides a column that is not wanted, but never the last one', async () => {
    const shown = table({ more: true, choosable: true });
    await shown.findAll('button').at(-1)?.trigger('click');
    expect(shown.emitted('more')).toHaveLength(1);
    const boxes = shown.findAll<HTMLInputElement>('.choices input');
    await boxes[1]?.trigger('change');
    expect(shown.findAll('thead th').map((cell) => cell.text())).toEqual(['Antenna']);
    expect(boxes[0]?.element.disabled).toBe(true);
  });
});

describe('ConfirmPreview', () => {
  const dialog = (props: object = {}) =>
    mount(ConfirmPreview, {
      attachTo: document.body,
      props: { open: true, title: 'Delete the dwell?', confirmWord: 'Delete', ...props },
      slots: { default: () => '42 spots lose their antenna.' },
    });

  it('shows what would change, and confirms only on the word', async () => {
    const shown = dialog();
    await nextTick();
    expect(shown.get('dialog').element.open).toBe(true);
    expect(shown.text()).toContain('42 spots lose their antenna.');
    await shown.get('form').trigger('submit');
    expect(shown.emitted('confirm')).toHaveLength(1);
    expect(shown.emitted('update:open')).toBeUndefined();
  });
  it('is taken back by its button and by the escape key', async () => {
    const shown = dialog();
    await shown.get('button').trigger('click');
    expect(shown.emitted('update:open')).toEqual([[false]]);
    await shown.setProps({ open: true });
    await shown.get('dialog').trigger('cancel');
    expect(shown.emitted('cancel')).toHaveLength(2);
  });
  it('cannot be confirmed unseen, nor taken back while the change is being made', async () => {
    const unseen = dialog({ notReady: true });
    expect(unseen.get<HTMLButtonElement>('[type=submit]').element.disabled).toBe(true);
    const busy = dialog({ busy: true });
    await busy.get('dialog').trigger('cancel');
    expect(busy.emitted('cancel')).toBeUndefined();
  });
});

it('FormField ties label, hint and error to its control', () => {
  const shown = mount(FormField, {
    props: { label: 'Frequency', unit: 'kHz', hint: 'Such as 1823.0.', error: 'Give a number.' },
    slots: { default: ({ field }: { field: object }) => h('input', field) },
  });
  const input = shown.get('input');
  expect(shown.get('label').attributes('for')).toBe(input.attributes('id'));
  const described = input.attributes('aria-describedby')?.split(' ') ?? [];
  expect(described.map((id) => shown.get(`[id="${id}"]`).text())).toEqual([
    'Give a number.',
    'Such as 1823.0.',
  ]);
  expect(input.attributes('aria-invalid')).toBe('true');
});

it('ProblemNotice names fields, gives the request to quote, and offers no retry that nobody handles', () => {
  const shown = mount(ProblemNotice, {
    props: {
      problem: {
        message: 'Not accepted.',
        errors: [{ path: 'guardSeconds', message: 'At most 600.' }],
        requestId: 'r-9',
      },
    },
  });
  expect(shown.attributes('role')).toBe('alert');
  expect(shown.get('li').text()).toBe('guardSeconds: At most 600.');
  expect(shown.text()).toContain('request r-9');
  expect(shown.find('button').exists()).toBe(false);
});

it('AntennaMark is named where no text stands beside it, and silent where one does', () => {
  const named = mount(AntennaMark, { props: { marker: 'V', label: 'Vertical' } });
  expect([named.attributes('role'), named.attributes('aria-label'), named.text()]).toEqual([
    'img',
    'Vertical',
    'V',
  ]);
  const silent = mount(AntennaMark, { props: { marker: 'V' } });
  expect([silent.attributes('aria-hidden'), silent.attributes('aria-label')]).toEqual(['true', undefined]);
});

it('DbValue puts the interval behind the number', () => {
  const shown = mount(DbValue, { props: { db: -1.84, interval: [-2.5, -1.1] } });
  expect(shown.text()).toBe('\u22121.8\u2009dB(\u22122.5 to \u22121.1\u2009dB)');
});

it('UtcTime is machine-readable, and shows the local time of the station where a zone is given', () => {
  const shown = mount(UtcTime, { props: { at: '2026-07-01T18:05:00Z', timeZone: 'Europe/Dublin' } });
  expect([shown.attributes('datetime'), shown.text()]).toEqual([
    '2026-07-01T18:05:00.000Z',
    '2026-07-01 18:05Z (19:05 local)',
  ]);
  expect(mount(UtcTime, { props: { at: null } }).text()).toBe('not known');
});
