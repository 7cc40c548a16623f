import { createHash } from 'node:crypto';
import type { IncomingMessage } from 'node:http';
import { pipeline, Readable } from 'node:stream';
import { createGzip } from 'node:zlib';
import busboy from 'busboy';
import { InvalidRequest, TooLarge } from '../../platform/errors.ts';

export const mostUploadBytes = 2 * 2 ** 30;
/** Pieces as they are stored: large enough for few rows, small enough for flat memory. */
const chunkBytes = 2 ** 20;
/** Three times as fast as the usual level, for a fifth more room. */
const packingLevel = 1;
const longestFileName = 200;

export interface ReceivedUpload {
  fileName: string;
  /** As sent. */
  sizeBytes: number;
  sha256: Buffer;
}

/**
 * Takes the one file of a multipart request piece by piece, packed with gzip unless it comes packed, and
 * hands each piece on before it reads further: memory stays flat whatever the file's size. Throws
 * InvalidRequest or TooLarge with the rest of the request read and dropped, so that the answer arrives.
 */
export async function receiveUpload(
  req: IncomingMessage,
  storeChunk: (chunkNo: number, data: Buffer) => Promise<void>,
): Promise<ReceivedUpload> {
  const form = openForm(req);
  let stored: Promise<ReceivedUpload> | null = null;
  let isSecond = false;
  try {
    await new Promise<void>((resolve, reject) => {
      form.on('file', (field, file, { filename }) => {
        if (field !== 'file' || stored !== null) {
          isSecond ||= stored !== null;
          file.resume();
          return;
        }
        stored = storeFile(file, cleanFileName(filename), storeChunk);
        // A file that is refused is not read to its end, and the form would wait for that.
        stored.catch(reject);
      });
      form.on('close', resolve);
      form.on('error', () => reject(fileFault('The form is cut off or damaged. Send the file again.')));
      req.once('close', () => {
        if (!req.complete) reject(fileFault('The upload was broken off.'));
      });
      req.pipe(form);
    });
  } catch (error) {
    req.unpipe(form);
    req.resume();
    // Ends the file's stream too, and with it what stores it.
    form.destroy();
    await settled(stored);
    throw error;
  }
  if (stored === null) throw fileFault('Send a file in the field "file".');
  const received = await (stored as Promise<ReceivedUpload>);
  if (isSecond) throw fileFault('Send one file at a time.');
  if (received.sizeBytes === 0) throw fileFault('The file is empty.');
  return received;
}

async function settled(work: Promise<unknown> | null): Promise<void> {
  await work?.catch(() => undefined);
}

function openForm(req: IncomingMessage): busboy.Busboy {
  const announced = Number(req.headers['content-length'] ?? 0);
  if (announced > mostUploadBytes + 65_536) throw tooLarge();
  try {
    return busboy({
      headers: req.headers,
      defParamCharset: 'utf8',
      limits: { files: 2, fields: 10, fieldSize: 1000, fileSize: mostUploadBytes },
    });
  } catch {
    throw fileFault('Send the file as multipart/form-data.');
  }
}

async function storeFile(
  file: Readable & { truncated?: boolean },
  fileName: string,
  storeChunk: (chunkNo: number, data: Buffer) => Promise<void>,
): Promise<ReceivedUpload> {
  const hash = createHash('sha256');
  let sizeBytes = 0;
  async function* measured(): AsyncGenerator<Buffer, void, void> {
    for await (const bytes of file as AsyncIterable<Buffer>) {
      hash.update(bytes);
      sizeBytes += bytes.length;
      yield bytes;
    }
  }
  const pieces = measured();
  const start = await takeStart(pieces);
  refuseForeign(start);
  const whole = joined(start, pieces);
  let chunkNo = 0;
  for await (const chunk of inChunks(isGzip(start) ? whole : packed(whole)))
    await storeChunk(chunkNo++, chunk);
  if (file.truncated === true) throw tooLarge();
  return { fileName, sizeBytes, sha256: hash.digest() };
}

async function takeStart(pieces: AsyncGenerator<Buffer, void, void>): Promise<Buffer> {
  let start = Buffer.alloc(0);
  while (start.length < 8) {
    const next = await pieces.next();
    if (next.done) break;
    start = Buffer.concat([start, next.value]);
  }
  return start;
}

async function* joined(start: Buffer, rest: AsyncIterable<Buffer>): AsyncGenerator<Buffer, void, void> {
  if (start.length > 0) yield start;
  yield* rest;
}

function packed(source: AsyncIterable<Buffer>): AsyncIterable<Buffer> {
  const gzip = createGzip({ level: packingLevel });
  // Errors of the source reach the reader through the packer that they destroy.
  pipeline(Readable.from(source, { objectMode: false }), gzip, () => undefined);
  return gzip;
}

async function* inChunks(source: AsyncIterable<Buffer>): AsyncGenerator<Buffer, void, void> {
  let held: Buffer[] = [];
  let bytes = 0;
  for await (const piece of source) {
    held.push(piece);
    bytes += piece.length;
    if (bytes < chunkBytes) continue;
    yield Buffer.concat(held);
    held = [];
    bytes = 0;
  }
  if (bytes > 0) yield Buffer.concat(held);
}

function isGzip(start: Buffer): boolean {
  return start[0] === 0x1f && start[1] === 0x8b && start[2] === 8;
}

/** First bytes of what is often sent by mistake. */
const foreign: readonly { magic: string; message: string }[] = [
  {
    magic: '504b0304',
    message: 'This is a ZIP archive or a spreadsheet. Unpack it, or save the sheet as CSV, and send that.',
  },
  { magic: 'd0cf11e0', message: 'This is a spreadsheet. Save it as CSV and send that.' },
  { magic: '25504446', message: 'This is a PDF. Send delimited text (CSV), or spot lines.' },
  { magic: '425a68', message: 'This file is packed with bzip2. Send it unpacked or packed with gzip.' },
  { magic: 'fd377a585a', message: 'This file is packed with xz. Send it unpacked or packed with gzip.' },
  { magic: '377abcaf271c', message: 'This is a 7-Zip archive. Send the file unpacked or packed with gzip.' },
  { magic: '28b52ffd', message: 'This file is packed with Zstandard. Send it unpacked or packed with gzip.' },
];

function refuseForeign(start: Buffer): void {
  const hex = start.toString('hex');
  const found = foreign.find(({ magic }) => hex.startsWith(magic));
  if (found !== undefined) throw fileFault(found.message);
}

/** A name to show, never a path to open: control characters and slashes are out, and it is not endless. */
export function cleanFileName(name: string | undefined): string {
  const last = (name ?? '').split(/[\\/]/).at(-1)!;
  const clean = [...last]
    .filter((character) => character >= ' ' && character !== '\u007f')
    .slice(0, longestFileName)
    .join('')
    .trim();
  return clean === '' ? 'unnamed file' : clean;
}

function fileFault(message: string): InvalidRequest {
  return new InvalidRequest('The file cannot be taken.', [{ path: 'body.file', message }]);
}

function tooLarge(): TooLarge {
  return new TooLarge(
    `The file is larger than ${mostUploadBytes / 2 ** 30} GB. Split it, or pack it with gzip.`,
  );
}
