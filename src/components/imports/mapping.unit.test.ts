import { describe, expect, it } from 'vitest';
import type { DwellMapping, SpotMapping } from '../../../shared/contracts/import.ts';
import { previewFile } from '../../../shared/imports/preview.ts';
import {
  columnAt,
  columnIndex,
  columnWords,
  forThisFile,
  isClockOnly,
  mappingErrors,
  mappingFault,
  timeFault,
  withColumn,
  withHeader,
} from './mapping.ts';

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
  columns: { time: 'utc', receiver: 'rx', call: 'call', freq: 'khz', snr: 'db' },
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
  columns: { antenna: 'antenna', startsAt: 'from' },
  receiverNames: {},
  antennaNames: {},
  unknownNames: 'refuse',
};
const context = {
  receivers: [{ id: 1, callSign: 'EI7QSA' }],
  antennas: [{ id: 1, name: 'Vertical' }],
  nowMs: Date.UTC(2026, 11, 1),
};
const file =
  'utc,rx,call,khz,db\n2026-11-30T18:05:00Z,EI7QSA,EA8QSH,1824.5,21\n2026-11-31T18:05:00Z,EI7QSA,EA8QSH,1824.5,21\n';
const read = (mapping: SpotMapping, text = file) => ({
  guess: mapping,
  ...previewFile(Buffer.from(text), true, mapping, context, []),
});

describe('columns of a mapping', () => {
  it('are found by their words, whatever the letter case and blanks around them', () => {
    expect(columnIndex(' KHZ', ['utc', 'kHz '], 2)).toBe(1);
    expect(columnIndex('freq', ['utc', 'kHz'], 2)).toBe(-1);
    expect(columnIndex(3, [], 5)).toBe(2);
    expect(columnIndex(6, [], 5)).toBe(-1);
    expect(columnIndex(undefined, ['utc'], 1)).toBe(-1);
  });

  it('are named by number where a header has no words or two columns share them', () => {
    const header = ['utc', '', 'snr', 'SNR'];
    expect([0, 1, 2, 3].map((index) => columnAt(index, header))).toEqual(['utc', 2, 'snr', 4]);
    expect([0, 1, 2, 3].map((index) => columnIndex(columnAt(index, header), header, 4))).toEqual([
      0, 1, 2, 3,
    ]);
  });

  it('show an example where a file has no header', () => {
    const preview = { header: [], rows: [{ lineNo: 1, raw: '', cells: ['2026-11-30', ''] }] };
    expect(columnWords(preview)).toEqual(['column 1 (2026-11-30)', 'column 2']);
  });

  it('become numbers when the first line turns out to be no header', () => {
    const next = withHeader(spots, false, ['utc', 'rx', 'call', 'khz', 'db']);
    expect(next.columns).toEqual({ time: 1, receiver: 2, call: 3, freq: 4, snr: 5 });
    expect(next.format.hasHeader).toBe(false);
  });

  it('can be taken out again', () => {
    expect(withColumn(spots, 'receiver', undefined).columns.receiver).toBeUndefined();
    expect(withColumn(dwells, 'endsAt', 'to').columns).toMatchObject({ endsAt: 'to', startsAt: 'from' });
  });
});

describe('a saved mapping', () => {
  it('keeps the first day of the file at hand, not that of the file it was saved for', () => {
    const saved: SpotMapping = { ...spots, layout: 'spot lines', firstDay: '2026-01-01' };
    expect(forThisFile(saved, { ...spots, firstDay: '2026-11-30' })).toMatchObject({
      layout: 'spot lines',
      firstDay: '2026-11-30',
    });
    expect(forThisFile(saved, null)).toMatchObject({ firstDay: undefined });
    expect(forThisFile(dwells, null)).toBe(dwells);
  });
});

describe('what is wrong with a mapping', () => {
  it('stands by the part that the server names, the first sentence of each', () => {
    const errors = [
      { path: 'body.mapping.columns.time', message: 'Choose the column of the time.' },
      { path: 'body.mapping.columns.time', message: 'Something else.' },
      { path: 'body.name', message: 'This cannot be empty.' },
    ];
    expect(mappingErrors({ errors })).toEqual({
      'columns.time': 'Choose the column of the time.',
      name: 'This cannot be empty.',
    });
    expect(mappingErrors(null)).toEqual({});
  });

  it('is told from what is wrong with single lines', () => {
    expect(mappingFault(read(spots), spots)).toBeNull();
    const onlyBad = file.split('\n').toSpliced(1, 1).join('\n');
    expect(mappingFault(read(spots, onlyBad), spots)).toBeNull();
    const lost = withColumn(spots, 'snr', 'level') as SpotMapping;
    expect(mappingFault(read(lost), lost)).toEqual({
      path: 'columns.snr',
      message: 'The file has no column "level"; its columns are "utc", "rx", "call", "khz", "db".',
    });
  });

  it('includes a pattern of times that cannot be used', () => {
    const wrong: SpotMapping = { ...spots, time: { kind: 'pattern', pattern: 'yyyy-MM-dd', zone: 'UTC' } };
    expect(timeFault(wrong)).toContain('needs one HH and one mm');
    expect(mappingFault(read(wrong), wrong)?.path).toBe('time');
    expect(timeFault(spots)).toBeNull();
  });

  it('asks for the first day only where times carry none', () => {
    const clock: SpotMapping = { ...spots, time: { kind: 'pattern', pattern: 'HHmm', zone: 'UTC' } };
    expect(isClockOnly(clock)).toBe(true);
    expect(isClockOnly({ ...clock, columns: { ...clock.columns, date: 'day' } })).toBe(false);
    expect(isClockOnly({ ...spots, layout: 'spot lines' })).toBe(true);
    expect(isClockOnly(spots)).toBe(false);
    expect(isClockOnly(dwells)).toBe(false);
  });
});
