import { describe, expect, it } from 'vitest';
import { daylight, pathLevelDb } from './propagation.ts';

const dark: [number, number] = [-30, -30];

describe('the path model', () => {
  it('goes from dark to light without a jump or a step back', () => {
    let before = 0;
    for (let altitudeDeg = -20; altitudeDeg <= 30; altitudeDeg += 0.5) {
      const now = daylight(altitudeDeg);
      expect(now - before).toBeGreaterThanOrEqual(0);
      expect(now - before).toBeLessThan(0.06);
      before = now;
    }
    expect(daylight(-20)).toBe(0);
    expect(daylight(30)).toBe(1);
  });

  it('closes long 160 m and 80 m paths when either end is in daylight', () => {
    for (const band of [160, 80] as const) {
      const nightDb = pathLevelDb(band, 5500, dark);
      expect(nightDb - pathLevelDb(band, 5500, [25, -30])).toBeGreaterThan(40);
      expect(nightDb - pathLevelDb(band, 5500, [-30, 25])).toBeGreaterThan(40);
    }
  });

  it('lets daylight hurt the lower bands more', () => {
    const lossDb = ([160, 80, 40] as const).map(
      (band) => pathLevelDb(band, 2000, dark) - pathLevelDb(band, 2000, [20, 20]),
    );
    expect(lossDb[0]!).toBeGreaterThan(lossDb[1]!);
    expect(lossDb[1]!).toBeGreaterThan(lossDb[2]!);
  });

  it('weakens with distance in the dark', () => {
    for (const band of [160, 80, 40] as const) {
      const levels = [500, 1500, 4000, 9000, 17000].map((km) => pathLevelDb(band, km, dark));
      expect([...levels].sort((a, b) => b - a)).toEqual(levels);
    }
  });

  it('closes short 30 m paths late in the night and leaves long ones open', () => {
    expect(pathLevelDb(30, 800, [-8, -8]) - pathLevelDb(30, 800, [-45, -45])).toBeGreaterThan(10);
    expect(pathLevelDb(30, 6000, [-8, -8])).toBeCloseTo(pathLevelDb(30, 6000, [-45, -45]), 0);
  });

  it('names the band that it does not know', () => {
    expect(() => pathLevelDb(20, 1000, dark)).toThrow('20 m');
  });
});
