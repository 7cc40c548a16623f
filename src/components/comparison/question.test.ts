import { mount } from '@vue/test-utils';
import { describe, expect, it } from 'vitest';
import { openQuestion } from '../../../shared/contracts/comparison-url.ts';
import type { QuestionDraft } from '../../../shared/contracts/comparison-url.ts';
import type { Antenna } from '../../../shared/contracts/antenna.ts';
import type { Station } from '../../../shared/contracts/station.ts';
import { fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';
import { differenceScale } from '../../../shared/pictures/difference-scale.ts';
import HoursEditor from './HoursEditor.vue';
import NightsEditor from './NightsEditor.vue';
import QuestionRefinements from './QuestionRefinements.vue';
import QuestionSentence from './QuestionSentence.vue';
import SectorEditor from './SectorEditor.vue';
import VerdictPanel from './VerdictPanel.vue';
import VerdictScale from './VerdictScale.vue';

const antenna = (id: number, name: string, marker: string, inServiceTo: string | null = null): Antenna => ({
  id,
  name,
  marker,
  kind: 'long wire',
  headingDeg: 45,
  beamwidthDeg: null,
  lengthM: null,
  heightM: null,
  notes: '',
  inServiceFrom: null,
  inServiceTo,
});
const antennas = [
  antenna(1, 'North-east wire', 'N'),
  antenna(2, 'Vertical', 'V'),
  antenna(3, 'Old loop', 'O', '2026-01-01'),
];
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
  isDemo: true,
};
const names = {
  antenna: (id: number) => antennas.find((each) => each.id === id)?.name ?? `antenna ${id}`,
  receiver: (id: number) => `Receiver ${id}`,
  sectorCount: 12,
};
const draft: QuestionDraft = { ...openQuestion, antennaA: 1, antennaB: 2, bandsMetres: [160] };

function mountSentence() {
  return mount(QuestionSentence, {
    props: { draft, names, antennas, station, nights: [], today: '2026-11-20', lit: [] },
    attachTo: document.body,
  });
}
const button = (wrapper: ReturnType<typeof mountSentence>, word: string) =>
  wrapper.findAll('dialog button').find((each) => each.text() === word)!;

describe('the sentence with blanks', () => {
  it('reads as the question and names each blank for whoever cannot see it', () => {
    const wrapper = mountSentence();
    expect(wrapper.find('.sentence').text().replace(/\s+/g, ' ')).toContain('hear better than');
    const labels = wrapper.findAll('[data-blank]').map((each) => {
      // What is hidden from screen readers (the letter in the antenna's mark) is no part of the name.
      const copy = each.element.cloneNode(true) as Element;
      for (const hidden of copy.querySelectorAll('[aria-hidden="true"]')) hidden.remove();
      return copy.textContent!.replace(/\s+/g, (space) => (space === '\u2009' ? space : ' ')).trim();
    });
    expect(labels).toEqual([
      'Which antenna hears better: North-east wire',
      'Than which antenna: Vertical',
      'On which bands: 160\u2009m',
      'Toward which directions: every direction',
      'At which hours: any hour',
      'In which nights: all nights',
    ]);
    wrapper.unmount();
  });

  it('changes nothing until the editor is done', async () => {
    const wrapper = mountSentence();
    await wrapper.find('[data-blank="bands"]').trigger('click');
    await button(wrapper, '80\u2009m').trigger('click');
    expect(wrapper.emitted('change')).toBeUndefined();
    await button(wrapper, 'Done').trigger('click');
    expect(wrapper.emitted('change')).toEqual([[{ ...draft, bandsMetres: [160, 80] }]]);
    wrapper.unmount();
  });

  it('takes a cancelled change back', async () => {
    const wrapper = mountSentence();
    await wrapper.find('[data-blank="bands"]').trigger('click');
    await button(wrapper, '80\u2009m').trigger('click');
    await button(wrapper, 'Cancel').trigger('click');
    await wrapper.find('[data-blank="bands"]').trigger('click');
    await button(wrapper, 'Done').trigger('click');
    expect(wrapper.emitted('change')).toBeUndefined();
    wrapper.unmount();
  });

  it('swaps the two when the other antenna is picked', async () => {
    const wrapper = mountSentence();
    await wrapper.find('[data-blank="antennaA"]').trigger('click');
    const vertical = wrapper
      .findAll('dialog .choice')
      .find((each) => each.find('strong').text() === 'Vertical')!;
    expect(vertical.text()).toContain('swaps the two');
    await vertical.trigger('click');
    expect(wrapper.emitted('change')).toEqual([[{ ...draft, antennaA: 2, antennaB: 1 }]]);
    wrapper.unmount();
  });

  it('keeps antennas that were taken down apart, yet lets them be asked about', async () => {
    const wrapper = mountSentence();
    await wrapper.find('[data-blank="antennaB"]').trigger('click');
    expect(wrapper.find('dialog [aria-label="Taken down"]').text()).toContain('Old loop');
    wrapper.unmount();
  });

  it('lights up the blanks that the cell under the pointer would narrow', async () => {
    const wrapper = mountSentence();
    await wrapper.setProps({ lit: ['sectors'] });
    expect(wrapper.findAll('.blank.lit').map((each) => each.attributes('data-blank'))).toEqual(['sectors']);
    wrapper.unmount();
  });
});

