import { describe, expect, it } from 'vitest';
import { guessMapping } from './guess-mapping.ts';
import type { ReadingContext } from './reading.ts';

const context: ReadingContext = {
  receivers: [
    { id: 1, callSign: 'EI7QSA' },
    { id: 2, callSign: 'EI7QSC' },
  ],
  antennas: [
    { id: 5, name: 'North-east' },
    { id: 6, name: 'West' },
  ],
  nowMs: Date.UTC(2026, 11, 1),
};
const guess = (lines: string[], kind: 'spots' | 'dwells' = 'spots') =>
  guessMapping(Buffer.from(lines.join('\n')), kind, context);

describe('guessMapping', () => {
  it('finds columns by what they hold where there is no header', () => {
    const mapping = guess([
      '1767636270\t1824.5\tEA8QSH\tCW\t21\tEI7QSA-#',
      '1767636271\t3502.1\tW1QRB\tCW\t7\tEI7QSC-#',
      '1767636275\t7012.0\tJA1QTC\tRTTY\t-3\tEI7QSA-#',
    ]);
    expect(mapping).toMatchObject({
      format: { delimiter: '\t', hasHeader: false },
      time: { kind: 'epoch seconds' },
      columns: { time: 1, freq: 2, call: 3, mode: 4, snr: 5, receiver: 6 },
    });
  });

  it('tells month-first from day-first dates where the days do, and Hz by the bands', () => {
    const mapping = guess([
      'Time|Frequency|Station|SNR|Skimmer',
      '01/13/2026 18:04:00|1824500|EA8QSH|21|EI7QSA',
      '01/14/2026 18:04:00|3502100|W1QRB|3|EI7QSA',
    ]);
    expect(mapping).toMatchObject({
      format: { delimiter: '|' },
      time: { kind: 'pattern', pattern: 'MM/dd/yyyy HH:mm:ss' },
      columns: { time: 'Time', freq: 'Frequency', call: 'Station', snr: 'SNR', receiver: 'Skimmer' },
      freqUnit: 'Hz',
    });
  });

  it('takes times without seconds, or always on the minute, as known to the minute', () => {
    const rows = Array.from({ length: 12 }, (_, n) => `2026-01-05 18:${10 + n},EI7QSA,EA8QSH,1824.5,21`);
    expect(guess(['utc,rx,call,khz,snr', ...rows])).toMatchObject({ timeKnownTo: 'minute' });
    expect(guess(['utc,rx,call,khz,snr', ...rows.map((row) => row.replace(',EI', ':00,EI'))])).toMatchObject({
      timeKnownTo: 'minute',
    });
    expect(guess(['utc,rx,call,khz,snr', ...rows.map((row) => row.replace(',EI', ':07,EI'))])).toMatchObject({
      timeKnownTo: 'second',
    });
  });

  it('knows spot lines, and asks for their day', () => {
    const mapping = guess([
      'Welcome',
      ...Array<string>(5).fill('DX de EI7QSA-#: 1824.5 EA8QSH CW 21 dB 1804Z'),
    ]);
    expect(mapping).toMatchObject({ layout: 'spot lines', timeKnownTo: 'minute' });
    expect(mapping).not.toHaveProperty('firstDay');
  });

  it('finds the columns of a switch log, by words or by the names in it', () => {
    expect(
      guess(['Radio;Aerial;From;Until;Remarks', 'EI7QSA;West;2026-01-05 18:00;2026-01-05 18:05;'], 'dwells'),
    ).toMatchObject({
      columns: { receiver: 'Radio', antenna: 'Aerial', startsAt: 'From', endsAt: 'Until', note: 'Remarks' },
    });
    expect(
      guess(['2026-01-05 18:00,EI7QSA,West', '2026-01-05 18:05,EI7QSA,North-east'], 'dwells'),
    ).toMatchObject({ columns: { startsAt: 1, receiver: 2, antenna: 3 }, time: { kind: 'iso' } });
  });

  it('never fails, whatever the bytes', () => {
    for (const bytes of [
      Buffer.alloc(0),
      Buffer.from('\n\n'),
      Buffer.from([0, 255, 10, 34]),
      Buffer.from('"'),
    ]) {
      expect(guessMapping(bytes, 'spots', context).kind).toBe('spots');
      expect(guessMapping(bytes, 'dwells', context).kind).toBe('dwells');
    }
  });
});
