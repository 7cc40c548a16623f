import { mount } from '@vue/test-utils';
import { nextTick } from 'vue';
import { describe, expect, it } from 'vitest';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { LivePair } from '../../../shared/contracts/tonight.ts';
import { adviceLimitDb } from './advice.ts';
import type { BandAdvice } from './advice.ts';
import BandAdvicePanel from './BandAdvicePanel.vue';
import LivePairs from './LivePairs.vue';
import ReceiversNow from './ReceiversNow.vue';
import { sunNow } from './sun-now.ts';
import SunPanel from './SunPanel.vue';

const antenna = (id: number, name: string, marker: string): Antenna => ({
  ...{ id, name, marker, kind: 'long wire', headingDeg: null, beamwidthDeg: null, lengthM: null },
  ...{ heightM: null, notes: '', inServiceFrom: null, inServiceTo: null },
});
const antennas = new Map([
  [1, antenna(1, 'North-east wire', 'N')],
  [2, antenna(2, 'Vertical', 'V')],
]);
const nowMs = Date.parse('2026-11-30T22:00:00Z');
const pair = (second: number, change: Partial<LivePair> = {}): LivePair => ({
  ...{ at: new Date(nowMs + second * 1000).toISOString(), call: 'EA8QSH', country: 'Canary Islands' },
  ...{ bandMetres: 160, azimuthDeg: 205, sector: 6, antennaA: 1, antennaB: 2, receiverA: 1, receiverB: 2 },
  ...{ snrADb: 24, snrBDb: 18, differenceDb: 6 },
  ...change,
});

describe('the stations heard on two antennas', () => {
  const mountPairs = (pairs: LivePair[]) =>
    mount(LivePairs, {
      props: {
        ...{ pairs, antennas, rows: 30, showBand: true, wall: false },
        pairKey: (each: LivePair) => each.at + each.call,
      },
      slots: { empty: 'Nothing yet' },
    });
  const calls = (list: ReturnType<typeof mountPairs>) =>
    list.findAll('th[scope="row"]').map((cell) => cell.text());

  it('show call, band, both markers, both levels and the difference with its sign', () => {
    const row = mountPairs([pair(0)]).findAll('tr')[1]!;
    expect(row.text().replace(/\s+/g, ' ')).toContain('22:00:00');
    expect(row.find('th').text()).toContain('EA8QSH');
    expect(row.findAll('.snr').map((cell) => cell.find('svg').attributes('aria-label'))).toEqual([
      'North-east wire',
      'Vertical',
    ]);
    expect(row.findAll('.snr').map((cell) => cell.text().replace(/\s+/g, ' '))).toEqual(['N 24', 'V 18']);
    expect(row.find('.difference').text()).toContain('+6\u2009dB');
    expect(row.find('.difference').text()).toContain('North-east wire stronger');
    expect(row.find('.difference').classes()).toContain('a');
  });

  it('tell a stronger second antenna by sign and side as well as by colour', () => {
    const row = mountPairs([pair(0, { snrADb: 10, snrBDb: 14, differenceDb: -4 })]).findAll('tr')[1]!;
    expect(row.find('.difference').text()).toContain('\u22124\u2009dB');
    expect(row.find('.difference').text()).toContain('Vertical stronger');
    expect(row.find('.difference i').attributes('style')).toContain('right: 50%');
  });

  it('stand still under the pointer, say how many wait, and go on after it', async () => {
    const list = mountPairs([pair(0)]);
    await list.find('.scroll').trigger('pointerenter');
    await list.setProps({ pairs: [pair(5, { call: 'JA7QSY' }), pair(0)] });
    expect(calls(list)).toHaveLength(1);
    expect(list.find('header').text()).toContain('1 new line waiting');
    await list.find('.scroll').trigger('pointerleave');
    await nextTick();
    expect(calls(list)[0]).toContain('JA7QSY');
  });

  it('stand still by the button too', async () => {
    const list = mountPairs([pair(0)]);
    await list.find('header button').trigger('click');
    await list.setProps({ pairs: [pair(5, { call: 'JA7QSY' }), pair(0)] });
    expect(calls(list)).toHaveLength(1);
    await list.find('header button').trigger('click');
    expect(calls(list)).toHaveLength(2);
  });

  it('give way to words when there are none', () => {
    const list = mountPairs([]);
    expect(list.text()).toContain('Nothing yet');
    expect(list.find('table').exists()).toBe(false);
  });
});

