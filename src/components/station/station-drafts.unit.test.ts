import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { addAntenna, updateAntenna } from '../../../shared/contracts/antenna.ts';
import { updateStation } from '../../../shared/contracts/station.ts';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Station } from '../../../shared/contracts/station.ts';
import { compassWedge, tip } from './antenna-compass.ts';
import { coordinate } from './coordinate.ts';
import { feedWords } from './feed-words.ts';
import { serviceWords } from './service-words.ts';
import {
  antennaBody,
  antennaDraft,
  changesOf,
  feedBody,
  feedDraft,
  lengthRefusal,
  madeAnew,
  numberFrom,
  stationBody,
  stationDraft,
} from './station-drafts.ts';

const wire: Antenna = {
  id: 3,
  name: 'North-east wire',
  marker: 'N',
  kind: 'long wire',
  headingDeg: 45,
  beamwidthDeg: null,
  lengthM: 176.4,
  heightM: 2.5,
  notes: 'far end 450 ohm',
  inServiceFrom: '2024-10-01',
  inServiceTo: null,
};
const station: Station = {
  id: 1,
  name: 'Corrib Low Band Group',
  callSign: 'EI7QSB',
  locator: 'IO53',
  latitudeDeg: 53.5,
  longitudeDeg: -9,
  timeZone: 'Europe/Dublin',
  ituRegion: 1,
  guardSeconds: 20,
  blockMinutes: 15,
  windowSeconds: 30,
  freqToleranceKhz: 0.3,
  marginDb: 1,
  sectorCount: 12,
  isDemo: false,
};

describe('what is typed into a form', () => {
  it('reads decimal commas and points, and knows nothing from nonsense', () => {
    expect([numberFrom(' 2,5 '), numberFrom('2.5'), numberFrom(''), numberFrom('\u22123')]).toEqual([
      2.5,
      2.5,
      null,
      -3,
    ]);
    expect(numberFrom('about ten')).toBeNaN();
  });

  it('sends nothing that was not touched, in either unit', () => {
    for (const unit of ['m', 'ft'] as const) {
      const stored = antennaBody(antennaDraft(wire, unit), unit);
      expect(changesOf(antennaBody(antennaDraft(wire, unit), unit), stored)).toEqual({});
      const draft = { ...antennaDraft(wire, unit), notes: 'new notes' };
      expect(changesOf(antennaBody(draft, unit), stored)).toEqual({ notes: 'new notes' });
    }
  });

  it('names the limit of a refused length in feet to who reads feet, and takes the limit that it names', () => {
    // 2000 m / 0.3048 = 6561.68 ft; 300 m / 0.3048 = 984.25 ft.
    for (const [key, draftKey, feet] of [
      ['lengthM', 'length', 6561],
      ['heightM', 'height', 984],
    ] as const) {
      const typed = (text: string) =>
        addAntenna.body.safeParse(antennaBody({ ...antennaDraft(wire, 'ft'), [draftKey]: text }, 'ft'));
      const [issue] = typed(String(feet + 1)).error!.issues;
      expect(issue!.path).toEqual([key]);
      expect(lengthRefusal(issue!.message, 'ft')).toBe(`Give at most ${feet} feet.`);
      expect(lengthRefusal(issue!.message, 'm')).toMatch(/^Give at most \d+ metres\.$/);
      expect(typed(String(feet)).success).toBe(true);
    }
    expect(lengthRefusal('Give more than 0.', 'ft')).toBe('Give more than 0.');
    expect(lengthRefusal(undefined, 'ft')).toBe(undefined);
  });

  it('turns feet into metres by the international foot and gives the same feet back', () => {
    const draft = { ...antennaDraft(null, 'ft'), name: 'Wire', marker: 'w', length: '580' };
    // 580 ft x 0.3048 m
    expect(antennaBody(draft, 'ft')).toMatchObject({ lengthM: 176.784, heightM: null, marker: 'W' });
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 6000 }), (feet) => {
        const lengthM = antennaBody({ ...draft, length: String(feet) }, 'ft').lengthM!;
        expect(antennaDraft({ ...wire, lengthM }, 'ft').length).toBe(String(feet));
      }),
    );
  });

  it('is refused by the contract with a sentence where a number is none', () => {
    const draft = { ...antennaDraft(wire, 'm'), heading: 'north', length: 'long' };
    const checked = addAntenna.body.safeParse(antennaBody(draft, 'm'));
    expect(checked.error?.issues.map((issue) => [issue.path.join('.'), issue.message])).toEqual([
      ['headingDeg', 'Give degrees clockwise from true north.'],
      ['lengthM', 'Give a length.'],
    ]);
  });

  it('empties a field that was cleared', () => {
    const stored = antennaBody(antennaDraft(wire, 'm'), 'm');
    const cleared = changesOf(
      antennaBody({ ...antennaDraft(wire, 'm'), heading: '', from: '' }, 'm'),
      stored,
    );
    expect(cleared).toEqual({ headingDeg: null, inServiceFrom: null });
    expect(updateAntenna.body.parse(cleared)).toEqual(cleared);
  });

  it('makes a feed of a port as text, and starts with the call sign of the station', () => {
    const draft = { ...feedDraft(null, 'EI7QSB'), name: 'Shed', host: ' feed.example.org ', port: '7300' };
    expect(feedBody(draft)).toEqual({
      name: 'Shed',
      host: 'feed.example.org',
      port: 7300,
      loginCall: 'EI7QSB',
      enabled: true,
    });
  });
});

