import { execFileSync } from 'node:child_process';
import {
  existsSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  rmSync,
  statSync,
  symlinkSync,
  writeFileSync,
} from 'node:fs';
import { tmpdir } from 'node:os';
import { dirname, join, resolve } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { buildServer, entries } from './build.mjs';
import { createTerminal } from './terminal.mjs';

let root: string;
let lines: string[];

function writeSource(path: string, text: string) {
  mkdirSync(dirname(join(root, path)), { recursive: true });
  writeFileSync(join(root, path), text);
}

const build = () => buildServer(root, { terminal: createTerminal((text) => lines.push(text), false) });
const madeAt = () => statSync(join(root, 'dist', 'server.js')).mtimeMs;

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'launch-build-'));
  lines = [];
  symlinkSync(resolve('node_modules'), join(root, 'node_modules'));
  writeSource('package.json', '{ "type": "module" }');
  writeSource('package-lock.json', '{}');
  writeSource('tsconfig.json', readFileSync('tsconfig.json', 'utf8'));
  for (const path of Object.values(entries))
    writeSource(path, `process.stdout.write(${JSON.stringify(path)});`);
});

afterEach(() => rmSync(root, { recursive: true, force: true }));

// They run compilers and programs: on a busy machine that takes longer than a unit test may.
describe('the bundle of server and worker', { timeout: 60_000 }, () => {
  test('every entry becomes one file that runs under Node', async () => {
    await build();
    for (const [name, path] of Object.entries(entries)) {
      expect(execFileSync(process.execPath, [join(root, 'dist', `${name}.js`)], { encoding: 'utf8' })).toBe(
        path,
      );
    }
  });

  test('decorators work and class names survive, which TypeORM knows entities and migrations by', async () => {
    writeSource(
      'server/main.ts',
      `const note = (target: Function) => { process.stdout.write(target.name + ' '); };
       @note class Dwell { static of = () => new Dwell(); }
       process.stdout.write(Dwell.of().constructor.name);`,
    );
    await build();
    expect(execFileSync(process.execPath, [join(root, 'dist', 'server.js')], { encoding: 'utf8' })).toBe(
      'Dwell Dwell',
    );
  });

  test('unchanged sources are not bundled again', async () => {
    await build();
    const before = madeAt();
    await build();
    expect(madeAt()).toBe(before);
    expect(lines).toHaveLength(1);
  });

  test('a changed test file does not make the bundle stale', async () => {
    writeSource('server/some.test.ts', 'one');
    await build();
    writeSource('server/some.test.ts', 'two');
    await build();
    expect(lines).toHaveLength(1);
  });

  test.each(['shared/some.ts', 'worker/main.ts', 'package-lock.json', 'tsconfig.json'])(
    'a change of %s makes the bundle stale',
    async (path) => {
      await build();
      writeSource(path, `${existsSync(join(root, path)) ? readFileSync(join(root, path), 'utf8') : ''}\n`);
      await build();
      expect(lines).toHaveLength(2);
    },
  );

  test('a bundle whose file was removed is made again', async () => {
    await build();
    rmSync(join(root, 'dist', 'worker.js'));
    await build();
    expect(existsSync(join(root, 'dist', 'worker.js'))).toBe(true);
  });

  test('after a failed build the old result does not count as current', async () => {
    await build();
    const good = readFileSync(join(root, 'server', 'main.ts'), 'utf8');
    writeSource('server/main.ts', 'this is not TypeScript');
    await expect(build()).rejects.toThrow('Build failed');
    writeSource('server/main.ts', good);
    await build();
    expect(lines.filter((line) => line.startsWith('  ok'))).toHaveLength(2);
  });
});