describe('the advice of a band', () => {
  const better: BandAdvice = {
    ...{ bandMetres: 160, inUseAntennaId: 2, bestAntennaId: 1, advantageDb: 2.8, intervalDb: [1.9, 3.7] },
    ...{ sentence: 'North-east wire hears 2.8 dB better.', code: 'a clearly better', units: 412, nights: 14 },
  };
  const mountAdvice = (band: BandAdvice) =>
    mount(BandAdvicePanel, { props: { band, antennas, limitDb: 6, marginDb: 1 } });

  it('says which antenna, by how much, with its interval on a scale and the evidence', () => {
    const advice = mountAdvice(better);
    expect(advice.find('.headline').text()).toBe('North-east wire +2.8\u2009dB');
    expect(advice.find('.scale').attributes('aria-label')).toBe(
      'North-east wire against Vertical: +2.8\u2009dB, 95\u2009% interval 1.9 to 3.7\u2009dB',
    );
    // 2.8 dB of 6 on a half scale of 96 units from the middle at 100.
    expect(Number(advice.find('.dot').attributes('cx'))).toBeCloseTo(100 + (2.8 / 6) * 96, 6);
    expect(advice.find('.evidence').text()).toContain('412 units, 14 nights');
  });

  it('says to stay, without a scale, where nothing better is shown', () => {
    const advice = mountAdvice({ ...better, bestAntennaId: 2, advantageDb: 0, intervalDb: null });
    expect(advice.find('.headline').text()).toBe('Stay on Vertical');
    expect(advice.find('.scale').exists()).toBe(false);
    expect(advice.classes()).not.toContain('switch');
  });

  it('is hatched, not coloured, where nobody knows', () => {
    const advice = mountAdvice({
      ...better,
      bestAntennaId: null,
      advantageDb: null,
      intervalDb: null,
      units: 4,
      nights: 0,
    });
    expect(advice.find('.headline').text()).toBe('Not known');
    expect(advice.find('pattern').exists()).toBe(true);
  });

  it('shares one axis among the bands: six dB either way, or whole dB beyond the widest interval', () => {
    expect(adviceLimitDb([better])).toBe(6);
    expect(adviceLimitDb([better, { ...better, intervalDb: [5.2, 8.4] }])).toBe(9);
  });
});

describe('the sun of a night', () => {
  const galway = { latitude: 53.5, longitude: -9 };

  it('counts down to sunset by day, to sunrise by night, and to the next sunset after sunrise', () => {
    const before = sunNow(Date.parse('2026-11-30T15:00:00Z'), galway);
    expect(before).toMatchObject({ words: 'until sunset', isDark: false, share: null });
    const dark = sunNow(nowMs, galway);
    expect(dark).toMatchObject({ words: 'of darkness left', isDark: true });
    expect(dark.sunsetMs).toBe(before.sunsetMs);
    expect(dark.share).toBeGreaterThan(0.3);
    expect(dark.share).toBeLessThan(0.4);
    const after = sunNow(Date.parse('2026-12-01T10:00:00Z'), galway);
    expect(after.words).toBe('until sunset');
    expect(after.sunsetMs).toBeGreaterThan(dark.sunriseMs!);
  });

  it('knows that the polar night has no sunrise and the midnight sun no darkness', () => {
    const tromso = { latitude: 69.65, longitude: 18.96 };
    expect(sunNow(Date.parse('2026-12-21T22:00:00Z'), tromso)).toMatchObject({ seconds: null, isDark: true });
    expect(sunNow(Date.parse('2026-06-21T22:00:00Z'), tromso)).toMatchObject({
      seconds: null,
      isDark: false,
    });
  });

  it('is shown with both ends in UTC and local time', () => {
    const sun = { seconds: 4320.9, words: 'of darkness left', isDark: true, share: 0.9 };
    const [sunsetMs, sunriseMs] = [Date.parse('2026-11-30T16:21:00Z'), Date.parse('2026-12-01T08:28:00Z')];
    const panel = mount(SunPanel, {
      props: { sun: { ...sun, sunsetMs, sunriseMs }, timeZone: 'Europe/Paris' },
    });
    expect(panel.find('.figure').text()).toBe('1\u2009h 12\u2009min of darkness left');
    expect(
      panel.findAll('dl > div').map((end) => end.findAll('dt, time, .local').map((part) => part.text())),
    ).toEqual([
      ['sunset', '16:21Z', '17:21 local'],
      ['sunrise', '08:28Z', '09:28 local'],
    ]);
  });
});

describe('the receivers now', () => {
  const base = { receiverId: 1, callSign: 'EI7QSA', label: 'Receiver 1', spotsLastTenMinutes: 213 };

  it('are shown with antenna, since when and their spots', () => {
    const since = '2026-11-30T21:48:00Z';
    const on = { ...base, antennaId: 2, antennaName: 'Vertical', antennaMarker: 'V', since };
    const text = mount(ReceiversNow, { props: { receivers: [on], nowMs } }).text();
    expect(text).toContain('Vertical');
    expect(text).toContain('since 21:48Z (12\u2009min ago)');
    expect(text).toContain('213 spots in 10\u2009min');
  });

  it('say the day of a dwell that began long ago, and when there is no antenna', () => {
    const off = { ...base, antennaId: null, antennaName: null, antennaMarker: null, since: null };
    const old = { ...base, receiverId: 2, antennaId: 2, antennaName: 'Vertical', antennaMarker: 'V' };
    const receivers = [off, { ...old, since: '2026-10-01T00:00:00Z' }];
    const items = mount(ReceiversNow, { props: { receivers, nowMs } }).findAll('li');
    expect(items[0]!.text()).toContain('on no antenna');
    expect(items[1]!.text()).toContain('since 2026-10-01 00:00Z');
  });
});
