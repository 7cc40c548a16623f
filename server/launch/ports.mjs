import { createServer } from 'node:net';
import { LaunchError } from './terminal.mjs';

/**
 * The port the kernel gives when asked for any; released again before it is returned, so its user
 * must be ready for the rare case that somebody else was quicker.
 *
 * @param {string} [host]
 * @returns {Promise<number>}
 */
export async function freePort(host = '127.0.0.1') {
  const port = await tryPort(0, host);
  if (port === null) throw new LaunchError(`No free port could be found on ${host}.`);
  return port;
}

/**
 * The wanted port, or the next free one above it.
 *
 * @param {number} wanted
 * @param {string} [host]
 */
export async function firstFreePort(wanted, host = '127.0.0.1') {
  for (let port = wanted; port < Math.min(wanted + 100, 65_536); port += 1) {
    if ((await tryPort(port, host)) !== null) return port;
  }
  throw new LaunchError(
    `The ports ${wanted} to ${wanted + 99} on ${host} are all taken; set PORT to a free one.`,
  );
}

/**
 * @param {number} port
 * @param {string} host
 * @returns {Promise<number | null>} null when taken
 */
function tryPort(port, host) {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.once('error', (/** @type {NodeJS.ErrnoException} */ error) => {
      if (error.code === 'EADDRINUSE') resolve(null);
      else if (error.code === 'EADDRNOTAVAIL')
        reject(new LaunchError(`This machine has no address ${host}; set HOST to one it has.`));
      else if (error.code === 'EACCES')
        reject(new LaunchError(`Port ${port} needs more rights than this user has; set PORT above 1023.`));
      else reject(error);
    });
    server.listen({ port, host, exclusive: true }, () => {
      const address = server.address();
      server.close(() => resolve(typeof address === 'object' && address !== null ? address.port : null));
    });
  });
}
