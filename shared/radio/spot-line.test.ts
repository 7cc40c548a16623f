import { describe, expect, it } from 'vitest';
import { takeApartSpotLine } from './spot-line.ts';

describe('takeApartSpotLine', () => {
  it('reads what the trade’s feeds write', () => {
    const line = 'DX de EI7QSA-#:   1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1804Z';
    const fields = {
      receiver: 'EI7QSA-#',
      freqKhz: '1824.5',
      call: 'EA8QSH',
      mode: 'CW',
      snrDb: '21',
      speedWpm: '22',
      what: 'CQ',
      minute: 18 * 60 + 4,
    };
    expect(takeApartSpotLine(line)).toEqual(fields);
    expect(takeApartSpotLine(line.replace(/ +/g, ' '))).toEqual(fields);
    expect(takeApartSpotLine(`${line}\u0007\u0007`)).toEqual(fields);
    expect(takeApartSpotLine(line.replace('#:  ', '#:').replace('21 dB', '21dB'))).toEqual(fields);
  });

  it('stands a missing speed and bits a second', () => {
    expect(takeApartSpotLine('DX de EI7QSA: 3580.1 W1QRB RTTY -3 dB 45 BPS CQ 0000Z')).toMatchObject({
      mode: 'RTTY',
      snrDb: '-3',
      speedWpm: '',
      minute: 0,
    });
    expect(takeApartSpotLine('DX de EI7QSA: 3580.1 W1QRB FT8 -13 dB 2359Z')).toMatchObject({
      speedWpm: '',
      minute: 1439,
    });
  });

  it.each([
    ['DX de EI7QSA: 1824.5 EA8QSH CW 21 dB 22 WPM CQ', 'time'],
    ['DX de EI7QSA: 1824.5 EA8QSH thanks for the contact 1804Z', 'snr'],
    ['DX de EI7QSA: 1824.5 EA8QSH CW 21 dB 2460Z', 'time'],
  ])('refuses "%s"', (line, field) => {
    expect(takeApartSpotLine(line)).toMatchObject({ field, reason: expect.stringMatching(/[.]$/) });
  });

  it('takes what claims to be no spot for none', () => {
    expect(takeApartSpotLine('Good evening')).toBe(null);
  });

  it('goes by the last clock, so that a kind that looks like one does no harm', () => {
    expect(takeApartSpotLine('DX de EI7QSA: 1824.5 EA8QSH CW 21 dB 0700Z 1804Z <3>')).toMatchObject({
      what: '0700Z',
      minute: 18 * 60 + 4,
    });
  });
});
