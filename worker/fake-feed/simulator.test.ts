import { Body, Equator, Horizon, MakeTime, Observer } from 'astronomy-engine';
import fc from 'fast-check';
import { mean, medianSorted, sampleStandardDeviation } from 'simple-statistics';
import { describe, expect, it, vi } from 'vitest';
import { bandOfKhz } from '../../shared/radio/bands.ts';
import type { Place } from '../../shared/radio/place.ts';
import { createDemoScenario } from './scenario.ts';
import { createSimulator, type SimulatedSpot, type Simulator } from './simulator.ts';
import { createTruth } from './truth.ts';

// Whole nights are simulated; a busy machine may take its time over them.
vi.setConfig({ testTimeout: 60_000 });

const scenario = createDemoScenario('2026-11-01');
const seed = 4077;
const simulator = createSimulator({ seed, scenario });
const minuteMs = 60_000;
const hourMs = 60 * minuteMs;
const dayMs = 24 * hourMs;
const { startMs } = simulator;

function collect(from: Simulator, fromMs: number, toMs: number): SimulatedSpot[] {
  return [...from.spots(fromMs, toMs)].flat();
}

const nights = [1, 7, 19].map((night) =>
  collect(simulator, startMs + night * dayMs, startMs + (night + 1) * dayMs),
);
const night = nights[1]!;

/** The sun's altitude by an independent package, degrees, without refraction. */
function sunAltitudeDeg(timeMs: number, place: Place): number {
  const time = MakeTime(new Date(timeMs));
  const observer = new Observer(place.latitude, place.longitude, 0);
  const { ra, dec } = Equator(Body.Sun, time, observer, true, true);
  return Horizon(time, observer, ra, dec).altitude;
}

