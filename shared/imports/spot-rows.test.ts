import { describe, expect, it } from 'vitest';
import type { SpotMapping } from '../contracts/import.ts';
import type { ReadingContext } from './reading.ts';
import { createSpotRowReader, type SpotOutcome } from './spot-rows.ts';

const context: ReadingContext = {
  receivers: [
    { id: 1, callSign: 'EI7QSA' },
    { id: 2, callSign: 'EI7QSC' },
  ],
  antennas: [],
  nowMs: Date.UTC(2026, 0, 6),
};
const mapping: SpotMapping = {
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
  columns: { time: 'utc', receiver: 'rx', call: 'call', freq: 'khz', snr: 'snr', mode: 'mode', speed: 'wpm' },
  freqUnit: 'kHz',
  receiverNames: { shed: 2 },
  otherReceivers: 'refuse',
  timeKnownTo: 'second',
};
const header = ['UTC', ' rx ', 'call', 'khz', 'snr', 'mode', 'wpm'];
const good = ['2026-01-05T18:04:30.250Z', 'EI7QSA', 'ea8qsh', '1824.55', '-12', 'psk31', '22'];

function read(cells: string[], change: Partial<SpotMapping> = {}): SpotOutcome {
  const reader = createSpotRowReader({ ...mapping, ...change }, header, context);
  return reader({ lineNo: 2, raw: cells.join(','), cells, broken: null });
}
const withCell = (index: number, text: string) => good.map((cell, i) => (i === index ? text : cell));

describe('createSpotRowReader', () => {
  it('makes a spot of a row', () => {
    expect(read(good)).toEqual({
      heardAtMs: Date.UTC(2026, 0, 5, 18, 4, 30, 250),
      receiverId: 1,
      call: 'EA8QSH',
      freq100Hz: 18246,
      bandMetres: 160,
      snrDb: -12,
      speedWpm: 22,
      mode: 'PSK',
      uncertaintySeconds: 0,
      feedMinute: null,
    });
  });

  it.each([
    ['EI7QSA-#', 1],
    ['ei7qsc-2-#', 2],
    [' shed ', 2],
  ])('knows the receiver "%s"', (name, receiverId) => {
    expect(read(withCell(1, name))).toMatchObject({ receiverId });
  });

  it.each([
    [4, '+7', { snrDb: 7 }],
    [4, '−7 dB', { snrDb: -7 }],
    [4, ' 7 ', { snrDb: 7 }],
    [6, '', { speedWpm: null }],
    [6, '0', { speedWpm: null }],
    [6, '31 wpm', { speedWpm: 31 }],
    [6, '1', { speedWpm: 1 }],
    [6, '200', { speedWpm: 200 }],
    [4, '120', { snrDb: 120 }],
    [4, '-60', { snrDb: -60 }],
    [5, '', { mode: 'other' }],
    [2, 'EA8/W1QRB/P', { call: 'EA8/W1QRB/P' }],
  ] as const)('takes column %i "%s"', (index, text, expected) => {
    expect(read(withCell(index, text))).toMatchObject(expected);
  });

  it.each([
    [4, '7.0', 'snr'],
    [4, '', 'snr'],
    [4, '1e1', 'snr'],
    [4, '0x7', 'snr'],
    [4, '121', 'snr'],
    [4, '-61', 'snr'],
    [3, '1,824.5', 'freq'],
    [3, 'NaN', 'freq'],
    [3, '', 'freq'],
    [3, '1824.5 kHz', 'freq'],
    [6, 'fast', 'speed'],
    [6, '-1', 'speed'],
    [6, '201', 'speed'],
    [2, 'EA8QSH\ufffd', 'call'],
    [1, '', 'receiver'],
    [0, '2026-01-07T00:00:01Z', 'time'],
  ] as const)('refuses column %i "%s" by its field', (index, text, field) => {
    expect(read(withCell(index, text))).toEqual({ field, reason: expect.stringMatching(/[.]$/) });
  });

  it('accepts a clock that is up to a day ahead, for a zone set wrong', () => {
    expect(read(withCell(0, '2026-01-07T00:00:00Z'))).toMatchObject({ heardAtMs: Date.UTC(2026, 0, 7) });
  });

  it('refuses lines with a column too many or too few, since what follows it has slipped', () => {
    expect(read([...good, 'x'])).toMatchObject({ field: null });
    expect(read(good.slice(0, 6))).toMatchObject({ field: null });
    expect(read([...good, '', ' '])).toMatchObject({ receiverId: 1 });
  });

  it('reads frequencies by their unit and decimal comma', () => {
    expect(read(withCell(3, '1.82455'), { freqUnit: 'MHz' })).toMatchObject({ freq100Hz: 18246 });
    expect(read(withCell(3, '1824550'), { freqUnit: 'Hz' })).toMatchObject({ freq100Hz: 18246 });
    const format = { ...mapping.format, decimalComma: true };
    expect(read(withCell(3, '1824,55'), { format })).toMatchObject({ freq100Hz: 18246 });
  });

  it('floors times known to the minute and says how unsure they are', () => {
    expect(read(good, { timeKnownTo: 'minute' })).toMatchObject({
      heardAtMs: Date.UTC(2026, 0, 5, 18, 4),
      uncertaintySeconds: 60,
    });
  });

  it('leaves out other receivers without a word where the mapping says so', () => {
    expect(read(withCell(1, 'W1QRB'), { otherReceivers: 'skip' })).toBe('other receiver');
    expect(read(withCell(1, ''), { otherReceivers: 'skip' })).toMatchObject({ field: 'receiver' });
  });
});

