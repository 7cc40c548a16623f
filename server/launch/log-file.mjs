import { closeSync, existsSync, openSync, renameSync, statSync, writeSync } from 'node:fs';

const keepBytes = 20 * 1_024 * 1_024;

/**
 * A log file that cannot fill the disk: at 20 MB it becomes `<path>.1` (replacing the last one) and
 * begins anew. A station runs for years under `npm start`.
 *
 * @param {string} path
 * @param {number} [limitBytes]
 */
export function openLogFile(path, limitBytes = keepBytes) {
  let descriptor = openSync(path, 'a', 0o600);
  let size = statSync(path).size;
  return {
    /** @param {string} line without its line end */
    write(line) {
      if (size > limitBytes) {
        closeSync(descriptor);
        if (existsSync(path)) renameSync(path, `${path}.1`);
        descriptor = openSync(path, 'a', 0o600);
        size = 0;
      }
      size += writeSync(descriptor, `${line}\n`);
    },
    close() {
      closeSync(descriptor);
    },
  };
}
