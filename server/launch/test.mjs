import { mkdtempSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { buildClient, buildServer } from './build.mjs';
import { inTurn } from './claim.mjs';
import { openThrowAwayCluster } from './cluster.mjs';
import { run, signalGroup, spawnChild } from './commands.mjs';
import { ensureDebianPackages, findChromium } from './debian.mjs';
import { checkNodeVersion, ensurePackages } from './packages.mjs';
import { listenForStopRequests } from './stop-requests.mjs';
import { readVitestReport } from './test-report.mjs';
import { LaunchError, createTerminal, printFailure } from './terminal.mjs';

/**
 * `npm test`: everything that can be checked, in one command, from a fresh clone.
 *
 *   npm test                        install what is missing, then all checks and tests
 *   npm run check                   the same without installing anything
 *   npm test -- --project unit      further arguments go to vitest and leave the other steps out
 *
 * The last line is always `N passed, N failed`: each test and each other step counts as one.
 */

const root = fileURLToPath(new URL('../..', import.meta.url));

/** @typedef {{ env: NodeJS.ProcessEnv, signal: AbortSignal, terminal: import('./terminal.mjs').Terminal }} Context */
/** @typedef {{ label: string, work: (context: Context) => Promise<void> }} Step */

/**
 * @param {string} label
 * @param {string[]} args for this Node
 * @returns {Step}
 */
function nodeStep(label, args) {
  return {
    label,
    work: async ({ env, signal }) => {
      const { code, output } = await run(process.execPath, args, { cwd: root, env, signal });
      if (code !== 0) throw new LaunchError(`${label} found:\n${output}`);
    },
  };
}

/**
 * What changes the checkout is done in turn with a `npm start` beside us. The tests are not: they start the
 * program themselves.
 *
 * @param {import('./terminal.mjs').Terminal} terminal
 * @param {() => Promise<void>} work
 */
function alone(terminal, work) {
  const onWait = (/** @type {string} */ holder) =>
    terminal.line(`  Waiting for another command in this folder: ${holder}.`);
  return inTurn(root, `npm test, process ${process.pid}`, onWait, work);
}

/** Independent of each other: run two at a time, the slowest first. @type {Step[]} */
const steps = [
  nodeStep('Types (vue-tsc)', ['node_modules/vue-tsc/bin/vue-tsc.js', '--noEmit']),
  nodeStep('Rules and import directions (eslint)', [
    'node_modules/eslint/bin/eslint.js',
    '--max-warnings',
    '0',
    '.',
  ]),
  {
    label: 'Production build',
    work: ({ terminal, signal }) =>
      alone(terminal, async () => {
        await buildServer(root, { terminal, signal });
        await buildClient(root, { terminal, signal });
      }),
  },
  nodeStep('Format (prettier)', [
    'node_modules/prettier/bin/prettier.cjs',
    '--check',
    '--log-level',
    'warn',
    '.',
  ]),
  nodeStep('Entities match the migrations', ['--import', 'tsx', 'server/database/check-drift.ts']),
];

const lanes = 2;

/**
 * @param {Context} context
 * @returns {Promise<{ passed: number, failed: number }>}
 */
async function runSteps(context) {
  const waiting = [...steps];
  /** @type {string[]} */
  const findings = [];
  const work = async () => {
    for (let step = waiting.shift(); step !== undefined && !context.signal.aborted; step = waiting.shift()) {
      const { label, work: perform } = step;
      try {
        await context.terminal.step(label, () => perform(context));
      } catch (error) {
        context.signal.throwIfAborted();
        findings.push(
          error instanceof LaunchError
            ? error.message
            : `${label}: ${error instanceof Error ? error.stack : error}`,
        );
      }
    }
  };
  await Promise.all(Array.from({ length: lanes }, work));
  context.signal.throwIfAborted();
  for (const finding of findings) context.terminal.line(`\n${finding}`);
  return { passed: steps.length - findings.length, failed: findings.length };
}

/**
 * @param {Context} context
 * @param {string[]} args
 */
async function runVitest({ env, signal, terminal }, args) {
  const folder = mkdtempSync(join(tmpdir(), 'whichwire-report-'));
  const reportPath = join(folder, 'report.json');
  try {
    const child = spawnChild(
      process.execPath,
      [
        ...['node_modules/vitest/vitest.mjs', 'run', '--allowOnly=false'],
        ...['--reporter=default', '--reporter=json', `--outputFile.json=${reportPath}`, ...args],
      ],
      { cwd: root, env, stdio: ['ignore', 'inherit', 'inherit'] },
    );
    const stop = () => signalGroup(child.pid, 'SIGTERM');
    signal.addEventListener('abort', stop, { once: true });
    const code = await new Promise((resolve, reject) => {
      child.once('error', reject);
      child.once('close', (exitCode) => resolve(exitCode ?? 1));
    });
    signal.removeEventListener('abort', stop);
    signal.throwIfAborted();
    const { notes, ...counts } = readVitestReport(readReport(reportPath), code);
    for (const note of notes) terminal.line(note);
    return counts;
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

/** @param {string} path */
function readReport(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8'));
  } catch {
    return null;
  }
}

async function main() {
  const mayInstall = !process.argv.includes('--installed');
  const vitestArgs = process.argv.slice(2).filter((argument) => argument !== '--installed');
  const terminal = createTerminal();
  const stopping = new AbortController();
  const { signal } = stopping;
  listenForStopRequests(() => stopping.abort());

  checkNodeVersion(root);
  terminal.line(mayInstall ? 'Testing Whichwire.' : 'Checking Whichwire, installing nothing.');
  await alone(terminal, async () => {
    await ensurePackages(root, { terminal, signal, mayInstall });
    signal.throwIfAborted();
    await ensureDebianPackages({ terminal, needsBrowser: true, mayInstall });
  });
  signal.throwIfAborted();
  const given = process.env.TEST_DATABASE_URL;
  const cluster = given
    ? null
    : await terminal.step('Making a throw-away database', () => openThrowAwayCluster({ signal }));
  try {
    if (cluster === null) terminal.line('  Using the database of TEST_DATABASE_URL.');
    const url = cluster?.url('postgres', 'postgres') ?? given;
    const env = { ...process.env, TEST_DATABASE_URL: url, CHROMIUM_PATH: findChromium() ?? '' };
    const context = { env, signal, terminal };
    const checked = vitestArgs.length > 0 ? { passed: 0, failed: 0 } : await runSteps(context);
    const tested = await runVitest(context, vitestArgs);
    return { passed: checked.passed + tested.passed, failed: checked.failed + tested.failed };
  } finally {
    await cluster?.stop();
  }
}

try {
  const { passed, failed } = await main();
  process.exitCode = failed === 0 ? 0 : 1;
  process.stdout.write(`${passed} passed, ${failed} failed\n`);
} catch (error) {
  process.exitCode = 1;
  if (error instanceof Error && error.name === 'AbortError')
    process.stdout.write('Stopped before the end.\n');
  else printFailure(error);
  process.stdout.write('0 passed, 1 failed\n');
}
