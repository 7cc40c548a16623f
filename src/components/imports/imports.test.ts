import { mount, RouterLinkStub } from '@vue/test-utils';
import { afterEach, describe, expect, it } from 'vitest';
import { nextTick } from 'vue';
import type {
  DwellMapping,
  ImportMapping,
  ImportPreview,
  SpotMapping,
} from '../../../shared/contracts/import.ts';
import ColumnFields from './ColumnFields.vue';
import FormatFields from './FormatFields.vue';
import ImportProgress from './ImportProgress.vue';
import ImportResult from './ImportResult.vue';
import ImportTable from './ImportTable.vue';
import { countParts, countsSentence, undoSentences } from './import-words.ts';
import MappingPanel from './MappingPanel.vue';
import MappingPreview from './MappingPreview.vue';
import NameFields from './NameFields.vue';
import { recordFixture } from './record.fixture.ts';
import RefusalPanel from './RefusalPanel.vue';
import SavedMappings from './SavedMappings.vue';
import UploadList from './UploadList.vue';
import UploadPanel from './UploadPanel.vue';

afterEach(() => (document.body.innerHTML = ''));

const receivers = [
  { id: 1, callSign: 'EI7QSA', label: 'Switch port 1', notes: '', retiredAt: null },
  { id: 2, callSign: 'EI7QSC', label: 'Switch port 2', notes: '', retiredAt: null },
];
const antennas = [
  {
    id: 5,
    name: 'Vertical',
    marker: 'V',
    kind: 'vertical' as const,
    headingDeg: null,
    beamwidthDeg: null,
    lengthM: null,
    heightM: null,
    notes: '',
    inServiceFrom: null,
    inServiceTo: null,
  },
];
const spots: SpotMapping = {
  kind: 'spots',
  layout: 'table',
  format: {
    encoding: 'utf-8',
    delimiter: ',',
    quote: '"',
    hasHeader: true,
    skipLines: 0,
    decimalComma: false,
  },
  time: { kind: 'iso', zone: 'UTC' },
  columns: { time: 'utc', receiver: 'rx', call: 'call', freq: 'khz', snr: 'snr' },
  freqUnit: 'kHz',
  receiverNames: {},
  otherReceivers: 'refuse',
  timeKnownTo: 'second',
};
const dwells: DwellMapping = {
  kind: 'dwells',
  layout: 'table',
  format: spots.format,
  time: spots.time,
  columns: { receiver: 'rx', antenna: 'antenna', startsAt: 'from' },
  receiverNames: {},
  antennaNames: {},
  unknownNames: 'refuse',
};
const preview: ImportPreview = {
  guess: spots,
  header: ['utc', 'rx', 'call', 'khz', 'snr', 'weather'],
  rows: [
    { lineNo: 2, raw: '', cells: ['2026-11-30T18:05:00Z', 'EI7QSA', 'EA8QSH', '1824.5', '21', 'rain'] },
    { lineNo: 3, raw: '', cells: ['2026-11-30T18:06:00Z', 'EI7QSA', 'EA8QSH', '9999.9', '21', 'rain'] },
  ],
  read: [
    {
      lineNo: 2,
      ok: true,
      reason: null,
      field: null,
      values: {
        time: '2026-11-30T18:05:00Z',
        receiver: 'EI7QSA',
        call: 'EA8QSH',
        freq: '1824.5 kHz',
        band: '160 m',
        snr: '21 dB',
        mode: 'other',
        speed: '',
      },
    },
    {
      lineNo: 3,
      ok: false,
      reason: 'The frequency "9999.9" is in no amateur band.',
      field: 'freq',
      values: {},
    },
  ],
  unknownReceivers: [],
  unknownAntennas: [],
};
/** The control of the field with that label. */
const control = (shown: ReturnType<typeof mount>, label: string) => {
  const found = shown.findAll('label').find((each) => each.text().startsWith(label))!;
  return shown.get<HTMLSelectElement>(`#${found.attributes('for')}`);
};
const sent = (shown: ReturnType<typeof mount>) =>
  shown.emitted<[ImportMapping]>('update:modelValue')?.at(-1)?.[0] as ImportMapping;

