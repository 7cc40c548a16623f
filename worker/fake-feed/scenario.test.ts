import { describe, expect, it } from 'vitest';
import { parseLocator } from '../../shared/radio/locator.ts';
import { isRefusal } from '../../shared/radio/place.ts';
import { createDemoScenario, demoFirstNight } from './scenario.ts';

const scenario = createDemoScenario('2026-11-01');

describe('the demo scenario', () => {
  it('stands in the middle of its locator', () => {
    const cell = parseLocator(scenario.locator);
    if (isRefusal(cell)) throw new Error(cell.reason);
    expect(scenario.place).toEqual({ latitude: cell.latitude, longitude: cell.longitude });
  });

  it('has eight antennas of mixed kinds with names and marks of their own', () => {
    expect(scenario.antennas).toHaveLength(8);
    expect(new Set(scenario.antennas.map(({ name }) => name.toLowerCase())).size).toBe(8);
    expect(new Set(scenario.antennas.map(({ marker }) => marker)).size).toBe(8);
    expect(new Set(scenario.antennas.map(({ kind }) => kind)).size).toBeGreaterThanOrEqual(4);
  });

  it('has two receivers on the switch and one fixed on an antenna that exists', () => {
    expect(scenario.receivers.filter(({ fixedAntenna }) => fixedAntenna === null)).toHaveLength(2);
    const [fixed] = scenario.receivers.filter(({ fixedAntenna }) => fixedAntenna !== null);
    expect(scenario.antennas.map(({ name }) => name)).toContain(fixed?.fixedAntenna);
  });

  it('uses call signs that no licence can have', () => {
    const calls = [scenario.callSign, ...scenario.receivers.map(({ callSign }) => callSign)];
    for (const call of calls) expect(call).toMatch(/^EI7Q[R-U][A-Z]$/);
  });

  it('puts thirty whole nights before the night of the present moment', () => {
    // Solar noon at 9 degrees west is 12:36 UTC: just before it, the night of the day before still runs.
    expect(demoFirstNight(Date.parse('2026-12-01T12:35:59Z'))).toBe('2026-10-31');
    expect(demoFirstNight(Date.parse('2026-12-01T12:36:00Z'))).toBe('2026-11-01');
    expect(demoFirstNight(Date.parse('2026-12-02T03:00:00Z'))).toBe('2026-11-01');
  });
});