describe('what a change of the station makes anew', () => {
  const changes = (of: Partial<ReturnType<typeof stationDraft>>) =>
    changesOf(stationBody({ ...stationDraft(station), ...of }), stationBody(stationDraft(station)));

  it('is nothing when nothing or only a name changes', () => {
    expect(changes({})).toEqual({});
    expect(updateStation.body.safeParse(stationBody(stationDraft(station))).success).toBe(true);
    expect(madeAnew(changes({ name: 'Corrib' }))).toEqual([]);
  });

  it('is every unit for each of the four pairing rules, and none for the margin', () => {
    for (const rule of [
      { guardSeconds: '30' },
      { blockMinutes: '30' },
      { windowSeconds: '60' },
      { freqToleranceKhz: '0,5' },
    ]) {
      expect(madeAnew(changes(rule)), JSON.stringify(rule)).toEqual([
        expect.stringMatching(/^The units of every night are made anew/),
      ]);
    }
    expect(madeAnew(changes({ marginDb: '2' })).join()).toMatch(/nothing is computed anew/);
  });

  it('is bearings, nights and units when the station moves', () => {
    const said = madeAnew(changes({ locator: 'JN48' })).join(' ');
    expect(said).toMatch(/bearing/);
    expect(said).toMatch(/Time zone/);
    expect(said).toMatch(/units of every night/);
    expect(madeAnew(changes({ locator: 'JN48', timeZone: 'UTC' })).join(' ')).not.toMatch(/Time zone/);
  });
});

describe('words about what stands at the station', () => {
  it('say whether an antenna is in service on a day, both ends included', () => {
    const of = (inServiceFrom: string | null, inServiceTo: string | null) => ({ inServiceFrom, inServiceTo });
    expect(serviceWords(of(null, null), '2026-11-30')).toEqual({ inService: true, words: 'In service' });
    expect(serviceWords(of('2026-11-01', '2026-11-30'), '2026-11-30')).toEqual({
      inService: true,
      words: 'In service since 2026-11-01, last day 2026-11-30',
    });
    expect(serviceWords(of('2026-11-01', '2026-11-30'), '2026-12-01')).toEqual({
      inService: false,
      words: 'Out of service: 2026-11-01 to 2026-11-30',
    });
    expect(serviceWords(of('2026-12-24', null), '2026-11-30').words).toBe('In service from 2026-12-24 on');
  });

  it('tell the states of a feed apart by shape and word', () => {
    const nowMs = Date.parse('2026-11-30T18:05:00Z');
    const health = {
      state: 'receiving' as const,
      connectedAt: null,
      lastLineAt: '2026-11-30T18:04:00Z',
      linesLastMinute: 1,
      linesTotal: 1,
      storedTotal: 1,
      doubledTotal: 0,
      refusedTotal: 0,
      otherReceiverTotal: 0,
      lastError: 'The server hung up.',
      updatedAt: '2026-11-30T18:05:00Z',
    };
    const states = ['receiving', 'silent', 'lost', 'connecting', 'off'] as const;
    const words = states.map((state) => feedWords({ enabled: true, health: { ...health, state } }, nowMs));
    expect(words.map(({ word }) => word)).toEqual([...states]);
    expect(new Set(words.map(({ shape }) => shape)).size).toBe(5);
    expect(words[0]!.sentence).toBe('Last line 1\u2009min ago.');
    expect(words[2]!.sentence).toContain('The server hung up.');
    expect(feedWords({ enabled: false, health }, nowMs).word).toBe('off');
    expect(feedWords({ enabled: true, health: null }, nowMs).word).toBe('connecting');
  });

  it('draw headings clockwise from north', () => {
    expect([tip(0, 10), tip(90, 10), tip(180, 10), tip(270, 10)]).toEqual([
      '0.00 -10.00',
      '10.00 -0.00',
      '0.00 10.00',
      '-10.00 0.00',
    ]);
    expect(compassWedge(45, 90, 10)).toBe('M0 0L0.00 -10.00A10 10 0 0 1 10.00 -0.00Z');
    expect(compassWedge(0, 270, 10)).toMatch(/A10 10 0 1 1/);
    expect(compassWedge(0, 360, 10)).toMatch(/^M0 -10A.*Z$/);
  });

  it('write coordinates with their side of the world', () => {
    expect([coordinate(53.5, 'N', 'S'), coordinate(-9, 'E', 'W')]).toEqual(['53.500° N', '9.000° W']);
  });
});