describe('bringing in a file', () => {
  it('takes files that are dropped, and shows while they hover that this is the place', async () => {
    const shown = mount(UploadPanel, { props: { kind: 'spots' } });
    await shown.get('section').trigger('dragenter');
    await shown.get('p').trigger('dragenter');
    await shown.get('section').trigger('dragleave');
    expect(shown.get('section').classes()).toContain('over');
    const file = new File(['a'], 'night.csv');
    await shown.get('section').trigger('drop', { dataTransfer: { files: [file] } });
    expect(shown.emitted('send')).toEqual([[[file]]]);
    expect(shown.get('section').classes()).not.toContain('over');
  });

  it('sends nothing when something else than a file is dropped', async () => {
    const shown = mount(UploadPanel, { props: { kind: 'spots' } });
    await shown.get('section').trigger('drop', { dataTransfer: { files: [] } });
    expect(shown.emitted('send')).toBeUndefined();
  });

  it('says what a switch log looks like once that is chosen', async () => {
    const shown = mount(UploadPanel, { props: { kind: 'dwells' } });
    expect(shown.text()).toContain('One dwell a line: receiver, antenna and start');
    await shown.get('input[value=spots]').setValue();
    expect(shown.emitted('update:kind')).toEqual([['spots']]);
  });

  it('shows how much was sent, and the server’s own sentence when it was not taken', async () => {
    const file = { name: 'night.csv', size: 2_000_000 };
    const shown = mount(UploadList, {
      props: { uploads: [{ key: 1, file, sentBytes: 500_000, state: 'sending', problem: null }] },
    });
    expect(shown.text()).toContain('500\u2009kB of 2.0\u2009MB, 25\u2009%');
    expect(shown.get('[role=progressbar]').attributes('aria-valuenow')).toBe('25');
    const problem = {
      message: 'The file cannot be taken.',
      errors: [{ path: 'body.file', message: 'A PDF.' }],
    };
    await shown.setProps({ uploads: [{ key: 1, file, sentBytes: 0, state: 'failed', problem }] });
    expect(shown.get('[role=alert]').text()).toContain('night.csv: The file cannot be taken. A PDF.');
    await shown.get('[role=alert] button').trigger('click');
    expect(shown.emitted('again')).toEqual([[1]]);
  });
});

describe('the list of imports', () => {
  it('leaves counts empty until a file is read, and shows how far one is that is read', () => {
    const shown = mount(ImportTable, {
      props: {
        imports: [
          recordFixture({ id: 2, state: 'uploaded', rowsRead: 0 }),
          recordFixture({ id: 1, state: 'running', bytesDone: 250 }),
        ],
        more: false,
        loadingMore: false,
        linkTo: ({ id }) => ({ name: 'import', params: { importId: id } }),
      },
      global: { stubs: { RouterLink: RouterLinkStub } },
    });
    const cells = shown.findAll('tbody tr').map((row) => row.findAll('td').map((cell) => cell.text()));
    expect(cells[0]?.slice(0, 4)).toEqual(['Columns to choose', 'Spots', '', '']);
    expect(cells[1]?.slice(0, 4)).toEqual(['Reading, 25\u2009%', 'Spots', '100', '88']);
  });
});

