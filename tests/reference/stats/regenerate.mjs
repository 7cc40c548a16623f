/**
 * Runs every make-*.R in a temporary folder and compares every number with the JSON files here.
 * Run by hand: node tests/reference/stats/regenerate.mjs (about a minute and a half). Exit code: 0 the same, or
 * no R on the machine (said so); 1 something differs, or R failed.
 */
import { spawnSync } from 'node:child_process';
import { cpSync, mkdtempSync, readdirSync, readFileSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const here = fileURLToPath(new URL('.', import.meta.url));
/** Another build of R, or of its linear algebra, may differ in the last digits. */
const relative = 1e-10;
const absolute = 1e-12;

const namesIn = (/** @type {string} */ folder, /** @type {string} */ ending) =>
  readdirSync(folder).filter((name) => name.endsWith(ending));
const read = (/** @type {string} */ folder, /** @type {string} */ name) =>
  JSON.parse(readFileSync(join(folder, name), 'utf8'));

/**
 * Where two parsed files differ, as sentences with the path of the value.
 *
 * @param {unknown} kept
 * @param {unknown} fresh
 * @param {string} path
 * @param {{ compared: number, differences: string[] }} report
 */
function compare(kept, fresh, path, report) {
  if (typeof kept === 'object' && kept !== null && typeof fresh === 'object' && fresh !== null) {
    const keys = new Set([...Object.keys(kept), ...Object.keys(fresh)]);
    for (const key of keys) {
      const [a, b] = [Reflect.get(kept, key), Reflect.get(fresh, key)];
      compare(a, b, `${path}${Array.isArray(kept) ? `[${key}]` : `.${key}`}`, report);
    }
    return;
  }
  report.compared += 1;
  const near =
    typeof kept === 'number' && typeof fresh === 'number'
      ? Math.abs(kept - fresh) <= Math.max(absolute, relative * Math.abs(kept))
      : kept === fresh;
  if (!near) report.differences.push(`${path}: kept ${String(kept)}, R now gives ${String(fresh)}`);
}

const version = spawnSync('Rscript', ['--version'], { encoding: 'utf8' });
if (version.error || version.status !== 0) {
  console.log(
    'Rscript is not on this machine: nothing was compared. The tests use the JSON files as they are.',
  );
  process.exit(0);
}
const found = /version \S+/.exec(version.stdout + version.stderr)?.[0] ?? 'of unknown version';
console.log(`R ${found}; the files were written by 4.2.2.`);

const folder = mkdtempSync(join(tmpdir(), 'stats-reference-'));
let failed = false;
try {
  for (const name of namesIn(here, '.R')) cpSync(join(here, name), join(folder, name));
  for (const script of namesIn(here, '.R').filter((name) => name.startsWith('make-'))) {
    console.log(`Running ${script}`);
    const run = spawnSync('Rscript', [script], { cwd: folder, encoding: 'utf8' });
    if (run.status === 0) continue;
    console.error(`${script} failed. The packages it needs are named at its top.\n${run.stderr}`);
    failed = true;
  }
  if (!failed) {
    const [kept, fresh] = [namesIn(here, '.json'), namesIn(folder, '.json')];
    for (const name of new Set([...kept, ...fresh])) {
      if (!kept.includes(name) || !fresh.includes(name)) {
        console.error(`${name}: ${kept.includes(name) ? 'R no longer writes it' : 'new, not kept here'}`);
        failed = true;
        continue;
      }
      const report = { compared: 0, differences: /** @type {string[]} */ ([]) };
      compare(read(here, name), read(folder, name), name.replace('.json', ''), report);
      const { compared, differences } = report;
      const verdict = differences.length === 0 ? 'the same' : `${differences.length} differ`;
      console.log(`${name.padEnd(28)} ${String(compared).padStart(7)} values, ${verdict}`);
      for (const line of differences.slice(0, 5)) console.error(`  ${line}`);
      if (differences.length > 0) failed = true;
    }
  }
} finally {
  rmSync(folder, { recursive: true });
}
console.log(failed ? 'Not the same.' : 'All files are what R gives.');
process.exit(failed ? 1 : 0);
