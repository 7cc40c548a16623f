import { createHash } from 'node:crypto';
import { realpathSync } from 'node:fs';
import { connect, createServer } from 'node:net';

/**
 * "Only one at a time", held by the kernel: a listening socket with an abstract name (Linux) made
 * from the checkout's path. It vanishes with its process however that ends, so that, unlike a lock
 * file, it can never be stale. Whoever comes second can ask the holder what it is doing.
 */

/** @typedef {{ describe(text: string): void, release(): Promise<void> }} Claim */
/** @typedef {{ heldBy: string, ended: Promise<void>, leave(): void }} Holder `ended`: resolves when the holder is gone */

/**
 * @param {string} root the checkout
 * @param {'running' | 'preparing'} what
 * @param {string} description told to those who come second
 * @returns {Promise<{ claim: Claim } | Holder>}
 */
export async function tryClaim(root, what, description) {
  const key = createHash('sha256').update(realpathSync(root)).digest('hex').slice(0, 24);
  const name = `\0whichwire-${what}-${key}`;
  for (;;) {
    const claim = await listen(name, description);
    if (claim !== null) return { claim };
    const holder = await ask(name);
    if (holder !== null) return holder;
    // The holder ended between our two questions: try again.
  }
}

/**
 * Waits for its turn, then does the work alone.
 *
 * @template T
 * @param {string} root
 * @param {string} description
 * @param {(heldBy: string) => void} onWait
 * @param {() => Promise<T>} work
 * @returns {Promise<T>}
 */
export async function inTurn(root, description, onWait, work) {
  for (;;) {
    const attempt = await tryClaim(root, 'preparing', description);
    if ('claim' in attempt) {
      try {
        return await work();
      } finally {
        await attempt.claim.release();
      }
    }
    onWait(attempt.heldBy);
    await attempt.ended;
  }
}

/**
 * @param {string} name
 * @param {string} description
 * @returns {Promise<Claim | null>}
 */
function listen(name, description) {
  return new Promise((resolve, reject) => {
    let told = description;
    /** @type {Set<import('node:net').Socket>} */
    const askers = new Set();
    const server = createServer((socket) => {
      askers.add(socket);
      socket.on('error', () => socket.destroy());
      socket.on('close', () => askers.delete(socket));
      // The connection stays open: its end tells the asker that the holder is gone.
      socket.write(`${told}\n`);
    });
    server.once('error', (/** @type {NodeJS.ErrnoException} */ error) => {
      if (error.code === 'EADDRINUSE') resolve(null);
      else reject(error);
    });
    server.listen(name, () => {
      server.unref();
      resolve({
        describe: (text) => {
          told = text;
        },
        release: () =>
          new Promise((released) => {
            server.close(() => released());
            for (const socket of askers) socket.destroy();
          }),
      });
    });
  });
}

/**
 * @param {string} name
 * @returns {Promise<Holder | null>}
 */
function ask(name) {
  return new Promise((resolve) => {
    const socket = connect(name);
    /** @type {Promise<void>} */
    const ended = new Promise((done) => socket.once('close', () => done()));
    let heard = '';
    socket.on('error', () => undefined);
    socket.once('close', () => resolve(null));
    socket.on('data', (chunk) => {
      heard += chunk.toString('utf8');
      if (!heard.endsWith('\n')) return;
      resolve({ heldBy: heard.trimEnd(), ended, leave: () => socket.destroy() });
    });
  });
}