describe('choosing columns', () => {
  const fields = (mapping: ImportMapping, errors: Record<string, string> = {}) =>
    mount(ColumnFields, { props: { modelValue: mapping, preview, receivers, errors } });

  it('goes by the words of the header', async () => {
    const shown = fields(spots);
    const select = control(shown, 'SNR');
    expect(select.findAll('option').map((option) => option.text())).toEqual([
      'choose a column',
      'utc',
      'rx',
      'call',
      'khz',
      'snr',
      'weather',
    ]);
    await select.setValue('5');
    expect(sent(shown).columns).toEqual({ ...spots.columns, snr: 'weather' });
  });

  it('asks for the receiver of the whole file where no column names it, and drops it when one does', async () => {
    const shown = fields({
      ...spots,
      columns: { ...spots.columns, receiver: undefined },
      fixedReceiverId: 2,
    });
    expect(control(shown, 'Receiver of the whole file').element.value).toBe('2');
    await control(shown, 'Receiver').setValue('1');
    expect(sent(shown).columns.receiver).toBe('rx');
    expect(sent(shown).fixedReceiverId).toBeUndefined();
  });

  it('shows a column that a saved mapping names and this file lacks, with the sentence beside it', () => {
    const message = 'The file has no column "level".';
    const shown = fields(
      { ...spots, columns: { ...spots.columns, snr: 'level' } },
      { 'columns.snr': message },
    );
    const select = control(shown, 'SNR');
    expect(select.element.selectedOptions[0]?.textContent).toBe('level (not in this file)');
    expect(select.attributes('aria-invalid')).toBe('true');
    expect(
      document.getElementById(select.attributes('aria-describedby')!) ?? shown.get('.error').element,
    ).toHaveProperty('textContent', message);
  });

  it('offers no empty choice for the antenna of a switch log', () => {
    const shown = fields(dwells);
    expect(control(shown, 'Antenna').findAll('option').at(0)?.text()).not.toBe('choose a column');
    expect(control(shown, 'End').findAll('option').at(0)?.text()).toBe('not in the file');
  });
});

describe('saying how a file is written', () => {
  const fields = (mapping: ImportMapping) =>
    mount(FormatFields, {
      props: { modelValue: mapping, header: preview.header, errors: {}, timeZone: 'Europe/Dublin' },
    });

  it('turns column names into numbers when the first line is no header', async () => {
    const shown = fields(spots);
    await shown.get('input[type=checkbox]').setValue(false);
    expect(sent(shown).columns).toEqual({ time: 1, receiver: 2, call: 3, freq: 4, snr: 5 });
  });

  it('keeps the zone when ISO times turn out to follow a pattern', async () => {
    const shown = fields({ ...spots, time: { kind: 'iso', zone: 'Europe/Dublin' } });
    await control(shown, 'Times are written as').setValue('pattern');
    expect(sent(shown).time).toEqual({
      kind: 'pattern',
      pattern: 'yyyy-MM-dd HH:mm:ss',
      zone: 'Europe/Dublin',
    });
  });

  it('asks for the first day of spot lines, and refuses one that is no day in words', async () => {
    const shown = fields({ ...spots, layout: 'spot lines' });
    const day = control(shown, 'First day');
    await day.setValue('30.11.2026');
    expect(shown.text()).toContain('Give a day such as 2026-11-30.');
    expect(shown.emitted('update:modelValue')).toBeUndefined();
    await day.setValue('2026-11-30');
    expect(sent(shown)).toMatchObject({ firstDay: '2026-11-30' });
    expect(shown.text()).not.toContain('Columns divided by');
  });
});

describe('names that the station does not know', () => {
  it('each get a choice, which stays in sight once it was made', async () => {
    const props = {
      modelValue: { ...dwells, receiverNames: { 'Shack left': 2 } },
      unknownReceivers: ['Attic'],
      unknownAntennas: ['Old loop'],
      receivers,
      antennas,
      errors: {},
    };
    const shown = mount(NameFields, { props });
    expect(control(shown, 'Shack left').element.value).toBe('2');
    expect(control(shown, 'Attic').element.selectedOptions[0]?.textContent).toBe('not known: lines refused');
    await control(shown, 'Old loop').setValue('5');
    expect(sent(shown)).toMatchObject({ antennaNames: { 'Old loop': 5 } });
    await control(shown, 'Shack left').setValue('');
    expect(sent(shown).receiverNames).toEqual({});
    await shown.get('input[type=checkbox]').setValue();
    expect(sent(shown)).toMatchObject({ unknownNames: 'make' });
  });

  it('can be left out of a file of spots', async () => {
    const shown = mount(NameFields, {
      props: {
        modelValue: spots,
        unknownReceivers: ['EI7QSZ'],
        unknownAntennas: [],
        receivers,
        antennas,
        errors: {},
      },
    });
    await shown.findAll('input[type=radio]')[1]!.setValue();
    expect(sent(shown)).toMatchObject({ otherReceivers: 'skip' });
  });
});

