/**
 * How long an import takes, and how much memory: `npx tsx tests/bench/import.bench.ts [rows]` (1,000,000
 * unless given). Prints, measured in the same run on a throw-away cluster:
 * - the import job (text to stored, deduplicated spots) over raw `psql \copy` of the same rows into an
 *   unindexed table;
 * - the parts of reading alone, and csv-parse on the same text, as ratios to the same;
 * - the growth of server and worker over their idle size while 200 MB go through both.
 */
import { execFileSync, spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { createWriteStream, mkdtempSync, openAsBlob, readFileSync, rmSync, statSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createInterface } from 'node:readline';
import { gzipSync } from 'node:zlib';
import { parse } from 'csv-parse/sync';
import type { DataSource } from 'typeorm';
import type { SpotMapping } from '../../shared/contracts/import.ts';
import { createFileReader } from '../../shared/imports/file-reader.ts';
import { guessMapping } from '../../shared/imports/guess-mapping.ts';
import { createSpotRowReader, type SpotRowReader } from '../../shared/imports/spot-rows.ts';
import { openThrowAwayCluster } from '../../server/launch/cluster.mjs';
import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { Membership } from '../../server/database/entities/membership.ts';
import { Receiver } from '../../server/database/entities/receiver.ts';
import { User } from '../../server/database/entities/user.ts';
import { loadReadingContext } from '../../server/database/import-context.ts';
import { migrate } from '../../server/database/migrate.ts';
import { importRepository } from '../../server/features/imports/import.repository.ts';
import { enqueueJob } from '../../server/platform/job-queue.ts';
import { hashPassword } from '../../server/platform/password.ts';
import { runImportJob } from '../../worker/imports/import.job.ts';
import { madeUpHeader, madeUpRow, startJobRunner } from '../helpers/imports.ts';
import { insertStation } from '../helpers/station-rows.ts';

const rows = Number(process.argv[2] ?? 1_000_000);
const largeBytes = 200 * 2 ** 20;
const runs = 3;
const folder = mkdtempSync(join(tmpdir(), 'import-bench-'));
const cluster = await openThrowAwayCluster();
await cluster.ensureDatabase('bench');
await cluster.query('CREATE EXTENSION btree_gist', 'bench');
const url = cluster.url('bench');
const dataSource = await connectDataSource(createDataSource({ url, poolSize: 6 }));
const children: ChildProcess[] = [];
try {
  await migrate(dataSource);
  const { stationId } = await insertStation(dataSource);
  for (const callSign of ['EI7QSA', 'EI7QSC', 'EI7QSD']) {
    await dataSource.getRepository(Receiver).save({ stationId, callSign, label: callSign });
  }
  const file = join(folder, 'spots.csv');
  await writeRows(file, rows);
  console.log(`${rows} rows, ${(statSync(file).size / 1e6).toFixed(0)} MB`);
  await measureSpeed(stationId, file);
  await measureMemory(stationId);
} finally {
  for (const child of children) {
    child.kill('SIGTERM');
    if (child.exitCode === null) await once(child, 'exit');
  }
  await dataSource.destroy();
  await cluster.stop();
  rmSync(folder, { recursive: true, force: true });
}

async function writeRows(path: string, count: number, maxBytes = Infinity): Promise<number> {
  const out = createWriteStream(path);
  out.write(`${madeUpHeader}\n`);
  let bytes = 0;
  let n = 0;
  while (n < count && bytes < maxBytes) {
    let piece = '';
    for (let i = 0; i < 10_000 && n < count; i++, n++) piece += `${madeUpRow(n)}\n`;
    bytes += piece.length;
    if (!out.write(piece)) await once(out, 'drain');
  }
  out.end();
  await once(out, 'finish');
  return n;
}

function best(times: readonly number[]): number {
  return Math.min(...times);
}

async function timed(work: () => unknown): Promise<number> {
  const start = performance.now();
  await work();
  return (performance.now() - start) / 1000;
}

async function measureSpeed(stationId: number, file: string): Promise<void> {
  await dataSource.query(
    'CREATE TABLE raw_copy (utc timestamptz, rx text, call text, khz numeric, mode text, snr smallint, wpm smallint)',
  );
  const raw: number[] = [];
  const imported: number[] = [];
  // In turn, so that what else the machine does meets both.
  for (let run = 0; run < runs; run++) {
    await dataSource.query('TRUNCATE raw_copy');
    raw.push(
      await timed(() =>
        execFileSync('psql', ['-q', '-d', url, '-c', `\\copy raw_copy FROM '${file}' CSV HEADER`]),
      ),
    );
    await dataSource.query('TRUNCATE spot, dirty_block');
    imported.push(await importOnce(stationId, file));
  }
  const unit = best(raw);
  const ratio = (seconds: number) => `${(seconds / unit).toFixed(2)} x`;
  console.log(`psql \\copy, unindexed: ${unit.toFixed(2)} s (best of ${runs}) = 1 x`);
  console.log(
    `import job:            ${best(imported).toFixed(2)} s = ${ratio(best(imported))} (target 4, then 3)`,
  );
  const bytes = readFileSync(file);
  const mapping = await mappingOf(stationId, bytes);
  const records = await timed(() => readAll(bytes, mapping, null));
  console.log(`  of it records alone: ${records.toFixed(2)} s = ${ratio(records)}`);
  const reading = await loadReadingContext(dataSource.manager, stationId, Date.now());
  const whole = await timed(() =>
    readAll(bytes, mapping, (header) => createSpotRowReader(mapping, header, reading)),
  );
  console.log(`  records and rows:    ${whole.toFixed(2)} s = ${ratio(whole)}`);
  const theirs = await timed(() => parse(bytes, { info: true }));
  console.log(`csv-parse, records:    ${theirs.toFixed(2)} s = ${ratio(theirs)}`);
}

function readAll(
  bytes: Buffer,
  mapping: SpotMapping,
  compile: ((header: readonly string[] | null) => SpotRowReader) | null,
): void {
  const reader = createFileReader(mapping);
  let readRow: SpotRowReader | null = null;
  for (let at = 0; at < bytes.length; at += 262_144) {
    for (const record of reader.push(bytes.subarray(at, at + 262_144))) {
      if (compile === null) continue;
      readRow ??= compile(reader.header);
      readRow(record);
    }
  }
  reader.end();
}

async function mappingOf(stationId: number, bytes: Buffer): Promise<SpotMapping> {
  const reading = await loadReadingContext(dataSource.manager, stationId, Date.now());
  return guessMapping(bytes.subarray(0, 100_000), 'spots', reading) as SpotMapping;
}

/** The job alone: the file is stored as an upload would store it. */
async function importOnce(stationId: number, file: string): Promise<number> {
  const { manager } = dataSource;
  const bytes = readFileSync(file);
  const id = await importRepository.begin(manager, { stationId, kind: 'spots', createdBy: null });
  const packed = gzipSync(bytes, { level: 1 });
  for (let at = 0, no = 0; at < packed.length; at += 2 ** 20, no++) {
    await importRepository.storeChunk(manager, stationId, id, no, packed.subarray(at, at + 2 ** 20));
  }
  const about = { fileName: 'spots.csv', sizeBytes: bytes.length, sha256: Buffer.alloc(32) };
  await importRepository.complete(manager, stationId, id, about);
  await importRepository.queue(manager, stationId, id, await mappingOf(stationId, bytes));
  await enqueueJob(manager, stationId, 'import', { importId: id });
  const runner = startJobRunner(dataSource, 'bench', { import: runImportJob });
  const record = await untilEnded(dataSource, id);
  await runner.stop();
  if (record.stored !== rows)
    throw new Error(`stored ${record.stored} of ${rows} rows: ${record.error ?? ''}`);
  return record.seconds;
}

async function untilEnded(source: DataSource, id: number) {
  for (;;) {
    const [row]: { state: string; stored: number; error: string | null; seconds: number }[] =
      await source.query(
        `SELECT state, rows_stored AS stored, error,
         extract(epoch FROM finished_at - started_at)::float8 AS seconds FROM import WHERE id = $1`,
        [id],
      );
    if (row!.state === 'done' || row!.state === 'failed') return row!;
    await new Promise((resolve) => setTimeout(resolve, 100));
  }
}

async function measureMemory(stationId: number): Promise<void> {
  await dataSource.query('TRUNCATE spot, dirty_block');
  const file = join(folder, 'large.csv');
  await writeRows(file, Infinity, largeBytes);
  const password = 'a password for the bench';
  const user = await dataSource
    .getRepository(User)
    .save({ email: 'bench@station.example', name: 'Bench', passwordHash: await hashPassword(password) });
  await dataSource.getRepository(Membership).save({ stationId, userId: user.id, role: 'operator' });
  const server = startProcess('server/main.ts');
  const worker = startProcess('worker/main.ts');
  const port = await portOf(server);
  const api = `http://127.0.0.1:${port}/api`;
  const ask = async (path: string, body: unknown, headers: Record<string, string> = {}) => {
    const isForm = body instanceof FormData;
    const reply = await fetch(`${api}${path}`, {
      method: 'POST',
      headers: { ...headers, ...(isForm ? {} : { 'content-type': 'application/json' }) },
      body: isForm ? body : JSON.stringify(body),
    });
    if (!reply.ok) throw new Error(`${path}: ${reply.status} ${await reply.text()}`);
    return (await reply.json()) as Record<string, unknown>;
  };
  const { accessToken } = await ask('/auth/sign-in', { email: user.email, password });
  const headers = { authorization: `Bearer ${String(accessToken)}` };
  await new Promise((resolve) => setTimeout(resolve, 2_000));
  const idle = { server: residentMb(server, 'VmRSS'), worker: residentMb(worker, 'VmRSS') };
  const form = new FormData();
  form.append('file', await openAsBlob(file), 'large.csv');
  const { id } = await ask(`/stations/${stationId}/imports?kind=spots`, form, headers);
  const { guess } = await ask(`/stations/${stationId}/imports/${String(id)}/preview`, {}, headers);
  await ask(`/stations/${stationId}/imports/${String(id)}/start`, { mapping: guess }, headers);
  const record = await untilEnded(dataSource, Number(id));
  console.log(
    `${(statSync(file).size / 2 ** 20).toFixed(0)} MB, ${record.stored} rows through server and worker:`,
  );
  for (const [name, child] of Object.entries({ server, worker })) {
    const peak = residentMb(child, 'VmHWM');
    const base = idle[name as keyof typeof idle];
    console.log(`  ${name}: ${base} MB idle, ${peak} MB at most, growth ${peak - base} MB (goal: under 150)`);
  }
}

function startProcess(entry: string): ChildProcess {
  const child = spawn(process.execPath, ['--import', 'tsx', entry], {
    env: {
      ...process.env,
      DATABASE_URL: url,
      JWT_SECRET: 'only for the bench, thirty-two characters long',
      PORT: '0',
      LOG_LEVEL: 'info',
    },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  children.push(child);
  return child;
}

async function portOf(child: ChildProcess): Promise<number> {
  for await (const line of createInterface({ input: child.stdout! })) {
    const entry = JSON.parse(line) as { msg?: string; port?: number };
    if (entry.msg === 'listening') {
      child.stdout!.resume();
      return entry.port!;
    }
  }
  throw new Error('The server ended before it listened.');
}

/** From the kernel's own books: resident now (VmRSS) or at most (VmHWM). */
function residentMb(child: ChildProcess, what: 'VmRSS' | 'VmHWM'): number {
  const status = readFileSync(`/proc/${child.pid}/status`, 'utf8');
  return Math.round(Number(new RegExp(`${what}:\\s+(\\d+)`).exec(status)![1]) / 1024);
}
