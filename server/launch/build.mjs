import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { runOrFail } from './commands.mjs';
import { fingerprint } from './fingerprint.mjs';
import { LaunchError, createTerminal, printFailure } from './terminal.mjs';

/**
 * The production build: server, worker and scripts in one esbuild call, the client by Vite. Each
 * half is made again only when its sources have changed; what it was made from is noted in
 * dist/built.json after it succeeded, so that a broken-off build is made again.
 */

/** @typedef {import('./terminal.mjs').Terminal} Terminal */
/** @typedef {{ terminal: Terminal, signal?: AbortSignal, force?: boolean }} BuildOptions */

/** What runs under Node: dist name -> source. @type {Record<string, string>} */
export const entries = {
  server: 'server/main.ts',
  thread: 'server/threads/thread.ts',
  worker: 'worker/main.ts',
  migrate: 'server/database/migrate.ts',
  'fake-feed': 'worker/fake-feed/main.ts',
  'load-demo': 'worker/fake-feed/load-demo.ts',
};

const common = ['package.json', 'package-lock.json', 'tsconfig.json', 'shared'];
const serverSources = [...common, 'server', 'worker'];
const clientSources = [...common, 'src', 'public', 'index.html', 'vite.config.ts'];

/**
 * @param {string} root
 * @param {'server' | 'client'} half
 */
function readBuilt(root, half) {
  try {
    return JSON.parse(readFileSync(join(root, 'dist', `built-${half}.json`), 'utf8')).fingerprint;
  } catch {
    return null;
  }
}

/**
 * @param {string} root
 * @param {'server' | 'client'} half
 * @param {string[]} sources
 * @param {string[]} results paths that must exist for the build to count
 * @param {boolean} force
 * @param {() => Promise<void>} make
 */
async function makeWhenStale(root, half, sources, results, force, make) {
  const wanted = fingerprint(root, sources);
  const complete = results.every((path) => existsSync(join(root, path)));
  if (!force && complete && readBuilt(root, half) === wanted) return;
  const note = join(root, 'dist', `built-${half}.json`);
  rmSync(note, { force: true });
  await make();
  writeFileSync(note, `${JSON.stringify({ fingerprint: wanted })}\n`);
}

/**
 * @param {string} root
 * @param {BuildOptions} options
 */
export async function buildServer(root, { terminal, force = false }) {
  const results = Object.keys(entries).map((name) => `dist/${name}.js`);
  await makeWhenStale(root, 'server', serverSources, results, force, () =>
    terminal.step('Bundling server and worker', async () => {
      // Imported here and not above: at the first start the packages are not there yet.
      const { build } = await import('esbuild');
      await build({
        absWorkingDir: root,
        entryPoints: entries,
        outdir: 'dist',
        bundle: true,
        packages: 'external',
        platform: 'node',
        target: 'node20',
        format: 'esm',
        sourcemap: true,
        minify: false,
        // TypeORM tells migrations and entities apart by their class names.
        keepNames: true,
        tsconfig: 'tsconfig.json',
        logLevel: 'silent',
      }).catch((error) => {
        throw new LaunchError(error.message);
      });
    }),
  );
}

/**
 * @param {string} root
 * @param {BuildOptions} options
 */
export async function buildClient(root, { terminal, signal, force = false }) {
  await makeWhenStale(root, 'client', clientSources, ['dist/client/index.html'], force, () =>
    terminal.step('Building the pages', async () => {
      // Made beside and swapped: a running server never serves half a client.
      const place = join(root, 'dist', 'client');
      const making = `${place}.making`;
      const old = `${place}.old`;
      mkdirSync(join(root, 'dist'), { recursive: true });
      await runOrFail(
        process.execPath,
        ['node_modules/vite/bin/vite.js', 'build', '--outDir', making, '--emptyOutDir'],
        {
          cwd: root,
          env: { ...process.env, NODE_ENV: 'production' },
          signal,
          purpose: 'build the pages',
        },
      );
      rmSync(old, { recursive: true, force: true });
      if (existsSync(place)) renameSync(place, old);
      renameSync(making, place);
      rmSync(old, { recursive: true, force: true });
    }),
  );
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const root = fileURLToPath(new URL('../..', import.meta.url));
  const terminal = createTerminal();
  try {
    await buildServer(root, { terminal, force: true });
    await buildClient(root, { terminal, force: true });
  } catch (error) {
    printFailure(error);
    process.exitCode = 1;
  }
}
