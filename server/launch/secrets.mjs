import { randomBytes } from 'node:crypto';
import { chmodSync, readFileSync, renameSync, writeFileSync } from 'node:fs';

/** @returns {string} 192 random bits, safe in addresses and shells */
export function makeSecret() {
  return randomBytes(24).toString('base64url');
}

/**
 * The secrets of this installation, made at the first start and kept readable to their owner only.
 * Written beside and renamed, so that a start broken off here leaves all of them or none.
 *
 * @param {string} path
 * @param {string[]} names
 * @returns {Record<string, string>}
 */
export function keepSecrets(path, names) {
  /** @type {Record<string, string>} */
  const secrets = readSecrets(path);
  const missing = names.filter((name) => typeof secrets[name] !== 'string');
  if (missing.length > 0) {
    for (const name of missing) secrets[name] = makeSecret();
    writeFileSync(`${path}.new`, `${JSON.stringify(secrets, null, 2)}\n`, { mode: 0o600 });
    renameSync(`${path}.new`, path);
  }
  chmodSync(path, 0o600);
  return secrets;
}

/** @param {string} path */
function readSecrets(path) {
  try {
    return JSON.parse(readFileSync(path, 'utf8'));
  } catch (error) {
    if (/** @type {NodeJS.ErrnoException} */ (error).code === 'ENOENT') return {};
    throw error;
  }
}
