import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createTextDecoder, guessEncoding, type Encoding } from './decode.ts';

function decode(bytes: Buffer, encoding: Encoding, cuts: readonly number[] = []): string {
  const decoder = createTextDecoder(encoding);
  let text = '';
  let from = 0;
  for (const cut of [...new Set([...cuts, bytes.length])].sort((a, b) => a - b)) {
    if (cut <= from || cut > bytes.length) continue;
    text += decoder.write(bytes.subarray(from, cut));
    from = cut;
  }
  return text + decoder.end();
}

describe('createTextDecoder', () => {
  it('gives the same text wherever the bytes are cut', () => {
    const text = fc.string({ unit: 'grapheme', maxLength: 20 });
    fc.assert(
      fc.property(text, fc.array(fc.nat(60), { maxLength: 6 }), fc.boolean(), (written, cuts, hasMark) => {
        fc.pre(!written.startsWith('\ufeff'));
        const whole = (hasMark ? '\ufeff' : '') + written;
        expect(decode(Buffer.from(whole, 'utf8'), 'utf-8', cuts)).toBe(written);
        expect(decode(Buffer.from(whole, 'utf16le'), 'utf-16le', cuts)).toBe(written);
        expect(decode(Buffer.from(whole, 'utf16le').swap16(), 'utf-16be', cuts)).toBe(written);
      }),
    );
  });

  it('lets the byte order mark rule over the encoding asked for', () => {
    expect(decode(Buffer.from('\ufeffé', 'utf8'), 'windows-1252')).toBe('é');
    expect(decode(Buffer.from('\ufeffé', 'utf16le'), 'utf-8')).toBe('é');
  });

  it('reads the Western one-byte encodings by their tables', () => {
    // Code charts of Windows-1252 and ISO 8859-15: 0xE9 é in both; 0x80 and 0xA4 are the euro sign.
    expect(decode(Buffer.from([0xe9, 0x80, 0x92]), 'windows-1252')).toBe('é€’');
    expect(decode(Buffer.from([0xe9, 0xa4]), 'iso-8859-15')).toBe('é€');
  });

  it('marks bytes that mean nothing instead of dropping them', () => {
    expect(decode(Buffer.from([0x41, 0xff, 0x42]), 'utf-8')).toBe('A\ufffdB');
    expect(decode(Buffer.from([0x41]), 'utf-8')).toBe('A');
    expect(decode(Buffer.alloc(0), 'utf-8')).toBe('');
  });
});

describe('guessEncoding', () => {
  const line = 'utc,rx,call\n2026-01-05T18:00:00Z,EI7QSA,EA8QSH\n';
  it.each([
    ['utf-8', Buffer.from(line)],
    ['utf-8', Buffer.from(`é${line}`).subarray(0, 40)],
    ['utf-8', Buffer.from(`${line}é`).subarray(0, line.length + 1)],
    ['utf-16le', Buffer.from(line, 'utf16le')],
    ['utf-16be', Buffer.from(line, 'utf16le').swap16()],
    ['windows-1252', Buffer.from(`Sk\u00e4rm\n${line}`, 'latin1')],
  ] as const)('knows %s (example %#)', (encoding, bytes) => {
    expect(guessEncoding(Buffer.from(bytes))).toBe(encoding);
  });
});
