import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join, resolve } from 'node:path';
import { afterEach, beforeEach, expect, test, vi } from 'vitest';
import { inTurn, tryClaim } from './claim.mjs';

// Real processes: on a busy machine they take longer to begin than a unit test may.
vi.setConfig({ testTimeout: 60_000 });

let root: string;

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'launch-claim-'));
});

afterEach(() => rmSync(root, { recursive: true, force: true }));

async function claimOrFail(what: 'running' | 'preparing', description: string) {
  const attempt = await tryClaim(root, what, description);
  if (!('claim' in attempt)) throw new Error(`held by ${attempt.heldBy}`);
  return attempt.claim;
}

test('whoever comes second learns what the first one is doing now', async () => {
  const claim = await claimOrFail('running', 'still starting');
  claim.describe('http://127.0.0.1:4180, process 17');
  const second = await tryClaim(root, 'running', 'second');
  expect(second).toMatchObject({ heldBy: 'http://127.0.0.1:4180, process 17' });
  await claim.release();
});

test('after a release the next one may begin', async () => {
  await (await claimOrFail('running', 'first')).release();
  const next = await claimOrFail('running', 'second');
  await next.release();
  await expect(tryClaim(root, 'running', 'third')).resolves.toHaveProperty('claim');
});

test('running and preparing do not stand in each other’s way', async () => {
  const running = await claimOrFail('running', 'one');
  const preparing = await claimOrFail('preparing', 'two');
  await Promise.all([running.release(), preparing.release()]);
});

test('a holder killed with -9 leaves no claim behind', async () => {
  const script = `
    import { tryClaim } from ${JSON.stringify(resolve('server/launch/claim.mjs'))};
    await tryClaim(${JSON.stringify(root)}, 'running', 'the one to be killed');
    process.stdout.write('held'); setInterval(() => {}, 1000);`;
  const holder = spawn(process.execPath, ['--input-type=module', '-e', script], {
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  await once(holder.stdout, 'data');
  const refused = await tryClaim(root, 'running', 'second');
  if ('claim' in refused) throw new Error('the holder did not hold');
  expect(refused.heldBy).toBe('the one to be killed');
  holder.kill('SIGKILL');
  await refused.ended;
  const claim = await claimOrFail('running', 'second');
  await claim.release();
});

test('works that take turns never overlap', async () => {
  let inside = 0;
  let most = 0;
  const waited: string[] = [];
  const work = (name: string) =>
    inTurn(
      root,
      name,
      (heldBy) => waited.push(heldBy),
      async () => {
        inside += 1;
        most = Math.max(most, inside);
        await new Promise((done) => setImmediate(done));
        inside -= 1;
        return name;
      },
    );
  const results = await Promise.all([work('first'), work('second'), work('third')]);
  expect(results).toEqual(['first', 'second', 'third']);
  expect(most).toBe(1);
  expect(waited.length).toBeGreaterThanOrEqual(2);
});
