import {
  accessSync,
  constants,
  existsSync,
  mkdirSync,
  readFileSync,
  readdirSync,
  writeFileSync,
} from 'node:fs';
import { delimiter, join } from 'node:path';
import { runOrFail } from './commands.mjs';
import { LaunchError } from './terminal.mjs';

/** Programs that come from Debian instead of npm: PostgreSQL to store, Chromium to test and print. */

const debianPostgres = '/usr/lib/postgresql';
const createClusterSettings = '/etc/postgresql-common/createcluster.conf';

/**
 * The folder with initdb, postgres and psql.
 *
 * @param {string} [majorVersion] "15"; without it the newest installed
 * @returns {string | null}
 */
export function findPostgres(majorVersion) {
  const versions = existsSync(debianPostgres)
    ? readdirSync(debianPostgres).filter((name) => /^\d+$/.test(name))
    : [];
  const candidates = versions
    .sort((one, other) => Number(other) - Number(one))
    .filter((version) => majorVersion === undefined || version === majorVersion)
    .map((version) => join(debianPostgres, version, 'bin'));
  // Another system than Debian keeps them on the search path; their version is seen when they run.
  if (majorVersion === undefined || versions.length === 0)
    candidates.push(...(process.env.PATH ?? '').split(delimiter).filter((folder) => folder !== ''));
  return (
    candidates.find((folder) =>
      ['initdb', 'postgres', 'psql'].every((name) => isProgram(join(folder, name))),
    ) ?? null
  );
}

/** @returns {string | null} Chromium's program file; CHROMIUM_PATH comes first */
export function findChromium() {
  const candidates = [process.env.CHROMIUM_PATH, '/usr/bin/chromium', '/usr/bin/chromium-browser'];
  return candidates.find((path) => path !== undefined && path !== '' && isProgram(path)) ?? null;
}

/** @param {string} path */
function isProgram(path) {
  try {
    accessSync(path, constants.X_OK);
    return true;
  } catch {
    return false;
  }
}

/**
 * Installs what is missing, as root; everybody else is told the one line to run.
 *
 * @param {{
 *   terminal: import('./terminal.mjs').Terminal,
 *   needsBrowser: boolean,
 *   mayInstall?: boolean,
 * }} options
 */
export async function ensureDebianPackages({ terminal, needsBrowser, mayInstall = true }) {
  const wanted = [
    ...(findPostgres() === null ? ['postgresql'] : []),
    // Chromium by itself brings no font at all: text would be measured as empty boxes.
    ...(needsBrowser && findChromium() === null ? ['chromium', 'fonts-dejavu-core'] : []),
  ];
  if (wanted.length === 0) return;
  const install = `apt-get install -y --no-install-recommends ${wanted.join(' ')}`;
  if (!mayInstall || process.getuid?.() !== 0) {
    throw new LaunchError(
      `Missing on this machine: ${wanted.join(', ')}. Run this once, then try again:\n\n  sudo ${install}\n`,
    );
  }
  if (!isProgram('/usr/bin/apt-get')) {
    throw new LaunchError(
      `Missing on this machine: ${wanted.join(', ')}. Install them with the system's own package manager.`,
    );
  }
  await terminal.step(`Installing from Debian: ${wanted.join(', ')}`, async () => {
    if (wanted.includes('postgresql')) keepDebianFromStartingItsOwnCluster();
    const env = { ...process.env, DEBIAN_FRONTEND: 'noninteractive' };
    // No signal and no parent-death signal: a package manager cut off half-way leaves a broken system.
    const common = { cwd: '/', env, deathSignal: null };
    const waitForLock = ['-o', 'DPkg::Lock::Timeout=300'];
    await runOrFail('apt-get', [...waitForLock, 'update'], {
      ...common,
      purpose: 'read the list of Debian packages',
    });
    await runOrFail('apt-get', [...waitForLock, ...install.split(' ').slice(1)], {
      ...common,
      purpose: 'install from Debian',
    });
  });
  if (findPostgres() === null || (needsBrowser && findChromium() === null)) {
    throw new LaunchError(
      `Debian's packages ${wanted.join(', ')} are installed, but their programs cannot be found.`,
    );
  }
}

/**
 * Debian's package makes and starts a cluster of its own on port 5432 when it is installed. Nobody
 * asked for that one; where the machine's owner has already said what they want, that stands.
 */
function keepDebianFromStartingItsOwnCluster() {
  if (existsSync(createClusterSettings)) return;
  mkdirSync('/etc/postgresql-common', { recursive: true });
  writeFileSync(
    createClusterSettings,
    '# Whichwire keeps a private cluster; no common one is made.\ncreate_main_cluster = false\n',
  );
}

/**
 * The account that may run PostgreSQL, which refuses to run as root.
 *
 * @returns {import('./commands.mjs').Account | null} null: this process's own user
 */
export function databaseAccount() {
  return process.getuid?.() === 0 ? findAccount('postgres') : null;
}

/**
 * @param {string | number} wanted a name or a user id
 * @returns {import('./commands.mjs').Account}
 */
export function findAccount(wanted) {
  for (const line of readFileSync('/etc/passwd', 'utf8').split('\n')) {
    const [name = '', , uid, gid, , home = '/'] = line.split(':');
    if (name === wanted || (typeof wanted === 'number' && Number(uid) === wanted)) {
      return { name, uid: Number(uid), gid: Number(gid), home };
    }
  }
  throw new LaunchError(
    `PostgreSQL cannot run as root, and this machine has no user ${wanted} to run it as.`,
  );
}
