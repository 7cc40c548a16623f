import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { createLineSplitter, type SplitLine } from './line-splitter.ts';

const bytes = (text: string): Uint8Array => Buffer.from(text, 'utf8');

function split(chunks: Uint8Array[], limit?: number): { lines: SplitLine[]; rest: SplitLine | null } {
  const splitter = createLineSplitter(limit);
  const lines = chunks.flatMap((chunk) => splitter.push(chunk));
  return { lines, rest: splitter.end() };
}

const texts = (lines: SplitLine[]): string[] => lines.map(({ text }) => text);

describe('the line splitter', () => {
  const stream = bytes('first\r\nsecond\n\nfourth\rfünfte ☃\r\r\nlast');
  const whole = { lines: ['first', 'second', '', 'fourth', 'fünfte ☃', ''], rest: 'last' };

  it('gives the same lines wherever the stream is cut in two', () => {
    for (let cut = 0; cut <= stream.length; cut++) {
      const { lines, rest } = split([stream.subarray(0, cut), stream.subarray(cut)]);
      expect({ lines: texts(lines), rest: rest?.text }, `cut at byte ${cut}`).toEqual(whole);
    }
  });

  it('gives the same lines when every byte comes alone', () => {
    const { lines, rest } = split([...stream].map((byte) => Uint8Array.of(byte)));
    expect({ lines: texts(lines), rest: rest?.text }).toEqual(whole);
  });

  it('gives the same lines for any cuts of any bytes', () => {
    const chunk = fc.array(fc.oneof(fc.constantFrom(0x0d, 0x0a), fc.integer({ min: 0, max: 255 })), {
      maxLength: 40,
    });
    fc.assert(
      fc.property(fc.array(chunk, { maxLength: 12 }), (chunks) => {
        const pieces = chunks.map((piece) => Uint8Array.from(piece));
        const inOne = split([Uint8Array.from(chunks.flat())], 20);
        expect(split(pieces, 20)).toEqual(inOne);
      }),
    );
  });

  it('gives back any texts that were joined with any line ends', () => {
    const line = fc.string({ unit: 'grapheme', maxLength: 20 }).filter((text) => !/[\r\n]/.test(text));
    const ended = fc.tuple(line, fc.constantFrom('\r\n', '\n'));
    fc.assert(
      fc.property(fc.array(ended, { maxLength: 10 }), (parts) => {
        const { lines, rest } = split([bytes(parts.map(([text, end]) => text + end).join(''))]);
        expect(texts(lines)).toEqual(parts.map(([text]) => text));
        expect(rest).toBeNull();
      }),
    );
  });

  it('cuts a line without end at the limit, says so, and finds the next line', () => {
    const endless = Array.from({ length: 1000 }, () => bytes('x'.repeat(100)));
    const { lines, rest } = split([...endless, bytes('\r\nDX de\r\n')]);
    expect(lines).toEqual([
      { text: 'x'.repeat(512), cut: true },
      { text: 'DX de', cut: false },
    ]);
    expect(rest).toBeNull();
  });

  it('takes a line of just the limit whole', () => {
    expect(split([bytes(`${'x'.repeat(512)}\n${'y'.repeat(513)}\n`)]).lines.map(({ cut }) => cut)).toEqual([
      false,
      true,
    ]);
  });

  it('replaces what is not UTF-8 and goes on', () => {
    const { lines } = split([Uint8Array.of(0x41, 0xff, 0xfb, 0x42, 0x0a, 0xc3, 0x0a, 0x43, 0x0a)]);
    expect(texts(lines)).toEqual(['A\ufffd\ufffdB', '\ufffd', 'C']);
  });
});
