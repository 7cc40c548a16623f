import { spawn, type ChildProcess } from 'node:child_process';
import { once } from 'node:events';
import { connect } from 'node:net';
import { createInterface } from 'node:readline';
import { afterEach, describe, expect, it } from 'vitest';

const processes: ChildProcess[] = [];

afterEach(() => {
  for (const child of processes.splice(0)) if (child.exitCode === null) child.kill('SIGKILL');
});

function start(env: Record<string, string>): ChildProcess {
  const main = new URL('./main.ts', import.meta.url).pathname;
  const child = spawn(process.execPath, ['--import', 'tsx', main], {
    env: { ...process.env, ...env },
    stdio: ['ignore', 'pipe', 'pipe'],
  });
  processes.push(child);
  return child;
}

async function portOf(child: ChildProcess): Promise<number> {
  for await (const line of createInterface({ input: child.stdout! })) {
    const entry = JSON.parse(line) as { msg: string; port?: number };
    if (entry.msg === 'listening' && entry.port !== undefined) return entry.port;
  }
  throw new Error('the fake feed ended before it listened');
}

describe('the fake feed process', () => {
  it('speaks spot lines of the three receivers to whoever logs in, and ends at once when told', async () => {
    const child = start({ FEED_PORT: '0', FEED_SPEED: '600', LOG_LEVEL: 'info' });
    const socket = connect(await portOf(child), '127.0.0.1');
    socket.write('EI7QSB\r\n');
    const receivers = new Set<string>();
    for await (const line of createInterface({ input: socket })) {
      const spot =
        /^DX de (EI7Q\w\w)-#: +(\d+\.\d) +([A-Z0-9]+Q[R-U][A-Z]) +CW +(\d+) dB +(\d+) WPM +(CQ|DX) +(\d{4})Z$/.exec(
          line,
        );
      if (spot) receivers.add(spot[1]!);
      if (receivers.size === 3) break;
    }
    expect([...receivers].sort()).toEqual(['EI7QSA', 'EI7QSC', 'EI7QSD']);
    socket.destroy();
    const ended = once(child, 'exit');
    child.kill('SIGTERM');
    expect(await ended).toEqual([0, null]);
  }, 60_000);

  it('says in a sentence which variable is wrong', async () => {
    const child = start({ FEED_PORT: '0', FEED_SPEED: 'fast' });
    let said = '';
    child.stderr!.on('data', (bytes: Buffer) => (said += bytes.toString()));
    const [code] = (await once(child, 'close')) as [number];
    expect(code).toBe(1);
    expect(said).toContain('FEED_SPEED');
  }, 60_000);
});
