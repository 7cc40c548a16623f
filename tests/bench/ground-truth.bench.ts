/**
 * The ground-truth study: simulated trials whose truth is known, answered by the program and by the naive
 * method, written as tables into docs/ground-truth.md. On two processes, some ten minutes of each for 1,000
 * experiments a scenario.
 * Run: npx tsx tests/bench/ground-truth.bench.ts [experiments=1000] [seed=2026] [file=docs/ground-truth.md]
 */
import { fork } from 'node:child_process';
import { once } from 'node:events';
import { readFileSync, writeFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { format, resolveConfig } from 'prettier';
import { createDemoScenario, demoNights, demoSeed } from '../../worker/fake-feed/scenario.ts';
import type { Figure, Goal } from '../helpers/ground-truth-figures.ts';
import { scenarios, themes } from '../helpers/ground-truth-scenarios.ts';
import { study, type Measured, type StudyRow } from '../helpers/ground-truth-study.ts';
import { simulateStation } from '../helpers/simulated-station.ts';

const experiments = Number(process.argv[2] ?? 1000);
const seed = Number(process.argv[3] ?? 2026);
const file = process.argv[4] ?? fileURLToPath(new URL('../../docs/ground-truth.md', import.meta.url));
const { version } = JSON.parse(
  readFileSync(fileURLToPath(new URL('../../package.json', import.meta.url)), 'utf8'),
) as { version: string };

const minus = (text: string) => text.replace('-', '\u2212');

function shown({ value, error, n }: Measured, unit: Figure['unit']): string {
  if (unit !== 'share') return `${minus(value.toFixed(2))} ± ${error.toFixed(2)} ${unit}`;
  // No case at all bounds the share with 95 % at 3 / n.
  if (value === 0) return `0 % (under ${(300 / n).toFixed(1)})`;
  if (value === 1) return `100 % (over ${(100 - 300 / n).toFixed(1)})`;
  return `${(100 * value).toFixed(1)} ± ${(100 * error).toFixed(1)} %`;
}

function besideShown({ figure, theirs }: Pick<StudyRow, 'figure' | 'theirs'>): string {
  if (figure.beside === null || theirs === null) return '';
  return `${figure.beside}: ${shown(theirs, figure.unit)}`;
}

function outcome(goal: Goal | null, measured: Measured | null): string {
  if (goal === null || measured === null) return '';
  const { value, error } = measured;
  const off = Math.max(goal.from - value, value - goal.to);
  return `${goal.text}: ${off <= 0 ? 'met' : off <= 2 * error ? 'not met, by less than its error' : '**missed**'}`;
}

const row = (cells: readonly string[]) => `| ${cells.join(' | ')} |`;

function table(rows: readonly StudyRow[]): string {
  const lines = rows.map((one, k) =>
    row([
      rows[k - 1]?.scenario === one.scenario ? '' : one.scenario.title,
      one.figure.name,
      one.experiments.toLocaleString('en-GB'),
      one.ours === null ? '' : shown(one.ours, one.figure.unit),
      besideShown(one),
      outcome(one.figure.goal, one.ours),
    ]),
  );
  return [
    row(['Scenario', 'What is counted', 'Experiments', 'Ours', 'Beside it', 'Goal']),
    row(Array<string>(6).fill('---')),
    ...lines,
  ].join('\n');
}

/** The demo station's world: patterns, propagation and weak signals; every pair, band and three sides. */
function demoRow(): string {
  const scenario = createDemoScenario('2026-11-01');
  const station = simulateStation({ seed: demoSeed, scenario, nights: demoNights });
  const names = scenario.antennas.map(({ name }) => name);
  const asked = names.flatMap((antennaA, a) =>
    names
      .slice(a + 1)
      .flatMap((antennaB) =>
        [[], [1, 2], [9, 10]].flatMap((sectors) =>
          scenario.bandsMetres.map((bandMetres) => station.ask({ antennaA, antennaB, bandMetres, sectors })),
        ),
      ),
  );
  const share = (holds: (one: (typeof asked)[number]) => boolean) =>
    `${((100 * asked.filter(holds).length) / asked.length).toFixed(1)} %`;
  const ours = share(({ answer, truthDb }) => {
    const [lo, hi] = answer.estimate!.interval95Db;
    return lo <= truthDb && truthDb <= hi;
  });
  const naive = share(
    ({ truthDb, naive: { estimateDb, seDb } }) => Math.abs(estimateDb - truthDb) <= 1.96 * seDb,
  );
  return (
    `In the demo station's own world (${demoNights} nights, ${station.spots.toLocaleString('en-GB')} spots, directions, ` +
    `weak signals), ${asked.length} questions about all pairs of its antennas on all bands, all round and toward two sides: ` +
    `the 95 % interval held the true difference of the stations compared in ${ours}, the naive one in ${naive}. These ` +
    'questions share their nights, so no error is given.'
  );
}

/** What a child process sends of a row: scenarios and figures hold functions and stay here. */
type Counted = Pick<StudyRow, 'experiments' | 'ours' | 'theirs'>;

/** The scenarios on two processes, each taking the next when it is done; rows in the scenarios' order. */
async function runAll(): Promise<StudyRow[]> {
  const done = new Map<number, Counted[]>();
  let next = 0;
  const runSome = async (): Promise<void> => {
    for (let index = next++; index < scenarios.length; index = next++) {
      const startedMs = performance.now();
      const child = fork(fileURLToPath(import.meta.url), [
        String(experiments),
        String(seed),
        '',
        String(index),
      ]);
      // A child that died sends nothing: waiting for it would never end.
      const died = new AbortController();
      child.once('exit', (code) => {
        if (code !== 0) died.abort(new Error(`${scenarios[index]!.key} ended with ${code}`));
      });
      const [counted] = (await once(child, 'message', { signal: died.signal })) as [Counted[]];
      done.set(index, counted);
      const seconds = (performance.now() - startedMs) / 1000;
      console.log(`${scenarios[index]!.title} (${seconds.toFixed(0)} s)`);
      counted.forEach((one, k) => {
        const figure = scenarios[index]!.figures[k]!;
        const ours = one.ours === null ? '' : shown(one.ours, figure.unit);
        const theirs = besideShown({ ...one, figure });
        console.log(`  ${figure.name}: ${ours}  ${theirs}  ${outcome(figure.goal, one.ours)}`);
      });
    }
  };
  await Promise.all([runSome(), runSome()]);
  return scenarios.flatMap((scenario, index) =>
    done.get(index)!.map((one, k) => ({ ...one, scenario, figure: scenario.figures[k]! })),
  );
}

async function writeDocument(): Promise<void> {
  const rows = await runAll();
  const sections = themes.map(
    (theme) => `## ${theme}\n\n${table(rows.filter(({ scenario }) => scenario.theme === theme))}\n`,
  );
  const made =
    `Made by \`npx tsx tests/bench/ground-truth.bench.ts ${experiments} ${seed}\` on ` +
    `${new Date().toISOString().slice(0, 10)}: ${experiments.toLocaleString('en-GB')} experiments a scenario, seed ${seed}, ` +
    `version ${version}.\n`;

  // What the figures mean is written by hand around them and stays.
  const before = readFileSync(file, 'utf8');
  const [begin, end] = ['<!-- figures: begin -->', '<!-- figures: end -->'];
  const [from, to] = [before.indexOf(begin), before.indexOf(end)];
  if (from === -1 || to < from) throw new Error(`${file} must hold ${begin} and ${end}, in this order`);
  const figures = [made, ...sections, `## The demo station\n\n${demoRow()}\n`].join('\n');
  const text = `${before.slice(0, from)}${begin}\n\n${figures}\n${before.slice(to)}`;
  writeFileSync(file, await format(text, { ...(await resolveConfig(file)), parser: 'markdown' }));
  console.log(`Written to ${file}`);
}

const assigned = process.argv[5];
if (assigned === undefined) await writeDocument();
else {
  const rows = study(scenarios[Number(assigned)]!, experiments, seed);
  process.send!(rows.map(({ ours, theirs }): Counted => ({ experiments, ours, theirs })));
}
