import { spawn } from 'node:child_process';
import { once } from 'node:events';
import { resolve } from 'node:path';
import { createInterface } from 'node:readline';
import { expect, test, vi } from 'vitest';

// Real processes: on a busy machine they take longer to begin than a unit test may.
vi.setConfig({ testTimeout: 60_000 });

const listener = `
  import { listenForStopRequests } from ${JSON.stringify(resolve('server/launch/stop-requests.mjs'))};
  const alive = setInterval(() => {}, 1000);
  listenForStopRequests(() => { console.log('asked to stop'); clearInterval(alive); });
  console.log('pid ' + process.pid);`;

/** The listener under a shell of its own, as npm runs it; `lines` is what it prints. */
async function runUnderShell() {
  const shell = spawn('sh', ['-c', '"$0" --input-type=module -e "$1" & wait', process.execPath, listener], {
    env: { PATH: process.env.PATH, npm_lifecycle_event: 'start' },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const reader = createInterface({ input: shell.stdout });
  const lines: string[] = [];
  reader.on('line', (line) => lines.push(line));
  const closed = once(reader, 'close');
  const [first] = (await once(reader, 'line')) as [string];
  return { shell, pid: Number(first.slice(4)), lines, closed };
}

test.each(['SIGINT', 'SIGTERM', 'SIGHUP'] as const)('%s is a request to stop, heard once', async (signal) => {
  const { pid, lines, closed } = await runUnderShell();
  process.kill(pid, signal);
  await closed;
  expect(lines.slice(1)).toEqual(['asked to stop']);
});

test('a launcher whose npm was killed with -9 stops too', async () => {
  const { shell, lines, closed } = await runUnderShell();
  shell.kill('SIGKILL');
  await closed;
  expect(lines.slice(1)).toEqual(['asked to stop']);
});
