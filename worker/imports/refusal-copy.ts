import { Readable } from 'node:stream';
import { pipeline } from 'node:stream/promises';
import type pg from 'pg';
import { from as copyFrom } from 'pg-copy-streams';
import type { EntityManager } from 'typeorm';

export interface LineRefusal {
  lineNo: number;
  field: string | null;
  reason: string;
  raw: string;
}

/** Small chunks cost a message each. */
const chunkChars = 65_536;

/** Stores refused lines in the caller's transaction. */
export async function copyRefusals(
  manager: EntityManager,
  stationId: number,
  importId: number,
  refusals: readonly LineRefusal[],
): Promise<void> {
  if (refusals.length === 0) return;
  const client = (await manager.queryRunner!.connect()) as pg.PoolClient;
  const stream = client.query(
    copyFrom('COPY import_refusal (station_id, import_id, line_no, field, reason, raw) FROM STDIN'),
  );
  await pipeline(Readable.from(copyText(stationId, importId, refusals), { objectMode: false }), stream);
}

function* copyText(
  stationId: number,
  importId: number,
  refusals: readonly LineRefusal[],
): Generator<string, void, void> {
  let chunk = '';
  for (const { lineNo, field, reason, raw } of refusals) {
    chunk += `${stationId}\t${importId}\t${lineNo}\t${field === null ? '\\N' : copyCell(field)}\t`;
    chunk += `${copyCell(reason)}\t${copyCell(raw)}\n`;
    if (chunk.length < chunkChars) continue;
    yield chunk;
    chunk = '';
  }
  yield chunk;
}

const escapes: Readonly<Record<string, string>> = { '\\': '\\\\', '\t': '\\t', '\n': '\\n', '\r': '\\r' };

/** PostgreSQL's text cannot hold U+0000: a file in the wrong encoding is full of it. */
function copyCell(text: string): string {
  return text.replaceAll('\u0000', '\ufffd').replace(/[\\\t\n\r]/g, (character) => escapes[character]!);
}
