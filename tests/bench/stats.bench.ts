/**
 * Times the heavy estimators on seeded data and prints the best and the middle of several runs; where
 * Rscript is on the machine (with the package sandwich) also beside R, on the same numbers in the same run.
 * Run: npx tsx tests/bench/stats.bench.ts
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import {
  censoredMean,
  clusterRegression,
  confidenceSequence,
  createRandom,
  hodgesLehmann,
  pool,
  sampleSize,
  signedRank,
} from '../../shared/stats/index.ts';

interface Timing {
  bestMs: number;
  medianMs: number;
}

function time(label: string, runs: number, job: () => void): Timing {
  job();
  const wallMs = Array.from({ length: runs }, () => {
    const start = performance.now();
    job();
    return performance.now() - start;
  }).sort((a, b) => a - b);
  const timing = { bestMs: wallMs[0]!, medianMs: wallMs[Math.floor(runs / 2)]! };
  const best = timing.bestMs.toFixed(1).padStart(9);
  const middle = timing.medianMs.toFixed(1).padStart(9);
  console.log(`${label.padEnd(62)} best ${best} ms   median ${middle} ms`);
  return timing;
}

const random = createRandom(2026);
const normals = (n: number) => Float64Array.from({ length: n }, () => random.normal());

for (const n of [1_000, 100_000, 1_000_000]) {
  const smooth = normals(n);
  const whole = smooth.map((value) => Math.round(4 * value));
  time(`hodgesLehmann, ${n.toLocaleString('en')} values`, 5, () => hodgesLehmann(smooth));
  time(`hodgesLehmann, ${n.toLocaleString('en')} whole dB`, 5, () => hodgesLehmann(whole));
}

const thousand = normals(1000);
time('signedRank exact, 1,000 differences', 5, () => signedRank(thousand));
const tied = thousand.map((value) => Math.round(3 * value));
time('signedRank exact, 1,000 whole dB with zeros', 5, () => signedRank(tied, { zeros: 'pratt' }));

{
  // A season: half of the stations heard on both antennas, the others on one side of a limit.
  const n = 100_000;
  const lower = normals(n).map((value) => 1 + 5 * value);
  const upper = lower.slice();
  for (let i = 0; i < n; i++) {
    const side = random.integer(4);
    if (side === 0) upper[i] = Infinity;
    if (side === 1) lower[i] = -Infinity;
  }
  const clusters = Int32Array.from({ length: n }, () => random.integer(4000));
  const columns = [0, 1].map(() => Float64Array.from({ length: n }, () => random.integer(3) - 1));
  time('censoredMean, 100,000 rows', 9, () => censoredMean({ lower, upper }));
  time('censoredMean, 100,000 rows, 4,000 clusters', 9, () => censoredMean({ lower, upper }, { clusters }));
  time('censoredMean, 100,000 rows, 4,000 clusters, 2 offsets', 9, () =>
    censoredMean({ lower, upper }, { clusters, columns }),
  );
}

const line = normals(100_000);
time('confidenceSequence, 100,000 values', 9, () => confidenceSequence(line));
const cellErrors = Float64Array.from({ length: 168 }, () => 0.2 + random.uniform());
const cellValues = cellErrors.map((se) => (1 + se) * random.normal());
time('pool, 168 cells', 9, () => pool(cellValues, cellErrors));
time('sampleSize, n for a power of 0.8', 9, () => sampleSize({ sd: 4, difference: 1, power: 0.8 }));

{
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
}

/** Times R's own way on the same numbers: best of three, in R's process, without its start. */
const inR = `
suppressPackageStartupMessages(library(sandwich))
read <- function(name, n) readBin(name, "double", n)
best <- function(job) min(sapply(1:3, function(i) { gc(); system.time(job())[["elapsed"]] }))
d <- read("shift.bin", 5000)
cat(best(function() suppressWarnings(wilcox.test(d, conf.int = TRUE))), "\\n")
n <- 50000
y <- read("y.bin", n); x <- matrix(read("x.bin", 7 * n), n); g <- read("clusters.bin", n)
fit <- function() { m <- lm(y ~ 0 + x); vcovCL(m, cluster = g, type = "HC1", cadjust = TRUE) }
cat(best(fit), "\\n")
cat(sprintf("%.15g\\n", c(suppressWarnings(wilcox.test(d, conf.int = TRUE))$estimate, sqrt(fit()[1, 1]))), sep = "")
`;

function besideR(): void {
  const shift = normals(5000);
  const n = 50_000;
  const columns = [
    new Float64Array(n).fill(1),
    ...Array.from({ length: 6 }, () => Float64Array.from({ length: n }, () => random.integer(3) - 1)),
  ];
  const y = normals(n);
  const clusters = Float64Array.from({ length: n }, () => random.integer(3000));
  const folder = mkdtempSync(join(tmpdir(), 'stats-bench-'));
  try {
    writeFileSync(join(folder, 'shift.bin'), shift);
    writeFileSync(join(folder, 'y.bin'), y);
    writeFileSync(join(folder, 'x.bin'), Buffer.concat(columns.map((column) => Buffer.from(column.buffer))));
    writeFileSync(join(folder, 'clusters.bin'), clusters);
    const run = spawnSync('Rscript', ['-e', inR], { cwd: folder, encoding: 'utf8' });
    if (run.error || run.status !== 0) {
      console.log('No comparison with R: Rscript or its package sandwich is not on this machine.');
      return;
    }
    const [wilcoxon, regression, median, error] = run.stdout.trim().split(/\s+/).map(Number);
    const rank = time('hodgesLehmann and signedRank, 5,000 values', 9, () => {
      hodgesLehmann(shift);
      signedRank(shift);
    });
    const fit = time('clusterRegression, 50,000 rows, 7 columns, 3,000 clusters', 9, () =>
      clusterRegression({ columns }, y, clusters),
    );
    const against = (label: string, seconds: number, { bestMs }: Timing) =>
      console.log(
        `${label}: R ${(1000 * seconds).toFixed(0)} ms, ours ${bestMs.toFixed(1)} ms, ratio ${((1000 * seconds) / bestMs).toFixed(0)}`,
      );
    against('wilcox.test(conf.int = TRUE), n = 5,000', wilcoxon!, rank);
    against('lm + vcovCL, n = 50,000', regression!, fit);
    const ours = [
      hodgesLehmann(shift).estimate,
      clusterRegression({ columns }, y, clusters).coefficients[0]!.se!,
    ];
    // R searches its estimate as a root, to four digits.
    console.log(
      `same answers: shift ${ours[0]!.toFixed(6)} and ${median!.toFixed(6)}, error ${ours[1]} and ${error}`,
    );
  } finally {
    rmSync(folder, { recursive: true });
  }
}
besideR();
