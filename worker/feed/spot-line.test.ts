import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { formatSpotLine } from '../fake-feed/spot-line.ts';
import { createSpotLineParser } from './spot-line.ts';

const parse = createSpotLineParser();
const usual = 'DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z';
const read = {
  kind: 'spot',
  receiver: 'EI7QSA-#',
  call: 'EA8QSH',
  freq100Hz: 18245,
  bandMetres: 160,
  mode: 'CW',
  snrDb: 21,
  speedWpm: 22,
  what: 'CQ',
  minute: 18 * 60 + 12,
};

describe('the spot line parser', () => {
  it('reads the usual line', () => {
    expect(parse(usual)).toEqual(read);
  });

  it.each([
    ['narrow spacing', 'DX de EI7QSA-#: 1824.5 EA8QSH CW 21 dB 22 WPM CQ 1812Z'],
    ['no blank after the colon', 'DX de EI7QSA-#:1824.5 EA8QSH CW 21 dB 22 WPM CQ 1812Z'],
    ['tabs and blanks around', '  DX de EI7QSA-#:\t1824.5\tEA8QSH\tCW\t21 dB\t22 WPM\tCQ\t1812Z  '],
    ['units glued to their numbers', 'DX de EI7QSA-#: 1824.5 EA8QSH CW 21dB 22WPM CQ 1812Z'],
    ['small letters', 'dx de EI7QSA-#: 1824.5 ea8qsh cw 21 db 22 wpm CQ 1812z'],
    ['bells at the end', `${usual}\u0007\u0007`],
    ['text after the time', `${usual} IL18 <3>`],
    ['a plus sign', usual.replace('21 dB', '+21 dB')],
  ])('stands %s', (_what, line) => {
    expect(parse(line)).toEqual(read);
  });

  it('reads a line without a speed, as modes other than Morse have it', () => {
    const line = 'DX de EI7QSA-#:  3573.0  VK6QUD       FT8   -9 dB            CQ      0000Z';
    const { speedWpm, mode, snrDb, minute } = { ...read, ...parse(line) };
    expect({ speedWpm, mode, snrDb, minute }).toEqual({ speedWpm: null, mode: 'FT8', snrDb: -9, minute: 0 });
  });

  it('takes bits a second for no Morse speed', () => {
    const line = 'DX de EI7QSA-#:  3580.1  VK6QUD       PSK31   9 dB  31 BPS  CQ      2359Z';
    const { speedWpm, mode, minute } = { ...read, ...parse(line) };
    expect({ speedWpm, mode, minute }).toEqual({ speedWpm: null, mode: 'PSK', minute: 1439 });
  });

  it('reads kinds of no, one and two words', () => {
    expect(parse(usual.replace('CQ  ', '    '))).toMatchObject({ what: '' });
    expect(parse(usual.replace('CQ  ', 'NCDXF B'))).toMatchObject({ what: 'NCDXF B' });
  });

  it('keeps portable forms as one call', () => {
    expect(parse(usual.replace('EA8QSH', 'VP8/EA8QSH/P'))).toMatchObject({ call: 'VP8/EA8QSH/P' });
  });

  it.each([
    ['receiver', 'DX de', null],
    ['receiver', 'DX de EI7QSA-# 1824.5 EA8QSH CW 21 dB 22 WPM CQ 1812Z', null],
    ['freq', 'DX de EI7QSC-#:', 'EI7QSC-#'],
    ['freq', usual.replace('1824.5', '----.-'), 'EI7QSA-#'],
    ['freq', usual.replace('1824.5', '1,824.5'), 'EI7QSA-#'],
    ['freq', usual.replace('1824.5', '5000.0'), 'EI7QSA-#'],
    ['freq', usual.replace('1824.5', '1e3'), 'EI7QSA-#'],
    ['call', 'DX de EI7QSC-#:  1824.5', 'EI7QSC-#'],
    ['call', usual.replace('EA8QSH', 'HELLO!'), 'EI7QSA-#'],
    ['mode', usual.replace('CW ', '?? '), 'EI7QSA-#'],
    ['snr', usual.replace('21 dB', '     '), 'EI7QSA-#'],
    ['snr', usual.replace('21 dB', '2.5 dB'), 'EI7QSA-#'],
    ['snr', usual.replace('21 dB', '999 dB'), 'EI7QSA-#'],
    ['speed', usual.replace('22 WPM', '0 WPM'), 'EI7QSA-#'],
    ['speed', usual.replace('22 WPM', '201 WPM'), 'EI7QSA-#'],
    ['speed', usual.replace('22 WPM', '999 WPM'), 'EI7QSA-#'],
    ['time', usual.replace('1812Z', ''), 'EI7QSA-#'],
    ['time', usual.replace('1812Z', '9999Z'), 'EI7QSA-#'],
    ['time', usual.replace('1812Z', '1860Z'), 'EI7QSA-#'],
  ])('refuses for its %s the line %j', (field, line, receiver) => {
    const result = parse(line);
    expect(result).toMatchObject({ kind: 'refused', field, receiver });
    // A sentence, for a person.
    expect(result.kind === 'refused' && result.reason).toMatch(/^["\d+A-Z-].{15,}[.]$/);
  });

  it.each([
    '',
    'Welcome EI7QSB. Spots follow.',
    'To all: the feed pauses at noon',
    'WWV de EI7QSB',
    '\u0007',
  ])('takes %j for no spot at all', (line) => {
    expect(parse(line)).toEqual({ kind: 'other' });
  });

  it('reads back whatever the fake feed writes', () => {
    const spot = fc.record({
      timeMs: fc.integer({ min: 0, max: 4e12 }),
      receiver: fc.constantFrom('EI7QSA', 'EI7QSC', 'W1QRB-2'),
      call: fc.constantFrom('EA8QSH', 'W1QRB', 'VP8/EA8QSH/QRP', 'JA1QTC/MM', 'EI7QSB/P'),
      freqKhz: fc.integer({ min: 18_000, max: 20_000 }).map((steps) => steps / 10),
      mode: fc.constantFrom('CW', 'RTTY'),
      snrDb: fc.integer({ min: -20, max: 80 }),
      speedWpm: fc.integer({ min: 5, max: 60 }),
      kind: fc.constantFrom('CQ', 'DX', 'NCDXF B'),
    });
    fc.assert(
      fc.property(spot, (one) => {
        expect(parse(formatSpotLine(one))).toEqual({
          kind: 'spot',
          receiver: `${one.receiver}-#`,
          call: one.call,
          freq100Hz: Math.round(one.freqKhz * 10),
          bandMetres: 160,
          mode: one.mode,
          snrDb: one.snrDb,
          speedWpm: one.speedWpm,
          what: one.kind,
          minute: new Date(one.timeMs).getUTCHours() * 60 + new Date(one.timeMs).getUTCMinutes(),
        });
      }),
    );
  });

  it('never throws and never makes a spot of what lacks a number, whatever comes', () => {
    const noise = fc.oneof(
      fc.string({ unit: 'binary', maxLength: 80 }),
      fc
        .tuple(fc.nat(usual.length), fc.string({ maxLength: 5 }), fc.nat(5))
        .map(([at, put, gone]) => usual.slice(0, at) + put + usual.slice(at + gone)),
    );
    fc.assert(
      fc.property(noise, (line) => {
        const result = parse(line);
        if (result.kind !== 'spot') return;
        for (const value of [result.freq100Hz, result.bandMetres, result.snrDb, result.minute]) {
          expect(Number.isInteger(value)).toBe(true);
        }
        expect(result.minute).toBeLessThan(1440);
      }),
      { numRuns: 2_000 },
    );
  });
});