describe('createSpotRowReader on spot lines', () => {
  const usual = 'DX de EI7QSA-#:   1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1804Z';
  const readLine = (line: string, change: Partial<SpotMapping> = {}) =>
    createSpotRowReader(
      { ...mapping, layout: 'spot lines', firstDay: '2026-01-05', ...change },
      null,
      context,
    )({ lineNo: 1, raw: line, cells: [line], broken: null });

  it('makes a spot of a line, known to the minute', () => {
    expect(readLine(usual)).toEqual({
      heardAtMs: Date.UTC(2026, 0, 5, 18, 4),
      receiverId: 1,
      call: 'EA8QSH',
      freq100Hz: 18245,
      bandMetres: 160,
      snrDb: 21,
      speedWpm: 22,
      mode: 'CW',
      uncertaintySeconds: 60,
      feedMinute: null,
    });
  });

  it.each([
    ['Good evening', null],
    ['DX de EI7QSA-# 1824.5 EA8QSH CW 21 dB 1804Z', 'receiver'],
    [usual.replace('1824.5', '5000.0'), 'freq'],
    [usual.replace('EA8QSH', 'HELLO!'), 'call'],
    [usual.replace('CW', '??'), 'mode'],
    [usual.replace('21 dB', '121 dB'), 'snr'],
    [usual.replace('22 WPM', '0 WPM'), 'speed'],
    [usual.replace('22 WPM', '201 WPM'), 'speed'],
    [usual.replace('1804Z', '2460Z'), 'time'],
  ])('refuses the line "%s" by its field', (line, field) => {
    expect(readLine(line)).toEqual({ field, reason: expect.stringMatching(/[.]$/) });
  });

  it('leaves out damaged lines of other receivers too where the mapping says so', () => {
    const damaged = 'DX de W1QRB-#: 1824.5 EA8QSH CW';
    expect(readLine(damaged, { otherReceivers: 'skip' })).toBe('other receiver');
    expect(readLine(damaged)).toMatchObject({ field: 'snr' });
    expect(readLine(damaged.replace('W1QRB', 'EI7QSA'), { otherReceivers: 'skip' })).toMatchObject({
      field: 'snr',
    });
  });
});
