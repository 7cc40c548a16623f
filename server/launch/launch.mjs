import { existsSync, mkdirSync, realpathSync } from 'node:fs';
import { createHash } from 'node:crypto';
import { join } from 'node:path';
import { run, lastLines } from './commands.mjs';
import { chooseHome, openStationCluster } from './cluster.mjs';
import { databaseAccount } from './debian.mjs';
import { firstFreePort, freePort } from './ports.mjs';
import { keepSecrets } from './secrets.mjs';
import { createSupervisor } from './supervisor.mjs';
import { LaunchError } from './terminal.mjs';

/**
 * From a prepared checkout to a running program: database, one-time scripts, processes; and back.
 *
 * What runs is data (`Plan`); how it is started, watched and ended is here.
 */

/** @typedef {Record<string, string | undefined>} Environment */
/**
 * @typedef {object} Plan
 * @property {string} root the checkout
 * @property {boolean} demo with a simulated feed and a mail box for show on free ports
 * @property {string} database
 * @property {string} host
 * @property {number} wantedPort the next free one is taken when it is in use
 * @property {Environment} env what every script and process gets, beside what is made here
 * @property {{ label: string, args: string[] }[]} scripts run to their end, one after the other, before the processes
 * @property {{ name: string, args: string[], readyPath?: string }[]} processes started in this order, ended together
 * @property {(() => Promise<void>)[]} besides work that may go on while the database is prepared, and must be done before the processes start
 * @property {string} [outsideFolder] where the cluster lives when the database's user cannot reach the checkout
 */
/**
 * @typedef {object} Running
 * @property {string} url
 * @property {string | undefined} setUpToken lets its holder make the first account of a station without any
 * @property {import('./cluster.mjs').Cluster} cluster
 * @property {() => Record<string, number | undefined>} pids of the processes, by name
 * @property {() => void} kill ends the processes at once; `stop` must still be awaited
 * @property {() => Promise<void>} stop
 */

/**
 * @param {Plan} plan
 * @param {{ terminal: import('./terminal.mjs').Terminal, signal?: AbortSignal }} options
 * @returns {Promise<Running>}
 */
export async function launch(plan, { terminal, signal }) {
  const { root } = plan;
  const dataFolder = join(root, '.data');
  const logFolder = join(dataFolder, 'logs');
  // The database's user must be able to pass through; what is secret in here is closed by itself.
  mkdirSync(dataFolder, { recursive: true, mode: 0o755 });
  mkdirSync(logFolder, { recursive: true, mode: 0o700 });
  const secrets = keepSecrets(join(dataFolder, 'secrets.json'), ['jwt', 'setUp']);
  /** @param {string} text */
  const say = (text) => terminal.line(text);
  /** @type {import('./cluster.mjs').Cluster | null} */
  let cluster = null;
  const supervisor = createSupervisor({ root, logFolder, say });
  const stop = async () => {
    await supervisor.stop();
    await cluster?.stop();
  };

  try {
    const besides = settle(plan.besides.map((work) => work()));
    try {
      const account = databaseAccount();
      const home = await chooseHome({
        dataFolder,
        outsideFolder: plan.outsideFolder ?? defaultOutsideFolder(root),
        account,
      });
      const isFirst = !existsSync(home);
      cluster = await terminal.step(
        isFirst ? `Making the database in ${home}` : 'Starting the database',
        async () => {
          const opened = await openStationCluster({ home, account, say, signal });
          // Known to `stop` before anything else can fail.
          cluster = opened;
          await opened.ensureDatabase(plan.database);
          return opened;
        },
      );
      const scriptEnv = {
        ...plan.env,
        DATABASE_URL: cluster.url(plan.database),
        JWT_SECRET: secrets.jwt,
      };
      for (const script of plan.scripts) {
        await terminal.step(script.label, () =>
          runScript(script, { root, env: scriptEnv, terminal, signal }),
        );
      }
    } finally {
      // Neither half may be left working in the background, whatever became of the other.
      await besides;
    }
    signal?.throwIfAborted();

    const port = await firstFreePort(plan.wantedPort, plan.host);
    if (port !== plan.wantedPort)
      say(`  Port ${plan.wantedPort} is taken on this machine; using ${port} instead.`);
    const url = `http://${plan.host === '0.0.0.0' ? '127.0.0.1' : plan.host}:${port}`;
    const [feedPort, mailPort] = [await freePort(), await freePort()];
    /** @type {Environment} */
    const env = {
      PUBLIC_URL: url,
      JWT_SECRET: secrets.jwt,
      SETUP_TOKEN: secrets.setUp,
      CLIENT_FOLDER: join(root, 'dist', 'client'),
      ...plan.env,
      // In the demo both are played on this machine, whatever a real station's settings say.
      ...(plan.demo
        ? { FEED_HOST: '127.0.0.1', FEED_PORT: String(feedPort), MAIL_URL: `smtp://127.0.0.1:${mailPort}` }
        : {}),
      NODE_ENV: 'production',
      DATABASE_URL: cluster.url(plan.database),
      HOST: plan.host,
      PORT: String(port),
    };
    for (const { name, args, readyPath } of plan.processes) {
      const readyUrl = readyPath === undefined ? undefined : `${url}${readyPath}`;
      const begin = () => supervisor.start({ name, args, env, readyUrl }, signal);
      if (readyUrl === undefined) await begin();
      else await terminal.step(`Starting the ${name}`, begin);
    }
    return {
      url,
      setUpToken: secrets.setUp,
      cluster,
      pids: () => supervisor.pids(),
      kill: () => supervisor.kill(),
      stop,
    };
  } catch (error) {
    await stop();
    throw error;
  }
}

/**
 * One promise for all, which fails with the first failure only after every one of them has ended.
 *
 * @param {Promise<void>[]} works
 */
function settle(works) {
  const all = Promise.allSettled(works).then((outcomes) => {
    const failed = outcomes.find((outcome) => outcome.status === 'rejected');
    if (failed !== undefined) throw failed.reason;
  });
  // Its failure is thrown where it is awaited; until then it must not count as unhandled.
  all.catch(() => undefined);
  return all;
}

/**
 * @param {{ label: string, args: string[] }} script
 * @param {{ root: string, env: Environment, terminal: import('./terminal.mjs').Terminal, signal?: AbortSignal }} options
 */
async function runScript({ label, args }, { root, env, terminal, signal }) {
  const { code, output } = await run(process.execPath, args, {
    cwd: root,
    env: { ...env, NODE_ENV: 'production' },
    signal,
    onLine: (line) => terminal.progress(line),
  });
  if (code !== 0) throw new LaunchError(`${label}: ended with code ${code}.\n${lastLines(output, 20)}`);
}

/** @param {string} root */
export function defaultOutsideFolder(root) {
  // Not /var/tmp: Debian's clean-up removes files there that were not touched for thirty days.
  return `/var/lib/whichwire-${createHash('sha256').update(realpathSync(root)).digest('hex').slice(0, 16)}`;
}
