import { mkdtempSync, readFileSync, rmSync, statSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import type { AddressInfo } from 'node:net';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { openLogFile } from './log-file.mjs';
import { firstFreePort } from './ports.mjs';
import { keepSecrets } from './secrets.mjs';
import { createTerminal, formatElapsed } from './terminal.mjs';
import { readVitestReport } from './test-report.mjs';

let folder: string;

beforeEach(() => {
  folder = mkdtempSync(join(tmpdir(), 'launch-parts-'));
});

afterEach(() => rmSync(folder, { recursive: true, force: true }));

describe('secrets', () => {
  test('they are made once, kept, and readable to their owner only', () => {
    const path = join(folder, 'secrets.json');
    const first = keepSecrets(path, ['jwt']);
    const second = keepSecrets(path, ['jwt', 'setUp']);
    expect(first.jwt).toMatch(/^[\w-]{32}$/);
    expect(second.jwt).toBe(first.jwt);
    expect(second.setUp).not.toBe(first.jwt);
    expect(statSync(path).mode & 0o777).toBe(0o600);
  });
});

describe('ports', () => {
  test('a taken port leads to the next free one', async () => {
    const server = createServer();
    await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve));
    const taken = (server.address() as AddressInfo).port;
    const found = await firstFreePort(taken);
    expect(found).toBeGreaterThan(taken);
    expect(found).toBeLessThan(taken + 100);
    await new Promise((resolve) => server.close(resolve));
  });

  test('an address this machine does not have is named in the refusal', async () => {
    // 192.0.2.0/24 is reserved for documentation (RFC 5737): no machine has it.
    await expect(firstFreePort(4180, '192.0.2.1')).rejects.toThrow('This machine has no address 192.0.2.1');
  });
});

describe('log files', () => {
  test('a full one becomes the previous one, and no line is lost between them', () => {
    const path = join(folder, 'server.log');
    const log = openLogFile(path, 10);
    for (const line of ['one', 'two', 'three', 'four']) log.write(line);
    log.close();
    expect(readFileSync(`${path}.1`, 'utf8')).toBe('one\ntwo\nthree\n');
    expect(readFileSync(path, 'utf8')).toBe('four\n');
  });

  test('lines are added to what an earlier start has left', () => {
    const path = join(folder, 'server.log');
    writeFileSync(path, 'earlier\n');
    const log = openLogFile(path);
    log.write('now');
    log.close();
    expect(readFileSync(path, 'utf8')).toBe('earlier\nnow\n');
  });
});

describe('the terminal', () => {
  test.each([
    [340, '0.3 s'],
    [59_900, '59.9 s'],
    [61_000, '1 min 01 s'],
    [119_700, '2 min 00 s'],
  ])('%d ms read as %s', (milliseconds, text) => {
    expect(formatElapsed(milliseconds)).toBe(text);
  });

  test('on a screen each progress text replaces the one before, and the result replaces the last', async () => {
    let shown = '';
    const terminal = createTerminal((text) => (shown += text), true);
    await terminal.step('Loading', async () => {
      terminal.progress('night 1');
      terminal.progress('night 2');
    });
    expect(shown).toMatch(/^ {6}night 1\r\u001b\[2K {6}night 2\r\u001b\[2K {2}ok {2}Loading \(0\.\d s\)\n$/);
  });

  test('in a log file each progress text is a line', () => {
    let written = '';
    const terminal = createTerminal((text) => (written += text), false);
    terminal.progress('night 1');
    terminal.progress('night 2');
    expect(written).toBe('      night 1\n      night 2\n');
  });

  test('a failed step is said to have failed and passes its error on', async () => {
    const lines: string[] = [];
    const step = createTerminal((text) => lines.push(text), false).step('Building', () =>
      Promise.reject(new Error('no room')),
    );
    await expect(step).rejects.toThrow('no room');
    expect(lines).toEqual([expect.stringMatching(/^ {2}!! {2}Building: failed after/)]);
  });
});

describe('what the test report means', () => {
  const report = (over: object) => ({
    numPassedTests: 3,
    numFailedTests: 0,
    numPendingTests: 0,
    numTodoTests: 0,
    testResults: [{ name: 'a.test.ts', status: 'passed', assertionResults: [{ status: 'passed' }] }],
    ...over,
  });
  const broken = { name: 'b.test.ts', status: 'failed', message: 'cannot be loaded', assertionResults: [] };

  test.each([
    ['passed tests count', report({}), 0, { passed: 3, failed: 0 }],
    ['failed tests count', report({ numFailedTests: 2 }), 1, { passed: 3, failed: 2 }],
    ['no report is a failure', null, 1, { passed: 0, failed: 1 }],
    [
      'no test at all is a failure',
      report({ numPassedTests: 0, testResults: [] }),
      0,
      { passed: 0, failed: 1 },
    ],
    [
      'a file that cannot be loaded is a failure',
      report({ testResults: [broken] }),
      1,
      { passed: 3, failed: 1 },
    ],
    ['a skipped test is a failure', report({ numPendingTests: 1 }), 0, { passed: 3, failed: 1 }],
    ['an error outside the tests is a failure', report({}), 1, { passed: 3, failed: 1 }],
  ])('%s', (_title, given, exitCode, counts) => {
    expect(readVitestReport(given, exitCode)).toMatchObject(counts);
  });
});
