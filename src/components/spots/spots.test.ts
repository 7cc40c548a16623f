import { mount } from '@vue/test-utils';
import { afterEach, describe, expect, it } from 'vitest';
import type { SpotRow } from '../../../shared/contracts/spot.ts';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Receiver } from '../../../shared/contracts/receiver.ts';
import { everySpot } from './spot-filter.ts';
import SpotFilters from './SpotFilters.vue';
import SpotMap from './SpotMap.vue';
import SpotTable from './SpotTable.vue';

afterEach(() => (document.body.innerHTML = ''));

const receiver: Receiver = { id: 1, callSign: 'EI7QSA', label: 'Switch port 1', notes: '', retiredAt: null };
const antenna: Antenna = {
  id: 5,
  name: 'Vertical',
  marker: 'V',
  kind: 'vertical',
  headingDeg: null,
  beamwidthDeg: null,
  lengthM: null,
  heightM: null,
  notes: '',
  inServiceFrom: null,
  inServiceTo: null,
};
const spot: SpotRow = {
  heardAt: '2026-11-30T18:05:09Z',
  receiverId: 1,
  call: 'EA8QSH',
  bandMetres: 160,
  freqKhz: 1824.5,
  mode: 'CW',
  snrDb: -3,
  speedWpm: null,
  uncertaintySeconds: 0,
  importId: null,
  country: 'Canary Islands',
  azimuthDeg: 190.4,
  distanceKm: 2901.2,
  bearingUnsure: true,
  tag: 'guarded',
  antennaId: 5,
  why: '9 s after the switch to Vertical; the guard is 20 s.',
};

describe('the table of spots', () => {
  it('says of each spot, in sight, why it is tagged as it is', () => {
    const shown = mount(SpotTable, {
      props: {
        spots: [
          spot,
          { ...spot, receiverId: 9, antennaId: null, tag: 'untagged', azimuthDeg: null, why: 'No log.' },
        ],
        receiverById: new Map([[1, receiver]]),
        antennaById: new Map([[5, antenna]]),
        more: false,
        loadingMore: false,
      },
    });
    const rows = shown.findAll('tbody tr').map((row) => row.findAll('th, td').map((cell) => cell.text()));
    expect(rows[0]).toEqual([
      '2026-11-30 18:05:09Z',
      'EA8QSH',
      'Canary Islands',
      '160\u2009m',
      '1824.5\u2009kHz',
      'CW',
      '\u22123\u2009dB',
      '',
      'Switch port 1',
      'VVertical',
      'Guard',
      '9 s after the switch to Vertical; the guard is 20 s.',
      '190°bearing unsure',
      '2\u2009901\u2009km',
    ]);
    expect([rows[1]![8], rows[1]![9], rows[1]![10], rows[1]![12]]).toEqual([
      'receiver 9',
      'antenna: none',
      'No dwell',
      'not knownbearing unsure',
    ]);
  });
});

describe('the filters of spots', () => {
  const filters = (filter = everySpot) =>
    mount(SpotFilters, {
      props: {
        filter,
        receivers: [receiver],
        antennas: [antenna],
        nightStart: '2026-11-30T12:36:00.000Z',
        nowMs: Date.UTC(2026, 10, 30, 23, 0, 30),
      },
    });
  const inputs = (shown: ReturnType<typeof filters>) => shown.findAll('input');
  const press = (shown: ReturnType<typeof filters>, word: string) =>
    shown
      .findAll('button')
      .find((each) => each.text() === word)!
      .trigger('click');

  it('ask with a time as it was typed, and say what is wrong with one that cannot be read', async () => {
    const shown = filters();
    await inputs(shown)[0]!.setValue('30.11.2026');
    expect(shown.text()).toContain('Give a UTC time such as 2026-11-30 18:05, or a day.');
    expect(shown.emitted('change')).toBeUndefined();
    await inputs(shown)[0]!.setValue('2026-11-30 18:05');
    expect(shown.emitted('change')).toEqual([[{ ...everySpot, from: '2026-11-30T18:05:00Z' }]]);
  });

  it('tell when the end lies before the start', () => {
    const shown = filters({ ...everySpot, from: '2026-11-30T18:00:00Z', to: '2026-11-30T17:00:00Z' });
    expect(shown.text()).toContain('The end lies before the start.');
  });

  it('set the time with one press and leave its end open', async () => {
    const shown = filters({ ...everySpot, to: '2026-11-01T00:00:00Z', bandMetres: 160 });
    await press(shown, 'Last hour');
    await press(shown, 'This night');
    await press(shown, 'All spots');
    expect(shown.emitted('change')).toEqual([
      [{ ...everySpot, bandMetres: 160, from: '2026-11-30T22:00:00Z' }],
      [{ ...everySpot, bandMetres: 160, from: '2026-11-30T12:36:00.000Z' }],
      [everySpot],
    ]);
  });

  it('write a call sign in capitals once it is finished', async () => {
    const shown = filters();
    await shown.get('input[type=search]').setValue(' ea8qsh ');
    await shown.get('form').trigger('submit');
    expect(shown.emitted('change')?.at(-1)).toEqual([{ ...everySpot, call: 'EA8QSH' }]);
  });
});

