import { existsSync, readFileSync } from 'node:fs';
import { once } from 'node:events';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import util from 'node:util';
import { buildClient, buildServer } from './build.mjs';
import { inTurn, tryClaim } from './claim.mjs';
import { ensureDebianPackages } from './debian.mjs';
import { launch } from './launch.mjs';
import { checkNodeVersion, ensurePackages } from './packages.mjs';
import { listenForStopRequests } from './stop-requests.mjs';
import { LaunchError, createTerminal, formatElapsed, printFailure } from './terminal.mjs';

/**
 * `npm start`: everything from a fresh clone to a running program.
 *
 *   npm start                  the demo station with its simulated feed
 *   npm start -- --no-demo     a real station, in a database of its own
 *
 * Plain Node without packages up to the point where they are installed.
 */

const root = fileURLToPath(new URL('../..', import.meta.url));

const stationDatabase = 'whichwire';

/**
 * @param {{ demo: boolean, env: Record<string, string | undefined> }} options `env`: what the person has set
 * @param {(() => Promise<void>)[]} besides
 * @returns {import('./launch.mjs').Plan}
 */
function makePlan({ demo, env }, besides) {
  const wantedPort = Number(env.PORT ?? 4180);
  if (!Number.isInteger(wantedPort) || wantedPort < 1 || wantedPort > 65_535) {
    throw new LaunchError(`PORT is "${env.PORT}"; it must be a whole number from 1 to 65535.`);
  }
  const run = (/** @type {string} */ name) => ['--enable-source-maps', join('dist', `${name}.js`)];
  return {
    root,
    demo,
    database: demo ? 'whichwire_demo' : stationDatabase,
    host: env.HOST ?? '127.0.0.1',
    wantedPort,
    env: { ...env, DEMO: demo ? '1' : '0' },
    besides,
    scripts: [
      { label: 'Bringing the database up to date', args: run('migrate') },
      // Each start: it does nothing when all is there, and goes on where a broken-off one ended.
      ...(demo ? [{ label: 'Loading the demo station', args: run('load-demo') }] : []),
    ],
    processes: [
      ...(demo ? [{ name: 'feed', args: run('fake-feed') }] : []),
      { name: 'worker', args: run('worker') },
      { name: 'server', args: run('server'), readyPath: '/api/health/ready' },
    ],
  };
}

/**
 * Settings of a file `.env`, if there is one; what the environment says comes first. Empty ones do not count.
 *
 * @param {import('./terminal.mjs').Terminal} terminal
 */
function readSettings(terminal) {
  const path = join(root, '.env');
  const fromFile = existsSync(path) ? util.parseEnv(readFileSync(path, 'utf8')) : {};
  const filled = Object.entries({ ...fromFile, ...process.env }).filter(([, value]) => value !== '');
  const { DATABASE_URL, ...settings } = Object.fromEntries(filled);
  if (DATABASE_URL !== undefined) {
    terminal.line('  DATABASE_URL is set but not used: npm start keeps a database of its own.');
  }
  return settings;
}

/**
 * The demo's people, as the server itself names them: the sign-in page offers the same ones.
 *
 * @param {import('./launch.mjs').Running} running
 */
async function describeDemoAccounts({ url }) {
  const response = await fetch(`${url}/api/auth/demo-accounts`);
  /** @type {{ accounts: { email: string, password: string, does: string }[] }} */
  const { accounts } = await response.json();
  const width = Math.max(...accounts.map(({ email }) => email.length));
  return [
    'Demo accounts:',
    ...accounts.map(({ email, password, does }) => `  ${email.padEnd(width)}  ${password.padEnd(24)}${does}`),
  ];
}

/**
 * The link by which the first manager of a real station makes their account; nothing once there is one.
 *
 * @param {import('./launch.mjs').Running} running
 * @param {Record<string, string | undefined>} settings
 */
async function describeSetUp({ url, cluster, setUpToken }, settings) {
  const found = await cluster.query('SELECT count(*) FROM app_user', stationDatabase);
  if (Number(found) > 0) return [];
  const link = `${settings.PUBLIC_URL ?? url}/set-up#${settings.SETUP_TOKEN ?? setUpToken}`;
  return [
    'Nobody has an account yet. Make the station and its first manager with this link, which works once:',
    `  ${link}`,
  ];
}

async function main() {
  const startedAt = performance.now();
  const unknown = process.argv.slice(2).filter((argument) => argument !== '--no-demo');
  if (unknown.length > 0)
    throw new LaunchError(`${unknown[0]} is not known here. The one option is: npm start -- --no-demo`);
  const demo = !process.argv.includes('--no-demo');
  const terminal = createTerminal();
  const stopping = new AbortController();
  const { signal } = stopping;
  const requests = listenForStopRequests(() => stopping.abort());

  checkNodeVersion(root);
  const attempt = await tryClaim(root, 'running', `still starting, as process ${process.pid}`);
  if (!('claim' in attempt)) {
    attempt.leave();
    throw new LaunchError(`Whichwire is already running from this folder: ${attempt.heldBy}.`);
  }
  try {
    terminal.line(
      demo
        ? 'Starting Whichwire with its demo station. Ctrl-C stops it.'
        : 'Starting Whichwire. Ctrl-C stops it.',
    );
    const settings = readSettings(terminal);
    const onWait = (/** @type {string} */ holder) =>
      terminal.line(`  Waiting for another command in this folder: ${holder}.`);
    const running = await inTurn(root, `npm start, process ${process.pid}`, onWait, async () => {
      await ensurePackages(root, { terminal, signal });
      signal.throwIfAborted();
      await ensureDebianPackages({ terminal, needsBrowser: false });
      signal.throwIfAborted();
      await buildServer(root, { terminal, signal });
      const plan = makePlan({ demo, env: settings }, [() => buildClient(root, { terminal, signal })]);
      return launch(plan, { terminal, signal });
    });
    attempt.claim.describe(`${running.url}, process ${process.pid}`);
    requests.onImpatience(() => running.kill());
    terminal.line(`\nReady after ${formatElapsed(performance.now() - startedAt)}:  ${running.url}`);
    for (const text of demo ? await describeDemoAccounts(running) : await describeSetUp(running, settings))
      terminal.line(text);
    terminal.line(`Logs are in ${join(root, '.data', 'logs')}. Stop with Ctrl-C.`);

    if (!signal.aborted) await once(signal, 'abort');
    terminal.line('\nStopping.');
    await running.stop();
    terminal.line('Stopped.');
  } finally {
    await attempt.claim.release();
  }
}

process.stdout.on('error', () => undefined);
try {
  await main();
} catch (error) {
  if (error instanceof Error && error.name === 'AbortError')
    process.stdout.write('Stopped before it was up.\n');
  else {
    printFailure(error);
    process.exitCode = 1;
  }
}
