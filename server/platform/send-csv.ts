import type { Response } from 'express';
import { csvLine } from './csv.ts';

type Cells = (string | number | null | undefined)[];

/** Streams rows as a CSV download, waiting for a slow reader instead of filling the memory. */
export async function sendCsv(
  res: Response,
  fileName: string,
  header: string[],
  rows: AsyncIterable<Cells> | Iterable<Cells>,
): Promise<void> {
  res.status(200);
  res.setHeader('Content-Type', 'text/csv; charset=utf-8');
  res.setHeader('Content-Disposition', `attachment; filename="${fileName.replace(/[^A-Za-z0-9._-]/g, '_')}"`);
  res.setHeader('Cache-Control', 'no-store');
  let batch = csvLine(header);
  for await (const cells of rows) {
    batch += csvLine(cells);
    if (batch.length < 65_536) continue;
    if (res.destroyed) return;
    if (!res.write(batch)) await drainedOrClosed(res);
    batch = '';
  }
  res.end(batch);
}

/** Takes both listeners off again: a long download waits thousands of times on one response. */
function drainedOrClosed(res: Response): Promise<void> {
  return new Promise((resolve) => {
    const done = () => {
      res.off('drain', done).off('close', done);
      resolve();
    };
    res.on('drain', done).on('close', done);
  });
}