describe('the simulator', () => {
  it('gives the same spots for a seed and others for another', () => {
    const fromMs = startMs + 5 * dayMs + 8 * hourMs;
    const range = (of: number) => collect(createSimulator({ seed: of, scenario }), fromMs, fromMs + hourMs);
    expect(range(seed)).toEqual(collect(simulator, fromMs, fromMs + hourMs));
    expect(range(seed + 1)).not.toEqual(range(seed));
  });

  it('gives the same spots for a range however it is split, over the change of nights too', () => {
    const wholeFromMs = startMs + 3 * dayMs - 2 * hourMs;
    const lengthMs = 8 * hourMs;
    const whole = collect(simulator, wholeFromMs, wholeFromMs + lengthMs);
    expect(whole.length).toBeGreaterThan(1_000);
    fc.assert(
      fc.property(fc.array(fc.integer({ min: 0, max: lengthMs }), { minLength: 1, maxLength: 3 }), (cuts) => {
        const edges = [0, ...cuts, lengthMs].sort((a, b) => a - b).map((cutMs) => wholeFromMs + cutMs);
        const parts = edges.slice(1).flatMap((toMs, i) => collect(simulator, edges[i]!, toMs));
        expect(parts).toEqual(whole);
      }),
      { numRuns: 8 },
    );
  });

  it('gives the same spots when lived through in steps of any length', () => {
    const fromMs = startMs + 6 * dayMs + 9 * hourMs;
    const whole = collect(simulator, fromMs, fromMs + hourMs);
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: 1, max: 10 * minuteMs }), { minLength: 10, maxLength: 40 }),
        (steps) => {
          const live = simulator.live({ fromMs });
          const lived: SimulatedSpot[] = [];
          let nowMs = fromMs;
          for (const step of steps) {
            nowMs = Math.min(fromMs + hourMs, nowMs + step);
            lived.push(...live.advance(nowMs));
          }
          lived.push(...live.advance(fromMs + hourMs));
          expect(lived).toEqual(whole);
        },
      ),
      { numRuns: 5 },
    );
  });

  it('makes 25,000 to 40,000 spots a night, in order of time, all inside the night', () => {
    nights.forEach((spots, i) => {
      const fromMs = startMs + [1, 7, 19][i]! * dayMs;
      expect(spots.length).toBeGreaterThan(25_000);
      expect(spots.length).toBeLessThan(40_000);
      let before = fromMs;
      for (const { timeMs } of spots) {
        if (timeMs < before) throw new Error('out of order');
        before = timeMs;
      }
      expect(before).toBeLessThan(fromMs + dayMs);
    });
  });

  it('is neither silent nor overrun in the short nights of June', () => {
    const summer = createSimulator({ seed, scenario: createDemoScenario('2026-06-01') });
    const count = collect(summer, summer.startMs, summer.startMs + dayMs).length;
    expect(count).toBeGreaterThan(15_000);
    expect(count).toBeLessThan(40_000);
  });

  it('reports whole decibels between 0 and 60, most in the teens and twenties', () => {
    const levels = night.map(({ snrDb }) => snrDb).sort((a, b) => a - b);
    for (const level of levels) if (!Number.isInteger(level)) throw new Error(`${level} is not whole`);
    expect(levels[0]).toBeGreaterThanOrEqual(0);
    expect(levels.at(-1)).toBeLessThanOrEqual(60);
    expect(medianSorted(levels)).toBeGreaterThan(12);
    expect(medianSorted(levels)).toBeLessThan(28);
    // Few reports lie far below the level at which half of the calls are decoded.
    expect(levels.filter((level) => level < 2).length / levels.length).toBeLessThan(0.001);
  });

  it('works the CW segments of four bands with all three receivers', () => {
    const bands = new Map<number | null, number>();
    for (const { freqKhz } of night) bands.set(bandOfKhz(freqKhz), (bands.get(bandOfKhz(freqKhz)) ?? 0) + 1);
    expect([...bands.keys()].sort()).toEqual([160, 30, 40, 80]);
    for (const count of bands.values()) expect(count).toBeGreaterThan(1_500);
    expect(new Set(night.map(({ receiver }) => receiver))).toEqual(new Set(['EI7QSA', 'EI7QSC', 'EI7QSD']));
    for (const { freqKhz, speedWpm, mode } of night) {
      const inside = [
        [1809, 1841],
        [3503, 3571],
        [7001, 7041],
        [10101, 10131],
      ].some(([low, high]) => freqKhz > low! && freqKhz < high!);
      if (!inside) throw new Error(`${freqKhz} kHz is outside the CW segments`);
      if (Math.abs(freqKhz * 10 - Math.round(freqKhz * 10)) > 1e-6) throw new Error(`${freqKhz} is too fine`);
      if (!Number.isInteger(speedWpm) || speedWpm < 10 || speedWpm > 45) throw new Error(`${speedWpm} WPM`);
      if (mode !== 'CW') throw new Error(mode);
    }
  });

  it('hears distant stations on 160 m only while both ends are dark or nearly so', () => {
    const places = new Map(simulator.stations.map((station) => [station.call, station]));
    const distant = night.filter(
      ({ call, freqKhz }) => freqKhz < 2000 && places.get(call)!.distanceKm > 2000,
    );
    expect(distant.length).toBeGreaterThan(500);
    let light = 0;
    for (const { call, timeMs } of distant) {
      const away = sunAltitudeDeg(timeMs, places.get(call)!.place);
      const home = sunAltitudeDeg(timeMs, scenario.place);
      if (Math.max(away, home) > 8) throw new Error(`${call} was heard through daylight`);
      if (Math.max(away, home) > 0) light++;
    }
    expect(light / distant.length).toBeLessThan(0.1);
  });

  it('hears North America only after its sunset, in the second half of the evening', () => {
    const places = new Map(simulator.stations.map((station) => [station.call, station]));
    const hours = night
      .filter(({ call, freqKhz }) => freqKhz < 4000 && places.get(call)!.area.name === 'United States 1')
      .map(({ timeMs }) => (timeMs - startMs - 7 * dayMs) / hourMs);
    expect(hours.length).toBeGreaterThan(50);
    // Sunset in Boston in early November is near 21:30 UTC, some nine hours after the night's noon.
    expect(Math.min(...hours)).toBeGreaterThan(8);
  });

  it('repeats a call every one to three minutes and lets receivers differ by seconds', () => {
    const last = new Map<string, number>();
    const gaps: number[] = [];
    const byCall = new Map<string, SimulatedSpot[]>();
    for (const spot of night) {
      const key = `${spot.receiver} ${spot.call}`;
      const before = last.get(key);
      if (before !== undefined && spot.timeMs - before < 10 * minuteMs) gaps.push(spot.timeMs - before);
      last.set(key, spot.timeMs);
      byCall.set(spot.call, [...(byCall.get(spot.call) ?? []), spot]);
    }
    gaps.sort((a, b) => a - b);
    expect(gaps[0]).toBeGreaterThan(8_000);
    expect(medianSorted(gaps)).toBeGreaterThan(60_000);
    expect(medianSorted(gaps)).toBeLessThan(180_000);
    let pairs = 0;
    for (const spots of byCall.values()) {
      for (let i = 1; i < spots.length; i++) {
        const [one, other] = [spots[i - 1]!, spots[i]!];
        if (one.receiver === other.receiver || other.timeMs - one.timeMs > 9_000) continue;
        pairs++;
        if (other.timeMs - one.timeMs > 5_000) throw new Error('receivers differ by more than 5 s');
        if (Math.abs(one.freqKhz - other.freqKhz) > 0.21) throw new Error('receivers differ by over 0.2 kHz');
      }
    }
    expect(pairs).toBeGreaterThan(5_000);
  });

  it('fades by some 3 to 6 dB between the receivers on different antennas', () => {
    const study = createSimulator({ seed, scenario, study: true });
    for (const [model, low, high] of [
      [simulator, 3, 6],
      [study, 2, 4],
    ] as const) {
      const differences = matched(
        collect(model, startMs + 2 * dayMs + 6 * hourMs, startMs + 2 * dayMs + 14 * hourMs),
        'EI7QSA',
        'EI7QSD',
      )
        .filter(([spot]) => model.antennaAt('EI7QSA', spot.timeMs) === 'South wire')
        .map(([a, b]) => a.snrDb - b.snrDb);
      expect(differences.length).toBeGreaterThan(100);
      expect(sampleStandardDeviation(differences)).toBeGreaterThan(low);
      expect(sampleStandardDeviation(differences)).toBeLessThan(high);
    }
  });

  it('lets two receivers on one antenna differ by their offsets only', () => {
    const study = createSimulator({ seed, scenario, study: true });
    const truth = createTruth({ seed, scenario, study: true });
    const live = study.live({ fromMs: startMs + 9 * hourMs, antennaAt: () => 'West wire' });
    const spots = live.advance(startMs + 15 * hourMs);
    for (const [receiver, other] of [
      ['EI7QSA', 'EI7QSC'],
      ['EI7QSD', 'EI7QSA'],
    ] as const) {
      for (const bandMetres of [160, 80, 40]) {
        const differences = matched(spots, receiver, other)
          .filter(([spot]) => bandOfKhz(spot.freqKhz) === bandMetres)
          .map(([a, b]) => a.snrDb - b.snrDb);
        const expectedDb =
          truth.receiverOffsetDb(receiver, bandMetres) - truth.receiverOffsetDb(other, bandMetres);
        const standardError = sampleStandardDeviation(differences) / Math.sqrt(differences.length);
        expect(differences.length).toBeGreaterThan(300);
        expect(Math.abs(mean(differences) - expectedDb)).toBeLessThan(4 * standardError);
      }
    }
  });

  it('hears nothing on a receiver that is off or on no antenna', () => {
    const offMs = startMs + 9 * dayMs + 1289 * minuteMs;
    const spots = collect(simulator, offMs, offMs + 14 * minuteMs);
    // A call sent before the restart may still be reported in its first seconds.
    expect(spots.filter(({ receiver, timeMs }) => receiver === 'EI7QSD' && timeMs > offMs + 12_000)).toEqual(
      [],
    );
    const live = simulator.live({ fromMs: startMs + 9 * hourMs, antennaAt: () => null });
    expect(live.advance(startMs + 10 * hourMs)).toEqual([]);
  });

  it('measures a call before it reports it, so that some spots belong to the antenna before a switch', () => {
    const fromMs = startMs + 9 * hourMs;
    const switchMs = fromMs + 30 * minuteMs;
    const live = simulator.live({
      fromMs,
      antennaAt: (_, timeMs) => (timeMs < switchMs ? null : 'Vertical'),
    });
    const first = live.advance(fromMs + hourMs)[0]!;
    expect(first.timeMs).toBeGreaterThanOrEqual(switchMs + 3_000);
  });

  it('packs ten minutes of radio into one at speed 10, on the wall clock', () => {
    const fromMs = startMs + 9 * hourMs;
    const fast = simulator.live({ fromMs, speed: 10 }).advance(fromMs + 6 * minuteMs);
    const slow = simulator.live({ fromMs }).advance(fromMs + 60 * minuteMs);
    expect(fast.length / slow.length).toBeGreaterThan(0.85);
    expect(fast.length / slow.length).toBeLessThan(1.15);
    for (const { timeMs } of fast) {
      if (timeMs < fromMs || timeMs > fromMs + 6 * minuteMs) throw new Error('off the wall clock');
    }
  });

  it('refuses a speed of zero and an antenna that it does not know', () => {
    expect(() => simulator.live({ fromMs: startMs, speed: 0 })).toThrow(RangeError);
    const live = simulator.live({ fromMs: startMs + 9 * hourMs, antennaAt: () => 'Fence' });
    expect(() => live.advance(startMs + 10 * hourMs)).toThrow('no antenna "Fence"');
  });

  it('refuses a scenario with an antenna that nature knows nothing of', () => {
    const antennas = [{ ...scenario.antennas[0]!, name: 'Fence' }, ...scenario.antennas.slice(1)];
    expect(() => createSimulator({ seed, scenario: { ...scenario, antennas } })).toThrow('"Fence"');
  });
});

/** Reports of the same call by two receivers, not more than 5 s apart. */
function matched(
  spots: readonly SimulatedSpot[],
  receiver: string,
  other: string,
): [SimulatedSpot, SimulatedSpot][] {
  const latest = new Map<string, SimulatedSpot>();
  const pairs: [SimulatedSpot, SimulatedSpot][] = [];
  for (const spot of spots) {
    latest.set(`${spot.receiver} ${spot.call}`, spot);
    const isFirst = spot.receiver === receiver;
    if (!isFirst && spot.receiver !== other) continue;
    const partner = latest.get(`${isFirst ? other : receiver} ${spot.call}`);
    if (!partner || spot.timeMs - partner.timeMs > 5_000) continue;
    pairs.push(isFirst ? [spot, partner] : [partner, spot]);
  }
  return pairs;
}