describe('the preview of a mapping', () => {
  const face = (props: object = {}) =>
    mount(MappingPreview, { props: { preview, mapping: spots, stale: false, fault: false, ...props } });

  it('puts each line beside what it becomes, or beside the reason why it would be refused', () => {
    const rows = face()
      .findAll('tbody tr')
      .map((row) => row.findAll('td').map((cell) => cell.text()));
    expect(rows[0]).toEqual([
      '2026-11-30T18:05:00Z',
      'EI7QSA',
      'EA8QSH',
      '1824.5',
      '21',
      '2026-11-30T18:05:00Z',
      'EI7QSA',
      'EA8QSH',
      '1824.5 kHz',
      '160 m',
      '21 dB',
      'other',
      '',
    ]);
    expect(rows[1]?.at(-1)).toBe('Refused: The frequency "9999.9" is in no amateur band.');
    expect(face().text()).toContain('Of the first 2 lines, 1 can be taken, 1 would be refused.');
  });

  it('hides columns that feed nothing until they are wanted', async () => {
    const shown = face();
    expect(shown.text()).not.toContain('weather');
    await shown.get('input[type=checkbox]').setValue();
    expect(shown.text()).toContain('weather');
  });

  it('keeps the old answer, dimmed, while a newer one is on its way', () => {
    const shown = face({ stale: true });
    expect(shown.get('.scroll').classes()).toContain('stale');
    expect(shown.attributes('aria-busy')).toBe('true');
  });

  it('says once, by the field and above, what is wrong with the mapping as a whole', async () => {
    const message = 'Give the UTC day of the first line: these lines carry only a clock.';
    const lines: SpotMapping = { ...spots, layout: 'spot lines' };
    const read = preview.read.map(({ lineNo }) => ({
      lineNo,
      ok: false,
      reason: message,
      field: 'firstDay',
      values: {},
    }));
    const shown = mount(MappingPanel, {
      props: {
        modelValue: lines,
        preview: { ...preview, read },
        stale: false,
        problem: null,
        receivers,
        antennas,
        timeZone: 'Europe/Dublin',
      },
    });
    expect(shown.get('[role=alert]').text()).toBe(`The mapping does not fit the file yet. ${message}`);
    expect(control(shown, 'First day').attributes('aria-invalid')).toBe('true');
    expect(
      shown
        .findAll('tbody')
        .map((each) => each.text())
        .join(),
    ).not.toContain(message);
  });
});

describe('saved mappings', () => {
  it('are loaded when chosen, saved under a name and forgotten after a question', async () => {
    const shown = mount(SavedMappings, {
      attachTo: document.body,
      props: { saved: [{ id: 4, name: 'Night files' }], busy: false, problem: null },
    });
    await shown.get('select').setValue('4');
    expect(shown.emitted('load')).toEqual([[4]]);
    expect(shown.get<HTMLInputElement>('form input').element.value).toBe('Night files');
    expect(shown.text()).toContain('Replaces the saved mapping of this name.');
    await shown.get('form').trigger('submit');
    expect(shown.emitted('save')).toEqual([['Night files']]);
    await shown.get('form input').setValue('  ');
    await shown.get('form').trigger('submit');
    expect(shown.text()).toContain('Give the mapping a name.');
    expect(shown.emitted('save')).toHaveLength(1);
    await shown
      .findAll('button')
      .find((each) => each.text() === 'Forget')!
      .trigger('click');
    await nextTick();
    await shown
      .findAll('dialog button')
      .find((each) => each.text() === 'Forget')!
      .trigger('click');
    expect(shown.emitted('forget')).toEqual([[4]]);
  });
});