describe('the map of stations heard', () => {
  const heard = (call: string, azimuthDeg: number, distanceKm: number, spots: number) => ({
    call,
    country: 'Somewhere',
    latitudeDeg: 0,
    longitudeDeg: 0,
    azimuthDeg,
    distanceKm,
    spots,
    bestSnrDb: 20,
  });
  const map = () =>
    mount(SpotMap, {
      attachTo: document.body,
      props: {
        centre: { latitudeDeg: 53.5, longitudeDeg: -9 },
        stationName: 'EI7QSB',
        sectorCount: 12,
        stations: [
          heard('W1QSK', 283, 4527, 10),
          heard('EA8QSH', 190, 2901, 90),
          heard('JA7QSY', 20, 9600, 1),
        ],
      },
    });
  const dot = (shown: ReturnType<typeof map>, call: string) => shown.get(`circle[data-call="${call}"]`);

  it('says in words what it shows', () => {
    expect(map().get('p').text()).toBe(
      '3 stations heard. Most spots: EA8QSH, 90. Farthest: JA7QSY, 9\u2009600\u2009km at 020°.',
    );
  });

  it('puts west to the left, south down, and the more spots into the larger dot, drawn first', () => {
    const shown = map();
    const at = (call: string, name: string) => Number(dot(shown, call).attributes(name));
    expect(at('W1QSK', 'cx')).toBeLessThan(0);
    expect(at('EA8QSH', 'cy')).toBeGreaterThan(0);
    expect(at('EA8QSH', 'r')).toBeGreaterThan(at('W1QSK', 'r'));
    expect(shown.findAll('circle[data-call]').map((each) => each.attributes('data-call'))).toEqual([
      'EA8QSH',
      'W1QSK',
      'JA7QSY',
    ]);
  });

  it('is one stop of the Tab key, names the station in focus and goes round by bearing', async () => {
    const shown = map();
    expect(shown.findAll('circle[tabindex="0"]').map((each) => each.attributes('data-call'))).toEqual([
      'JA7QSY',
    ]);
    await dot(shown, 'JA7QSY').trigger('focus');
    expect(shown.emitted('update:lit')?.at(-1)).toEqual(['JA7QSY']);
    await shown.get('svg').trigger('keydown', { key: 'ArrowRight' });
    expect((document.activeElement as SVGElement).dataset.call).toBe('EA8QSH');
    await shown.get('svg').trigger('keydown', { key: 'ArrowLeft' });
    await shown.get('svg').trigger('keydown', { key: 'ArrowLeft' });
    expect((document.activeElement as SVGElement).dataset.call).toBe('W1QSK');
    expect(shown.get('.name').text()).toBe('W1QSK');
    expect(shown.get('.facts').text()).toBe(
      'W1QSK, Somewhere: bearing 283°, 4\u2009527\u2009km, 10 spots, best SNR 20\u2009dB',
    );
    await shown.get('svg').trigger('keydown', { key: 'Enter' });
    expect(shown.emitted('choose')).toEqual([['W1QSK']]);
  });
});
