import { existsSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { runOrFail } from './commands.mjs';
import { LaunchError } from './terminal.mjs';

/**
 * Fails with a sentence when Node is older than package.json asks for.
 *
 * @param {string} root
 * @param {string} [version] "20.20.2"
 */
export function checkNodeVersion(root, version = process.versions.node) {
  const { engines } = JSON.parse(readFileSync(join(root, 'package.json'), 'utf8'));
  const wanted = String(engines?.node ?? '>=20').replace('>=', '');
  const [haveMajor = 0, haveMinor = 0] = version.split('.').map(Number);
  const [wantMajor = 0, wantMinor = 0] = wanted.split('.').map(Number);
  if (haveMajor > wantMajor || (haveMajor === wantMajor && haveMinor >= wantMinor)) return;
  throw new LaunchError(`Whichwire needs Node ${wanted} or newer; this is Node ${version}.`);
}

/**
 * Why the installed packages are not those of package-lock.json, or null when they are.
 *
 * npm writes node_modules/.package-lock.json as the last act of an installation: a broken-off one
 * has none, and a finished one names each package with its version and checksum.
 *
 * @param {string} root
 * @returns {string | null}
 */
export function whyPackagesAreStale(root) {
  const installedPath = join(root, 'node_modules', '.package-lock.json');
  if (!existsSync(installedPath)) return 'not installed yet';
  /** @type {Record<string, { version?: string, integrity?: string, optional?: boolean, devOptional?: boolean }>} */
  const locked = readLock(join(root, 'package-lock.json'));
  /** @type {typeof locked} */
  const installed = readLock(installedPath);
  for (const [path, entry] of Object.entries(locked)) {
    if (path === '') continue;
    const present = installed[path];
    if (present === undefined) {
      // Optional packages are those for other processors and systems.
      if (entry.optional || entry.devOptional) continue;
      return `${path} is missing`;
    }
    if (present.version !== entry.version || present.integrity !== entry.integrity)
      return `${path} has another version`;
    if (!existsSync(join(root, path, 'package.json'))) return `${path} was removed`;
  }
  for (const path of Object.keys(installed)) {
    if (locked[path] === undefined) return `${path} is no longer wanted`;
  }
  return null;
}

/** @param {string} path */
function readLock(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8')).packages ?? {};
  } catch {
    return {};
  }
}

/**
 * @param {string} root
 * @param {{ terminal: import('./terminal.mjs').Terminal, signal?: AbortSignal, mayInstall?: boolean }} options
 */
export async function ensurePackages(root, { terminal, signal, mayInstall = true }) {
  const reason = whyPackagesAreStale(root);
  if (reason === null) return;
  if (!mayInstall)
    throw new LaunchError(`The npm packages are not those of package-lock.json (${reason}). Run: npm ci`);
  await terminal.step(`Installing the npm packages: ${reason}`, async () => {
    await runOrFail('npm', ['ci', '--no-audit', '--no-fund'], {
      cwd: root,
      purpose: 'install the npm packages',
      // Without this npm leaves the development packages out, and the client could not be built.
      env: { ...process.env, NODE_ENV: 'development', npm_config_omit: '', npm_config_include: 'dev' },
      signal,
    });
    const still = whyPackagesAreStale(root);
    if (still !== null)
      throw new LaunchError(`npm ci ended well, but the packages are still incomplete: ${still}.`);
  });
}
