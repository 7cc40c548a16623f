/**
 * Times the heavy estimators on seeded data and prints the best and the middle of several runs.
 * Run: npx tsx tests/bench/stats.bench.ts
 */
import { clusterRegression, createRandom, hodgesLehmann, signedRank } from '../../shared/stats/index.ts';

function time(label: string, runs: number, job: () => void): void {
  job();
  const wallMs = Array.from({ length: runs }, () => {
    const start = performance.now();
    job();
    return performance.now() - start;
  }).sort((a, b) => a - b);
  const best = wallMs[0]!.toFixed(1).padStart(9);
  const middle = wallMs[Math.floor(runs / 2)]!.toFixed(1).padStart(9);
  console.log(`${label.padEnd(62)} best ${best} ms   median ${middle} ms`);
}

const random = createRandom(2026);
for (const n of [1_000, 100_000, 1_000_000]) {
  const smooth = Float64Array.from({ length: n }, () => random.normal());
  const whole = smooth.map((value) => Math.round(4 * value));
  time(`hodgesLehmann, ${n.toLocaleString('en')} values`, 5, () => hodgesLehmann(smooth));
  time(`hodgesLehmann, ${n.toLocaleString('en')} whole dB`, 5, () => hodgesLehmann(whole));
}

const thousand = Float64Array.from({ length: 1000 }, () => random.normal());
time('signedRank exact, 1,000 differences', 5, () => signedRank(thousand));

const n = 400_000;
const cellCount = 84;
const cells = Int32Array.from({ length: n }, () => random.integer(cellCount));
const columns = Array.from({ length: 6 }, () =>
  Float64Array.from({ length: n }, () => random.integer(3) - 1),
);
const y = Float64Array.from({ length: n }, (_, i) => cells[i]! / 20 + 4 * random.normal());
// Units as the worker stores them: block by block, so that a night's clusters lie together.
const byNight = Int32Array.from({ length: n }, (_, i) => Math.floor(i / 8000) * 600 + random.integer(600));
const anywhere = Int32Array.from({ length: n }, () => random.integer(30_000));
for (const [label, clusters] of [
  ['clusters in order of nights', byNight],
  ['clusters scattered', anywhere],
] as const) {
  time(`clusterRegression, 400,000 rows, 84 cells + 6, ${label}`, 9, () =>
    clusterRegression({ cells, cellCount, columns }, y, clusters),
  );
}
