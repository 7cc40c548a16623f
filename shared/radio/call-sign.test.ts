import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { formatCallSign, isDemoCall, parseCallSign, type CallSign } from './call-sign.ts';
import { isRefusal } from './place.ts';

function parsed(text: string): CallSign {
  const call = parseCallSign(text);
  if (isRefusal(call)) throw new Error(call.reason);
  return call;
}

function reasonOf(text: string): string {
  const call = parseCallSign(text);
  return isRefusal(call) ? call.reason : 'accepted';
}

describe('call signs', () => {
  // Forms of ITU Radio Regulations 19.68, 19.68A and 19.69: one or two characters, digit, suffix.
  it.each([
    ['EI7QSB', 'EI', '7', 'QSB'],
    ['k1qrk', 'K', '1', 'QRK'],
    ['F5QSA', 'F', '5', 'QSA'],
    ['9A3QTA', '9A', '3', 'QTA'],
    ['4X4QSY', '4X', '4', 'QSY'],
    ['2E0QRA', '2E', '0', 'QRA'],
    ['A71QRA', 'A7', '1', 'QRA'],
    ['S57QRA', 'S5', '7', 'QRA'],
    ['3DA0QRA', '3DA', '0', 'QRA'],
    ['3D2QRA', '3D', '2', 'QRA'],
    ['T32QRA', 'T3', '2', 'QRA'],
    ['C6AQRA', 'C6', '', 'AQRA'],
    ['TM100QRA', 'TM', '100', 'QRA'],
    ['R100QRA', 'R', '100', 'QRA'],
    ['EI7Q2A', 'EI', '7', 'Q2A'],
  ])('divides %s into prefix %s, digits "%s" and suffix %s', (text, prefix, digits, suffix) => {
    expect(parsed(text)).toMatchObject({ prefix, digits, suffix, away: false, mobile: null });
  });

  // Portable forms by common practice in the trade and CEPT recommendation T/R 61-01 (prefix in front).
  it.each([
    ['EI7QSB', 'EI7QSB', null, 7],
    ['EI7QSB/P', 'EI7QSB', null, 7],
    ['EI7QSB/M', 'EI7QSB', null, 7],
    ['EI7QSB/QRP', 'EI7QSB', null, 7],
    ['EI7QSB/LH', 'EI7QSB', null, 7],
    ['EA8/EI7QSB', 'EA8', 'EA8', 8],
    ['EI7QSB/EA8', 'EA8', 'EA8', 8],
    ['EA8/EI7QSB/P', 'EA8', 'EA8', 8],
    ['F/EI7QSB', 'F', 'F', null],
    ['EI7QSB/F', 'F', 'F', null],
    ['M/EI7QSB', 'M', 'M', null],
    ['MM/EI7QSB', 'MM', 'MM', null],
    ['K1QRK/4', 'K4', null, 4],
    ['K1QRK/4/M', 'K4', null, 4],
    ['EA8QSH/2', 'EA2', null, 2],
    ['K1QRK/KH6', 'KH6', 'KH6', 6],
    ['VP2E/K1QRK', 'VP2E', 'VP2E', 2],
    ['K1QRK/VP2E', 'VP2E', 'VP2E', 2],
    ['W4/EI7QSB', 'W4', 'W4', 4],
    ['T7/EI7QSB', 'T7', 'T7', null],
    ['T32/K1QRK', 'T32', 'T32', 2],
    ['3DA/EI7QSB', '3DA', '3DA', null],
    ['3D2/EI7QSB', '3D2', '3D2', 2],
    ['TM100QRA', 'TM100QRA', null, null],
  ])('finds %s at %s (visited prefix %s, area digit %s)', (text, location, locationPrefix, areaDigit) => {
    expect(parsed(text)).toMatchObject({ call: text, location, locationPrefix, areaDigit });
  });

  it.each([
    ['EI7QSB/MM', 'maritime'],
    ['EI7QSB/AM', 'aeronautical'],
    ['EA8/EI7QSB/MM', 'maritime'],
    ['MM/EI7QSB', null],
    ['EI7QSB/M', null],
  ])('takes %s for %s mobile', (text, mobile) => {
    expect(parsed(text).mobile).toBe(mobile);
  });

  it.each([
    ['EI7QSB', false],
    ['EI7QSB/QRP', false],
    ['EI7QSB/B', false],
    ['EI7QSB/P', true],
    ['EI7QSB/A', true],
    ['EI7QSB/3', true],
    ['EA8/EI7QSB', true],
    ['EI7QSB/MM', true],
  ])('knows whether %s is away from home: %s', (text, away) => {
    expect(parsed(text).away).toBe(away);
  });

  it.each([
    ['EI7QSA-#', 'EI7QSA', '-#'],
    ['EI7QSA-1', 'EI7QSA', '-1'],
    ['EI7QSA-12-#', 'EI7QSA', '-12-#'],
    ['EI7QSA/P-#', 'EI7QSA/P', '-#'],
    ['EI7QSA', 'EI7QSA', null],
  ])("takes the receiver's mark off %s", (text, call, receiverMark) => {
    expect(parsed(text)).toMatchObject({ call, receiverMark });
  });

  it.each([
    ['', 'The call sign is empty; write one such as EI7QSB.'],
    ['EI7QSB/', 'The call sign "EI7QSB/" has a "/" with nothing on one side of it.'],
    ['EI7 QSB', 'The call sign "EI7 QSB" holds " "; only letters, digits and "/" belong in it.'],
    ['ÉI7QSB', 'The call sign "ÉI7QSB" holds "É"; only letters, digits and "/" belong in it.'],
    ['EI7QSB/EA8QSH', '"EI7QSB/EA8QSH" holds two whole call signs; send one.'],
    ['EA8/EI7QSB/4', 'The call sign "EA8/EI7QSB/4" names more than one place.'],
    ['F/EA8/EI7QSB', 'The call sign "F/EA8/EI7QSB" has more than one prefix before EI7QSB.'],
    ['P/EI7QSB', 'In the call sign "P/EI7QSB", "P" is not the prefix of a country.'],
    [
      'QRZ',
      '"QRZ" is not a call sign: it needs a country\'s prefix, a digit and a suffix that ends in a letter, such as EI7QSB.',
    ],
    ['EI7QSBQSBQSBQSBQSBQSBQSBQSB', 'A call sign has at most 24 characters; this one has 27.'],
  ])('refuses "%s" with a sentence', (text, reason) => {
    expect(reasonOf(text)).toBe(reason);
  });

  it.each(['Q1QRA', '12345', 'EI7', 'EIQSB', 'EI77', '0A1QRA', '/P', 'EI7QSB//P'])('refuses %s', (text) => {
    expect(reasonOf(text)).toMatch(/^(The call sign )?".+\.$/);
  });

  it('writes again what it read, and reads again what it wrote', () => {
    const digit = fc.constantFrom(...'0123456789');
    const base = fc.stringMatching(
      /^(?:[BFGIKMNRW]|[A-PR-Z][A-Z]|[A-PR-Z][0-9]|[1-9][A-Z])[0-9]Q[R-U][A-Z]$/,
    );
    const before = fc.constantFrom('', 'EA8/', 'F/', 'VP2E/', 'T7/');
    const after = fc.oneof(
      fc.constantFrom('', '/P', '/MM', '/QRP', '/M/QRP', '/LH'),
      digit.map((d) => `/${d}`),
    );
    const mark = fc.constantFrom('', '-#', '-3', '-3-#');
    fc.assert(
      fc.property(before, base, after, mark, (front, middle, back, end) => {
        fc.pre(front === '' || !/^\/\d$/.test(back));
        const text = front + middle + back + end;
        const call = parsed(text);
        expect(formatCallSign(call)).toBe(text);
        expect(call.base).toBe(middle);
        expect(parseCallSign(formatCallSign(call).toLowerCase())).toEqual(call);
      }),
    );
  });

  it('answers every text with a call sign that can be written again, or with a sentence', () => {
    const callLike = fc.string({ unit: fc.constantFrom(...'AEKMPQVW0137/-# é'), maxLength: 14 });
    fc.assert(
      fc.property(fc.oneof(callLike, fc.string(), fc.string({ unit: 'binary' })), (text) => {
        const call = parseCallSign(text);
        if (isRefusal(call)) expect(call.reason).toMatch(/\.$/);
        else expect(formatCallSign(call)).toBe(text.trim().toUpperCase());
      }),
      { numRuns: 5000 },
    );
  });
});

describe('demo calls', () => {
  it.each(['EI7QSB', 'EA8/EI7QRA/P', 'K1QUZ', 'EI7QSA-#', 'ja7qrr'])('knows %s as one', (call) => {
    expect(isDemoCall(call)).toBe(true);
  });

  it.each(['EI7QVA', 'EI7QR', 'EI7QAZ', 'EI7XQRA', 'QRA', ''])('does not take "%s" for one', (call) => {
    expect(isDemoCall(call)).toBe(false);
  });
});
