/**
 * How long pairing takes: `npx tsx tests/bench/pairing.bench.ts [millions of spots]` (1 unless given).
 * Prints, for nights in order of time, for a season in one run, and for reading a season of packs, the
 * rows, the processor time, and the ratio to one bare pass over the same columns, measured in the same run.
 */
import {
  STANDING_RULES,
  packUnits,
  pairSpots,
  spotsNeeded,
  unpackUnits,
  type DwellColumns,
  type SpotColumns,
} from '../../shared/pairing/index.ts';
import { createRandom } from '../../shared/stats/random.ts';

const NIGHT_SPOTS = 30_000;
const FIRST_NIGHT_MS = Date.UTC(2026, 0, 1, 16);
const DAY_MS = 86_400_000;
const NIGHT_MS = 16 * 3_600_000;
const RECEIVERS = 3;
const ANTENNAS = 8;
const SWITCH_MS = 5 * 60_000;
const CALLS = 4_000;

/** Three receivers, two of them going round eight antennas every five minutes, one always on the same. */
function makeDwells(nights: number): DwellColumns {
  const perNight = NIGHT_MS / SWITCH_MS;
  const n = nights * perNight * RECEIVERS;
  const dwells = {
    receiver: new Int32Array(n),
    antenna: new Int32Array(n),
    startMs: new Float64Array(n),
    endMs: new Float64Array(n),
  };
  let row = 0;
  for (let night = 0; night < nights; night++) {
    for (let step = 0; step < perNight; step++) {
      for (let receiver = 0; receiver < RECEIVERS; receiver++, row++) {
        dwells.receiver[row] = receiver + 1;
        dwells.antenna[row] = receiver === 2 ? 1 : ((step + receiver * 3) % ANTENNAS) + 1;
        dwells.startMs[row] = FIRST_NIGHT_MS + night * DAY_MS + step * SWITCH_MS;
        dwells.endMs[row] = dwells.startMs[row]! + SWITCH_MS;
      }
    }
  }
  return dwells;
}

/** Stations that call for some minutes and are heard by each receiver about twice in three times. */
function makeSpots(nights: number): SpotColumns {
  const n = nights * NIGHT_SPOTS;
  const random = createRandom(20260105);
  const spots = {
    timeMs: new Float64Array(n),
    receiver: new Int32Array(n),
    call: new Int32Array(n),
    band: new Int16Array(n),
    freq100Hz: new Int32Array(n),
    snrDb: new Int16Array(n),
    uncertaintySeconds: new Uint8Array(n),
    speedWpm: new Uint8Array(n),
  };
  const draw = (below: number) => random.integer(below);
  for (let night = 0; night < nights; night++) {
    const rows: number[][] = [];
    while (rows.length < NIGHT_SPOTS) {
      const call = 1 + draw(CALLS);
      const band = [160, 80, 40][draw(3)]!;
      const freq = (band === 160 ? 18_100 : band === 80 ? 35_000 : 70_000) + draw(500);
      let time = FIRST_NIGHT_MS + night * DAY_MS + draw(NIGHT_MS);
      for (let over = 0; over < 6; over++, time += 20_000 + draw(40_000)) {
        for (let receiver = 1; receiver <= RECEIVERS; receiver++) {
          if (draw(3) > 0) rows.push([time + draw(4) * 1000, receiver, call, band, freq + draw(2), draw(40)]);
        }
      }
    }
    rows.sort((p, q) => p[0]! - q[0]!);
    for (let i = 0; i < NIGHT_SPOTS; i++) {
      const at = night * NIGHT_SPOTS + i;
      const [time, receiver, call, band, freq, snr] = rows[i]!;
      spots.timeMs[at] = time!;
      spots.receiver[at] = receiver!;
      spots.call[at] = call!;
      spots.band[at] = band!;
      spots.freq100Hz[at] = freq!;
      spots.snrDb[at] = snr!;
      spots.speedWpm[at] = 25;
    }
  }
  return spots;
}

function between(spots: SpotColumns, startMs: number, endMs: number): SpotColumns {
  const lowest = (timeMs: number) => {
    let [low, high] = [0, spots.timeMs.length];
    while (low < high) {
      const middle = (low + high) >>> 1;
      if (spots.timeMs[middle]! < timeMs) low = middle + 1;
      else high = middle;
    }
    return low;
  };
  const [from, to] = [lowest(startMs), lowest(endMs)];
  const entries = Object.entries(spots) as [string, Int32Array][];
  return Object.fromEntries(
    entries.map(([name, column]) => [name, column.subarray(from, to)]),
  ) as unknown as SpotColumns;
}

/** Processor time of this process, which a busy machine inflates far less than time on the clock. */
function timed<T>(work: () => T): { value: T; ms: number } {
  const started = process.cpuUsage();
  const value = work();
  const { user, system } = process.cpuUsage(started);
  return { value, ms: (user + system) / 1000 };
}

