/**
 * Times the ladder on seeded units, beside R's `lm` with `vcovCL` on the very same rows where Rscript
 * (with the package sandwich) is on the machine. R does the fit and its covariance only, we also the
 * splitting of all pairs, for which R would need one more fit a pair, and the draws. The last ratio is the time that
 * these fits would take there: one fit times (1 + pairs).
 * Run: npx tsx tests/bench/ladder.bench.ts
 */
import { execFileSync, spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { createRandom, ladder } from '../../shared/stats/index.ts';
import type { LadderResult, LadderRows } from '../../shared/stats/index.ts';

const antennaCount = 15;
const receiverCount = 4;

/**
 * Units as a season makes them: in each block the receivers sit on different antennas and every pair of
 * them hears some of the night's stations.
 */
function season(units: number, nights: number, callsANight: number): LadderRows {
  const random = createRandom(2026);
  const theta = Array.from({ length: antennaCount + 1 }, () => 2 * random.normal());
  const rho = Array.from({ length: receiverCount + 1 }, () => random.normal());
  const column = () => new Int32Array(units);
  const rows = {
    ...{ antennaA: column(), antennaB: column(), receiverA: column(), receiverB: column() },
    ...{ clusters: column(), difference: new Float64Array(units) },
  };
  const wander = Array.from({ length: nights * callsANight }, () => 1.5 * random.normal());
  let on: number[] = [];
  for (let i = 0; i < units; i++) {
    if (i % 120 === 0) {
      const free = Array.from({ length: antennaCount }, (_, j) => j + 1);
      on = Array.from({ length: receiverCount }, () => free.splice(random.integer(free.length), 1)[0]!);
    }
    const first = random.integer(receiverCount);
    const second = (first + 1 + random.integer(receiverCount - 1)) % receiverCount;
    const night = Math.floor((i * nights) / units);
    const cluster = night * callsANight + random.integer(callsANight);
    rows.antennaA[i] = on[first]!;
    rows.antennaB[i] = on[second]!;
    rows.receiverA[i] = first + 1;
    rows.receiverB[i] = second + 1;
    rows.clusters[i] = cluster;
    rows.difference[i] =
      theta[on[first]!]! -
      theta[on[second]!]! +
      rho[first + 1]! -
      rho[second + 1]! +
      wander[cluster]! +
      4 * random.normal();
  }
  return rows;
}

interface Timing<T> {
  bestMs: number;
  medianMs: number;
  /** Median of the processor's time: on a busy machine the wall clock also counts others. */
  processorMs: number;
  result: T;
}

function time<T>(job: () => T, runs: number): Timing<T> {
  let result = job();
  const processorMs: number[] = [];
  const wallMs = Array.from({ length: runs }, () => {
    const start = performance.now();
    const used = process.cpuUsage();
    result = job();
    processorMs.push(process.cpuUsage(used).user / 1000);
    return performance.now() - start;
  });
  const middle = (values: number[]) => values.sort((a, b) => a - b)[runs >> 1]!;
  return { bestMs: Math.min(...wallMs), medianMs: middle(wallMs), processorMs: middle(processorMs), result };
}

function timeInR(rows: LadderRows): { seconds: number; largestDifference: number } | null {
  if (spawnSync('Rscript', ['-e', 'library(sandwich)'], { stdio: 'ignore' }).status !== 0) return null;
  const folder = mkdtempSync(join(tmpdir(), 'ladder-bench-'));
  try {
    const names = ['antennaA', 'antennaB', 'receiverA', 'receiverB', 'difference', 'clusters'] as const;
    const lines = Array.from(rows.difference, (_, i) => names.map((name) => rows[name][i]).join(','));
    writeFileSync(join(folder, 'rows.csv'), [names.join(','), ...lines].join('\n'));
    const script = `
      suppressPackageStartupMessages(library(sandwich))
      u <- read.csv("${folder}/rows.csv")
      start <- proc.time()[["elapsed"]]
      x <- matrix(0, nrow(u), ${antennaCount + receiverCount})
      row <- seq_len(nrow(u))
      x[cbind(row, u$antennaA)] <- 1
      x[cbind(row, u$antennaB)] <- -1
      x[cbind(row, ${antennaCount} + u$receiverA)] <- 1
      x[cbind(row, ${antennaCount} + u$receiverB)] <- -1
      x <- x[, -c(${antennaCount}, ${antennaCount + receiverCount})]
      m <- lm(u$difference ~ 0 + x)
      v <- vcovCL(m, cluster = u$clusters, type = "HC1", cadjust = TRUE)
      took <- proc.time()[["elapsed"]] - start
      cat(format(c(took, coef(m)[1] - coef(m)[2], sqrt(v[1, 1] + v[2, 2] - 2 * v[1, 2])), digits = 15))`;
    const printed = execFileSync('Rscript', ['-e', script], { encoding: 'utf8', maxBuffer: 1 << 20 });
    const [seconds, estimate, se] = printed.trim().split(/\s+/).map(Number);
    const pair = ladder(rows).pairs.find(({ a, b }) => a === 1 && b === 2)!;
    return {
      seconds: seconds!,
      largestDifference: Math.max(Math.abs(pair.estimate - estimate!), Math.abs(pair.se! - se!)),
    };
  } finally {
    rmSync(folder, { recursive: true });
  }
}

const shown = (value: number) => value.toFixed(0).padStart(7);
function report(label: string, rows: LadderRows, withR: boolean): LadderResult {
  const { bestMs, medianMs, processorMs, result } = time(() => ladder(rows), 7);
  let line = `${label.padEnd(54)} best ${shown(bestMs)} ms   median ${shown(medianMs)} ms   processor ${shown(processorMs)} ms`;
  const r = withR ? timeInR(rows) : null;
  if (r) {
    line +=
      `   R lm + vcovCL ${shown(1000 * r.seconds)} ms: ${((1000 * r.seconds) / medianMs).toFixed(0)} times as long` +
      `, with a fit a pair ${((r.seconds * (1 + result.pairs.length) * 1000) / medianMs).toFixed(0)} times (extrapolated)` +
      ` (largest difference ${r.largestDifference.toExponential(1)} dB)`;
  }
  console.log(line);
  return result;
}

const full = report('ladder, 15 antennas, 4 receivers, 500,000 units', season(500_000, 150, 300), true);
console.log(
  `  ${full.pairs.length} pairs, ${full.pairs.filter((pair) => pair.inconsistency?.p).length} of them split, ` +
    `${full.contacts.length} contacts, ${full.clusters.toLocaleString('en')} clusters`,
);
report(
  'the same, every unit a cluster of its own',
  {
    ...season(500_000, 150, 300),
    clusters: Int32Array.from({ length: 500_000 }, (_, i) => i),
  },
  false,
);
report('ladder, 15 antennas, 4 receivers, 50,000 units', season(50_000, 30, 150), true);
