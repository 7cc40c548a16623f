import { createHash } from 'node:crypto';
import { readFileSync, readdirSync, statSync } from 'node:fs';
import { join } from 'node:path';

/**
 * One hash over the contents of files and folders: what a build was made from. Contents, not times:
 * a fresh clone, a branch switch and a restored backup all carry times that mean nothing.
 *
 * @param {string} root
 * @param {string[]} sources files or folders below `root`; tests inside them and sources that do not exist do not count
 */
export function fingerprint(root, sources) {
  const hash = createHash('sha256');
  for (const source of sources) {
    for (const path of filesBelow(root, source)) {
      hash
        .update(`${path}\0`)
        .update(readFileSync(join(root, path)))
        .update('\0');
    }
  }
  return hash.digest('hex');
}

/**
 * @param {string} root
 * @param {string} path
 * @returns {string[]}
 */
function filesBelow(root, path) {
  const stats = statSync(join(root, path), { throwIfNoEntry: false });
  if (stats === undefined) return [];
  if (!stats.isDirectory()) return path.endsWith('.test.ts') ? [] : [path];
  return readdirSync(join(root, path))
    .sort()
    .flatMap((name) => filesBelow(root, join(path, name)));
}