/** One pass that reads every column once: the floor under any pairing. */
function barePass(spots: SpotColumns): number {
  let sum = 0;
  for (let i = 0; i < spots.timeMs.length; i++) {
    sum += spots.timeMs[i]! + spots.receiver[i]! + spots.call[i]! + spots.band[i]! + spots.freq100Hz[i]!;
    sum += spots.snrDb[i]! + spots.uncertaintySeconds[i]! + spots.speedWpm[i]!;
  }
  return sum;
}

function report(what: string, rows: number, ms: number, bareMs: number): void {
  const ratio = (ms / bareMs).toFixed(1);
  console.log(
    `${what}: ${rows.toLocaleString('en')} rows in ${ms.toFixed(1)} ms of processor time, ${ratio} x a bare pass`,
  );
}

const millions = Number(process.argv[2] ?? '1');
const nights = Math.max(1, Math.round((millions * 1e6) / NIGHT_SPOTS));
const spots = makeSpots(nights);
const dwells = makeDwells(nights);
const season = { startMs: FIRST_NIGHT_MS, endMs: FIRST_NIGHT_MS + nights * DAY_MS };
barePass(spots);
const bare = timed(() => barePass(spots)).ms;

const packs: Uint8Array[][] = [];
const nightMs: number[] = [];
const packMs: number[] = [];
for (let night = 0; night < nights; night++) {
  const startMs = FIRST_NIGHT_MS + night * DAY_MS;
  const window = { startMs, endMs: startMs + DAY_MS };
  const need = spotsNeeded(window, STANDING_RULES);
  const own = between(spots, need.startMs, need.endMs);
  const from = night * (NIGHT_MS / SWITCH_MS) * RECEIVERS;
  const to = from + (NIGHT_MS / SWITCH_MS) * RECEIVERS;
  const ownDwells = {
    receiver: dwells.receiver.subarray(from, to),
    antenna: dwells.antenna.subarray(from, to),
    startMs: dwells.startMs.subarray(from, to),
    endMs: dwells.endMs.subarray(from, to),
  };
  const run = timed(() => pairSpots(own, ownDwells, STANDING_RULES, window));
  nightMs.push(run.ms);
  const packed = timed(() => packUnits(run.value.units, STANDING_RULES.blockMinutes));
  packMs.push(packed.ms);
  packs.push(packed.value.map((pack) => pack.data));
}
const median = (values: number[]) => [...values].sort((p, q) => p - q)[values.length >> 1]!;
const bareNight = bare / nights;
report('first night (cold)', NIGHT_SPOTS, nightMs[0]!, bareNight);
report('a night (median)', NIGHT_SPOTS, median(nightMs), bareNight);
report('packing a night (median)', NIGHT_SPOTS, median(packMs), bareNight);
report(
  'all nights, one by one',
  nights * NIGHT_SPOTS,
  nightMs.reduce((sum, ms) => sum + ms, 0),
  bare,
);

const whole = timed(() => pairSpots(spots, dwells, STANDING_RULES, season));
report('the season in one run, in order of time', spots.timeMs.length, whole.ms, bare);
console.log(
  `  ${whole.value.units.call.length.toLocaleString('en')} units, ${whole.value.matches.toLocaleString('en')} matches, ` +
    `${whole.value.heardOnly.call.length.toLocaleString('en')} heard-only, peak ${(process.resourceUsage().maxRSS / 1024).toFixed(0)} MB`,
);

// A season of one pair: 200 nights, 500,000 units.
const PACKS = 200;
const rowsPerPack = 2_500;
const sample = whole.value.units;
const wanted = Math.min(rowsPerPack, sample.call.length);
const onePair = Object.fromEntries(
  (Object.entries(sample) as [string, Int32Array][]).map(([name, column]) => [name, column.slice(0, wanted)]),
) as unknown as typeof sample;
onePair.antennaA.fill(1);
onePair.antennaB.fill(2);
const onePack = packUnits(onePair, STANDING_RULES.blockMinutes)[0]!.data;
const seasonPacks = Array.from({ length: PACKS }, () => onePack.slice());
const unpackMs = Array.from({ length: 7 }, () => timed(() => unpackUnits(seasonPacks)).ms);
const bytes = seasonPacks.reduce((sum, pack) => sum + pack.length, 0);
const copyMs = timed(() => seasonPacks.map((pack) => pack.slice())).ms;
console.log(
  `reading ${PACKS} packs (processor time), ${(PACKS * wanted).toLocaleString('en')} units, ${(bytes / 1e6).toFixed(1)} MB: ` +
    `first ${unpackMs[0]!.toFixed(1)} ms, median ${median(unpackMs).toFixed(1)} ms, ` +
    `${(median(unpackMs) / copyMs).toFixed(1)} x copying the bytes`,
);
