import iconv from 'iconv-lite';
import type { FileFormat } from '../contracts/import.ts';

export type Encoding = FileFormat['encoding'];

export interface TextDecoder {
  /** The text of these bytes; what a character's first bytes leave open comes with the next call. */
  write(bytes: Buffer): string;
  end(): string;
}

/** The encoding that a byte order mark at the start of a file names, or null without one. */
export function encodingOfMark(start: Buffer): Encoding | null {
  if (start[0] === 0xef && start[1] === 0xbb && start[2] === 0xbf) return 'utf-8';
  if (start[0] === 0xff && start[1] === 0xfe) return 'utf-16le';
  if (start[0] === 0xfe && start[1] === 0xff) return 'utf-16be';
  return null;
}

/**
 * Bytes to text, in pieces of any size. A byte order mark rules over the encoding asked for, since it can
 * hardly stand there by chance, and is left out of the text. Bytes that mean nothing become U+FFFD, which
 * no field accepts: the line is then refused by the field it stands in.
 */
export function createTextDecoder(encoding: Encoding): TextDecoder {
  let start: Buffer = Buffer.alloc(0);
  let decoder: iconv.DecoderStream | null = null;
  const begin = (): iconv.DecoderStream => iconv.getDecoder(encodingOfMark(start) ?? encoding);
  return {
    write(bytes) {
      if (decoder !== null) return decoder.write(bytes);
      // The mark may be cut in two.
      start = start.length === 0 ? bytes : Buffer.concat([start, bytes]);
      if (start.length < 3) return '';
      decoder = begin();
      return decoder.write(start);
    },
    end() {
      let rest = '';
      if (decoder === null) {
        decoder = begin();
        rest = decoder.write(start);
      }
      return rest + (decoder.end() ?? '');
    },
  };
}

/**
 * What a file is most likely written in, by its first bytes: the mark, else the zero bytes that Latin
 * letters leave in UTF-16, else UTF-8 where it is valid, else the usual one of Western Windows.
 */
export function guessEncoding(start: Buffer): Encoding {
  const marked = encodingOfMark(start);
  if (marked !== null) return marked;
  let evenZeros = 0;
  let oddZeros = 0;
  for (let i = 0; i < start.length; i++) {
    if (start[i] === 0) {
      if (i % 2 === 0) evenZeros++;
      else oddZeros++;
    }
  }
  const many = start.length / 8;
  if (oddZeros > many || evenZeros > many) return oddZeros >= evenZeros ? 'utf-16le' : 'utf-16be';
  return isUtf8Start(start) ? 'utf-8' : 'windows-1252';
}

/** Whether the bytes are UTF-8, the last character of which may be cut off. */
function isUtf8Start(bytes: Buffer): boolean {
  try {
    new globalThis.TextDecoder('utf-8', { fatal: true }).decode(bytes, { stream: true });
    return true;
  } catch {
    return false;
  }
}