describe('an import at work', () => {
  const progress = (record: object, props: object = {}) =>
    mount(ImportProgress, {
      attachTo: document.body,
      props: {
        record: recordFixture(record),
        takingBack: false,
        mayCancel: true,
        busy: false,
        problem: null,
        ...props,
      },
    });

  it('shows rows, rate, time left and how much is done', () => {
    const shown = progress({ state: 'running', bytesDone: 400, rowsPerSecond: 81_234, secondsLeft: 95 });
    expect(shown.get('[role=progressbar]').attributes('aria-valuenow')).toBe('40');
    expect(shown.text()).toContain('81\u2009234 rows/s');
    expect(shown.text()).toContain('about 2\u2009min');
  });

  it('says what cancelling takes back before it cancels', async () => {
    const shown = progress({ state: 'running' });
    await shown.get('button').trigger('click');
    await nextTick();
    expect(shown.get('dialog').text()).toContain('the 88 spots stored so far are removed again');
    expect(shown.emitted('cancel')).toBeUndefined();
    await shown
      .findAll('dialog button')
      .find((each) => each.text() === 'Cancel the import')!
      .trigger('click');
    expect(shown.emitted('cancel')).toHaveLength(1);
  });

  it('shows how far the taking back is, and offers no cancelling of it', () => {
    const shown = progress({ state: 'done', rowsUndone: 22 }, { takingBack: true });
    expect(shown.text()).toContain('22 of 88 spots removed.');
    expect(shown.get('[role=progressbar]').attributes('aria-valuenow')).toBe('25');
    expect(shown.find('button').exists()).toBe(false);
  });
});

describe('what became of an import', () => {
  it('is told in counts that add up', () => {
    const record = recordFixture();
    const total = countParts(record).reduce((sum, { count }) => sum + count, 0);
    expect(total).toBe(record.rowsRead);
    expect(countsSentence(record)).toBe('100 rows read: 88 stored, 5 doubled, 4 refused, 3 left out.');
    expect(
      mount(ImportResult, { props: { record } })
        .findAll('.count')
        .map((each) => each.text()),
    ).toEqual(['100', '88', '5', '4', '3']);
  });

  it('gives the reason of a failure', () => {
    const shown = mount(ImportResult, {
      props: { record: recordFixture({ state: 'failed', error: 'The gzip file ends too early.' }) },
    });
    expect(shown.get('[role=alert]').text()).toBe('The gzip file ends too early.');
  });

  it('says before an undo what would be removed, and what would stay', () => {
    expect(undoSentences(recordFixture({ rowsUndone: 8 }))[0]).toBe(
      '80 spots that this import added are removed, heard from 2026-11-30 18:00Z to 2026-12-01 06:30Z.',
    );
    expect(undoSentences(recordFixture({ kind: 'dwells', rowsStored: 1, firstAt: null }))[0]).toBe(
      '1 dwell that this import added is removed from the switch log.',
    );
  });

  it('lists refused lines under their reasons with the words of the fields', () => {
    const shown = mount(RefusalPanel, {
      props: {
        refusals: [
          { lineNo: 6, field: 'freq', reason: 'In no band.', raw: 'a,b' },
          { lineNo: 9, field: null, reason: 'A delimiter is missing.', raw: 'a' },
        ],
        reasons: [{ reason: 'In no band.', lines: 1200 }],
        total: 1201,
        more: true,
        loadingMore: false,
        downloading: false,
      },
    });
    expect(shown.get('h2').text()).toBe('1\u2009201 lines refused');
    expect(shown.get('.reasons li').text()).toBe('1\u2009200 In no band.');
    expect(shown.findAll('tbody tr').map((row) => row.findAll('td')[0]?.text())).toEqual([
      'Frequency',
      'whole line',
    ]);
  });
});