describe('the compass editor', () => {
  it('is worked by arrow keys and space', async () => {
    const wrapper = mount(SectorEditor, {
      props: {
        modelValue: [0],
        sectorCount: 12,
        headings: [],
        'onUpdate:modelValue': (sectors: number[]) => wrapper.setProps({ modelValue: sectors }),
      },
      attachTo: document.body,
    });
    const compass = wrapper.find('svg');
    await compass.trigger('keydown', { key: 'ArrowRight' });
    await compass.trigger('keydown', { key: ' ' });
    expect(wrapper.props('modelValue')).toEqual([0, 1]);
    await compass.trigger('keydown', { key: 'ArrowLeft' });
    await compass.trigger('keydown', { key: 'ArrowLeft' });
    await compass.trigger('keydown', { key: 'Enter' });
    expect(wrapper.props('modelValue')).toEqual([0, 1, 11]);
    expect(wrapper.text()).toContain('Toward 330-60 degrees.');
    expect(wrapper.findAll('[role="checkbox"][aria-checked="true"]')).toHaveLength(3);
    expect(wrapper.findAll('[role="checkbox"][tabindex="0"]')).toHaveLength(1);
    wrapper.unmount();
  });

  it('takes a range from its two plain selects', async () => {
    const wrapper = mount(SectorEditor, { props: { modelValue: [], sectorCount: 12, headings: [] } });
    const [from, to] = wrapper.findAll('select');
    await from!.setValue('11');
    await to!.setValue('2');
    await wrapper
      .findAll('button')
      .find((each) => each.text() === 'Take this range')!
      .trigger('click');
    expect(wrapper.emitted('update:modelValue')).toEqual([[[0, 1, 11]]]);
  });
});

