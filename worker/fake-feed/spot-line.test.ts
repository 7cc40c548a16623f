import { describe, expect, it } from 'vitest';
import { formatSpotLine } from './spot-line.ts';

describe('a spot line', () => {
  it('is laid out as the trade writes it', () => {
    expect(
      formatSpotLine({
        timeMs: Date.parse('2026-01-05T18:12:51Z'),
        receiver: 'EI7QSA',
        call: 'EA8QSH',
        freqKhz: 1824.5,
        mode: 'CW',
        snrDb: 21,
        speedWpm: 22,
        kind: 'CQ',
      }),
    ).toBe('DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z');
  });

  it('keeps white space between all fields when a call or a frequency is long', () => {
    const line = formatSpotLine({
      timeMs: Date.parse('2026-01-05T00:00:00Z'),
      receiver: 'EI7QSA',
      call: 'VP8/EA8QSH/QRP',
      freqKhz: 144050.1,
      mode: 'RTTY',
      snrDb: 8,
      speedWpm: 5,
      kind: 'DX',
    });
    expect(line.split(/\s+/)).toEqual(
      'DX de EI7QSA-#: 144050.1 VP8/EA8QSH/QRP RTTY 8 dB 5 WPM DX 0000Z'.split(' '),
    );
  });
});
