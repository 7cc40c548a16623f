import fc from 'fast-check';
import { describe, expect, it, vi } from 'vitest';
import { createDemoScenario } from './scenario.ts';
import { createSwitchingPlan, type PlannedDwell } from './switching-plan.ts';

// Many logs of a month are compared; a busy machine may take its time over them.
vi.setConfig({ testTimeout: 60_000 });

const scenario = createDemoScenario('2026-11-01');
const plan = createSwitchingPlan(11, scenario);
const minuteMs = 60_000;
const dayMs = 24 * 60 * minuteMs;
const startMs = Date.parse('2026-11-01T12:36:00Z');
const endMs = startMs + 30 * dayMs;
const dwells = plan.dwells(startMs, endMs);
const of = (receiver: string): PlannedDwell[] => dwells.filter((dwell) => dwell.receiver === receiver);

describe('the switching plan', () => {
  it('runs every pair of antennas in service both ways round in one night', () => {
    const seen = new Set<string>();
    for (let atMs = startMs + 2 * dayMs; atMs < startMs + 3 * dayMs; atMs += 5 * minuteMs) {
      seen.add(`${plan.antennaAt('EI7QSA', atMs)} / ${plan.antennaAt('EI7QSC', atMs)}`);
    }
    const inService = scenario.antennas.map(({ name }) => name).filter((name) => name !== 'Phased pair');
    for (const a of inService) for (const b of inService) if (a !== b) expect(seen).toContain(`${a} / ${b}`);
  });

  it('gives every antenna about the same time in a night', () => {
    const minutes = new Map<string, number>();
    for (
      let atMs = startMs + 8 * dayMs + 5 * 60 * minuteMs;
      atMs < startMs + 8.75 * dayMs;
      atMs += 5 * minuteMs
    ) {
      for (const receiver of ['EI7QSA', 'EI7QSC']) {
        const antenna = plan.antennaAt(receiver, atMs)!;
        minutes.set(antenna, (minutes.get(antenna) ?? 0) + 5);
      }
    }
    expect(minutes.size).toBe(8);
    const times = [...minutes.values()];
    expect(Math.max(...times) / Math.min(...times)).toBeLessThan(1.5);
  });

  it('never uses an antenna before or after its time in service', () => {
    const dates = (name: string): string[] =>
      dwells.filter(({ antenna }) => antenna === name).map((dwell) => new Date(dwell.startMs).toISOString());
    expect(dates('Phased pair')[0]! > '2026-11-07T12:36').toBe(true);
    expect(dates('Ground wire').at(-1)! < '2026-11-26T12:36').toBe(true);
  });

  it('never has a receiver on two antennas at once', () => {
    for (const { callSign } of scenario.receivers) {
      const own = of(callSign);
      for (let i = 1; i < own.length; i++) expect(own[i]!.startMs).toBeGreaterThanOrEqual(own[i - 1]!.endMs!);
    }
  });

  it('logs what was truly connected', () => {
    fc.assert(
      fc.property(
        fc.nat({ max: dwells.length - 1 }),
        fc.double({ min: 0, max: 0.999, noNaN: true }),
        (i, part) => {
          const dwell = dwells[i]!;
          const lengthMs = (dwell.endMs ?? endMs) - dwell.startMs;
          expect(plan.antennaAt(dwell.receiver, Math.floor(dwell.startMs + part * lengthMs))).toBe(
            dwell.antenna,
          );
        },
      ),
    );
  });

  it('has a forgotten evening: switched, but not logged', () => {
    const fromMs = startMs + 11 * dayMs + 120 * minuteMs;
    const toMs = startMs + 11 * dayMs + 545 * minuteMs;
    const touching = dwells.filter(
      (dwell) => dwell.receiver !== 'EI7QSD' && dwell.startMs < toMs && (dwell.endMs ?? endMs) > fromMs,
    );
    expect(touching).toEqual([]);
    const antennas = new Set<string | null>();
    for (let atMs = fromMs; atMs < toMs; atMs += 5 * minuteMs) antennas.add(plan.antennaAt('EI7QSA', atMs));
    expect(antennas.size).toBeGreaterThan(4);
    expect(antennas).not.toContain(null);
  });

  it('keeps the fixed receiver on its antenna, but for a restart', () => {
    expect(of('EI7QSD')).toEqual([
      { receiver: 'EI7QSD', antenna: 'Vertical', startMs, endMs: startMs + 9 * dayMs + 1289 * minuteMs },
      {
        receiver: 'EI7QSD',
        antenna: 'Vertical',
        startMs: startMs + 9 * dayMs + 1303 * minuteMs,
        endMs: null,
      },
    ]);
    expect(plan.antennaAt('EI7QSD', startMs + 9 * dayMs + 1295 * minuteMs)).toBe(null);
  });

  it('knows nothing before its first night', () => {
    expect(plan.antennaAt('EI7QSA', startMs - 1)).toBe(null);
    expect(plan.dwells(startMs - 10 * dayMs, startMs)).toEqual([]);
  });

  it('gives the same log for a range however it is split', () => {
    fc.assert(
      fc.property(fc.integer({ min: startMs + 1, max: endMs - 1 }), (cutMs) => {
        expect([...plan.dwells(startMs, cutMs), ...plan.dwells(cutMs, endMs)]).toEqual(dwells);
      }),
      { numRuns: 10 },
    );
  });
});