describe('the hours editor', () => {
  function mountHours(modelValue: QuestionDraft['hours']) {
    const wrapper = mount(HoursEditor, {
      props: {
        modelValue,
        night: '2026-11-15',
        latitudeDeg: 53.5,
        longitudeDeg: -9,
        'onUpdate:modelValue': (hours: QuestionDraft['hours']) => wrapper.setProps({ modelValue: hours }),
      },
    });
    return wrapper;
  }

  it('moves a handle by half an hour with the arrow keys, counted as the handle counts', async () => {
    const wrapper = mountHours({
      from: { reference: 'sunset', hours: 2 },
      to: { reference: 'sunrise', hours: 0 },
    });
    const [first, last] = wrapper.findAll('[role="slider"]');
    expect(first!.attributes('aria-valuetext')).toBe('2\u2009h after sunset');
    await first!.trigger('keydown', { key: 'ArrowRight' });
    await last!.trigger('keydown', { key: 'ArrowLeft' });
    expect(wrapper.props('modelValue')).toEqual({
      from: { reference: 'sunset', hours: 2.5 },
      to: { reference: 'sunrise', hours: -0.5 },
    });
    expect(wrapper.text()).toContain('From 2\u2009h 30\u2009min after sunset to 30\u2009min before sunrise.');
  });

  it('turns to the clock where it stands, and takes typed hours', async () => {
    const wrapper = mountHours({
      from: { reference: 'sunset', hours: 0 },
      to: { reference: 'sunrise', hours: 0 },
    });
    await wrapper.find('select[aria-label="First hour counts from"]').setValue('utc');
    // Astronomy Engine has the sun set at 16:38:59Z here.
    expect(wrapper.props('modelValue')!.from).toEqual({ reference: 'utc', hours: 16.75 });
    await wrapper.find('input[aria-label="Last hour, in hours"]').setValue('-1.5');
    expect(wrapper.props('modelValue')!.to).toEqual({ reference: 'sunrise', hours: -1.5 });
  });

  it('goes back to any hour', async () => {
    const wrapper = mountHours({ from: { reference: 'utc', hours: 20 }, to: { reference: 'utc', hours: 4 } });
    await wrapper
      .findAll('button')
      .find((each) => each.text() === 'Any hour')!
      .trigger('click');
    expect(wrapper.props('modelValue')).toBeNull();
  });
});

describe('the nights editor', () => {
  it('marks nights with spots and takes the last ones that have any', async () => {
    const nights = Array.from({ length: 20 }, (_, index) => ({
      night: `2026-11-${String(index + 1).padStart(2, '0')}`,
      spots: index === 18 ? 0 : 50,
    }));
    const wrapper = mount(NightsEditor, {
      props: { modelValue: { from: null, to: null }, nights, today: '2026-11-20' },
    });
    expect(wrapper.findAll('.dot.full')).toHaveLength(19);
    expect(wrapper.find('[aria-label="19 November 2026, no spots"]').exists()).toBe(true);
    await wrapper
      .findAll('button')
      .find((each) => each.text() === 'Last 7 with spots')!
      .trigger('click');
    expect(wrapper.emitted('update:modelValue')).toEqual([[{ from: '2026-11-13', to: '2026-11-20' }]]);
  });
});

describe('the second line', () => {
  function mountRefinements(mayPrepare: boolean) {
    return mount(QuestionRefinements, {
      props: {
        draft,
        names,
        receivers: [{ id: 7, callSign: 'EI7QSB', label: 'Receiver 7', notes: '', retiredAt: null }],
        station,
        mayPrepare,
      },
    });
  }

  it('asks with other rules, a margin and a receiver', async () => {
    const wrapper = mountRefinements(true);
    await wrapper.find('input[type="checkbox"][value="7"]').setValue(true);
    await wrapper.findAll('input[type="radio"]')[1]!.setValue(true);
    await wrapper.find('select').setValue('30');
    await wrapper.find('input[step="0.1"][max="20"]').setValue('2');
    await wrapper.find('form').trigger('submit');
    expect(wrapper.emitted('change')).toEqual([
      [
        {
          ...draft,
          receivers: [7],
          rules: { blockMinutes: 30, windowSeconds: 30, freqToleranceKhz: 0.3, guardSeconds: 20 },
          marginDb: 2,
        },
      ],
    ]);
  });

  it('says what is wrong beside the field and asks nothing', async () => {
    const wrapper = mountRefinements(true);
    await wrapper.find('input[step="0.1"][max="20"]').setValue('99');
    expect(wrapper.text()).toContain('Give decibels from 0.1 to 20.');
    await wrapper.find('form').trigger('submit');
    expect(wrapper.emitted('change')).toBeUndefined();
  });

  it('asks with stations and nights both taken as independent', async () => {
    const wrapper = mountRefinements(true);
    const choice = wrapper
      .findAll('select')
      .find((each) => each.findAll('option').some((option) => option.element.value === 'two-way'))!;
    await choice.setValue('two-way');
    await wrapper.find('form').trigger('submit');
    expect(wrapper.emitted('change')).toEqual([[{ ...draft, clustering: 'two-way' }]]);
  });

  it('keeps other rules from whoever may not have units made', () => {
    const radios = mountRefinements(false).findAll<HTMLInputElement>('input[type="radio"]');
    expect(radios[1]!.element.disabled).toBe(true);
    expect(mountRefinements(true).findAll<HTMLInputElement>('input[type="radio"]')[1]!.element.disabled).toBe(
      false,
    );
  });
});

