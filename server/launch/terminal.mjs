/**
 * What the person at the terminal sees: one line a step, with the time it took.
 *
 * Steps that take longer than a second announce themselves first, so that nobody watches a silent
 * screen while packages are downloaded; quick ones print their result only.
 */

/** A failure that has a cure the person can read; it is printed without a stack trace. */
export class LaunchError extends Error {
  /** @param {string} message a whole sentence or more, ending in what to do about it */
  constructor(message) {
    super(message);
    this.name = 'LaunchError';
  }
}

/**
 * @typedef {object} Terminal
 * @property {(text?: string) => void} line
 * @property {(text: string) => void} progress how far a step has come; each replaces the one before where the screen can do so
 * @property {<T>(label: string, work: () => Promise<T>) => Promise<T>} step
 */

const announceAfterMs = 1_000;
const eraseLine = '\r\u001b[2K';

/** @param {number} milliseconds */
export function formatElapsed(milliseconds) {
  const tenths = Math.round(milliseconds / 100);
  if (tenths < 600) return `${(tenths / 10).toFixed(1)} s`;
  const seconds = Math.round(milliseconds / 1_000);
  return `${Math.floor(seconds / 60)} min ${String(seconds % 60).padStart(2, '0')} s`;
}

/**
 * @param {(text: string) => void} [put] where the text goes, line ends included
 * @param {boolean} [canRewrite] whether `put` ends on a screen that understands control codes
 * @returns {Terminal}
 */
export function createTerminal(
  put = (text) => process.stdout.write(text),
  canRewrite = process.stdout.isTTY === true,
) {
  let isProgressShown = false;
  /** @param {string} text */
  const write = (text) => {
    put(`${isProgressShown ? eraseLine : ''}${text}\n`);
    isProgressShown = false;
  };
  return {
    line: (text = '') => write(text),
    progress: (text) => {
      if (!canRewrite) return write(`      ${text}`);
      put(`${isProgressShown ? eraseLine : ''}      ${text}`);
      isProgressShown = true;
    },
    async step(label, work) {
      const startedAt = performance.now();
      const announcement = setTimeout(() => write(`  ... ${label}`), announceAfterMs);
      try {
        const result = await work();
        clearTimeout(announcement);
        write(`  ok  ${label} (${formatElapsed(performance.now() - startedAt)})`);
        return result;
      } catch (error) {
        clearTimeout(announcement);
        write(`  !!  ${label}: failed after ${formatElapsed(performance.now() - startedAt)}`);
        throw error;
      }
    },
  };
}

/**
 * Prints a failure the way its kind deserves: a sentence for what the person can cure, the stack
 * for what only a programmer can.
 *
 * @param {unknown} error
 */
export function printFailure(error) {
  const { code, path } = /** @type {NodeJS.ErrnoException} */ (error ?? {});
  if (error instanceof LaunchError) process.stderr.write(`\n${error.message}\n`);
  else if (code === 'EACCES' || code === 'EPERM') {
    process.stderr.write(
      `\nThis user may not use ${path}. Run it as the owner of that file, or give it to this user.\n`,
    );
  } else if (code === 'ENOSPC')
    process.stderr.write('\nThe disk is full. Make room, then try again; nothing half-made is kept.\n');
  else process.stderr.write(`\n${error instanceof Error ? error.stack : String(error)}\n`);
}