describe('the verdict', () => {
  const scaleOf = (answer = fixtureAnswer()) => ({ answer, scale: differenceScale(answer), litDb: null });
  const left = (element: Element) => Number.parseFloat((element as HTMLElement).style.left);
  const width = (element: Element) => Number.parseFloat((element as HTMLElement).style.width);

  it('puts the dot right of zero when A hears better and left of it when B does', () => {
    const forA = mount(VerdictScale, { props: scaleOf() });
    expect(left(forA.find('.zero').element)).toBe(50);
    expect(left(forA.find('.dot').element)).toBeCloseTo(50 + (1.8 / 24) * 100, 6);
    const estimate = {
      ...fixtureAnswer().estimate!,
      estimateDb: -1.8,
      interval95Db: [-2.5, -1.1] as [number, number],
    };
    const forB = mount(VerdictScale, { props: scaleOf(fixtureAnswer({ estimate })) });
    expect(left(forB.find('.dot').element)).toBeCloseTo(50 - (1.8 / 24) * 100, 6);
    expect(forB.find('.interval').classes()).toContain('b');
  });

  it('shades the margin on both sides and draws the interval to scale', () => {
    const wrapper = mount(VerdictScale, { props: scaleOf() });
    expect(left(wrapper.find('.margin').element)).toBeCloseTo(50 - 100 / 24, 6);
    expect(width(wrapper.find('.margin').element)).toBeCloseTo(200 / 24, 6);
    expect(width(wrapper.find('.interval').element)).toBeCloseTo((1.4 / 24) * 100, 6);
  });

  it('says all of it in words', () => {
    expect(mount(VerdictScale, { props: scaleOf() }).find('[role="img"]').attributes('aria-label')).toBe(
      'Estimate +1.8\u2009dB, 95\u2009% interval 1.1 to 2.5\u2009dB; the margin is 1.0\u2009dB either way. With stations that one antenna alone heard: +2.9\u2009dB, 95\u2009% interval 2.1 to 3.7\u2009dB. Positive means that North-east wire hears better.',
    );
  });

  it('shows the cures and no scale when the antennas cannot be separated', () => {
    const answer = fixtureAnswer({
      estimate: null,
      verdict: {
        code: 'cannot be separated',
        sentence: 'North-east wire and Receiver 1 cannot be separated.',
        cures: ['Swap the two antennas for about 40 minutes.'],
      },
    });
    const wrapper = mount(VerdictPanel, { props: { ...scaleOf(answer), names } });
    expect(wrapper.find('.verdict-scale').exists()).toBe(false);
    expect(wrapper.find('.cures').text()).toContain('Swap the two antennas for about 40 minutes.');
  });

  it('says that nights are being made anew after a change of the switch log', () => {
    const preparation = { ...fixtureAnswer().preparation, nightsWaiting: 3 };
    const wrapper = mount(VerdictPanel, {
      props: { ...scaleOf(fixtureAnswer({ preparation })), names },
    });
    expect(wrapper.find('.waiting').text()).toContain(
      'Following a change of the switch log: 3 nights are being made anew.',
    );
    expect(wrapper.find('.facts').text()).toMatch(/412\s*units\s*96\s*stations\s*14\s*nights/);
  });
});
