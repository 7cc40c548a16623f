import { mount, RouterLinkStub } from '@vue/test-utils';
import type { VueWrapper } from '@vue/test-utils';
import { afterEach, describe, expect, it } from 'vitest';
import { encodeQuestion } from '../../../shared/contracts/comparison-url.ts';
import { openLadder, pairQuestion } from '../../../shared/contracts/ladder-url.ts';
import type { LadderAnswer } from '../../../shared/contracts/ladder.ts';
import type { Station } from '../../../shared/contracts/station.ts';
import type { ChartTokens } from '../../../shared/pictures/chart-tokens.ts';
import { fixtureLadder } from '../../../shared/pictures/ladder-answer.fixture.ts';
import LadderAnswerView from './LadderAnswerView.vue';
import LadderSentence from './LadderSentence.vue';
import PairMatrix from './PairMatrix.vue';

const tokens = {
  'diff-a': '#f39c3d',
  'diff-b': '#5aa2f0',
  'diff-zero': '#16212c',
} as ChartTokens;
const plain = (text: string) => text.replaceAll(/\s+/g, ' ').replaceAll('\u2212', '-').trim();
const antennas = new Map(
  fixtureLadder()
    .components.flatMap((component) => component.antennas)
    .map(({ id, name, marker }) => [id, { name, marker }]),
);
antennas.set(7, { name: 'Test loop', marker: 'T' });

afterEach(() => (document.body.innerHTML = ''));

function show(given: { answer?: LadderAnswer; pair?: readonly [number, number] | null } = {}) {
  return mount(LadderAnswerView, {
    attachTo: document.body,
    props: {
      answer: given.answer ?? fixtureLadder(),
      pair: given.pair ?? null,
      antennaOf: (id: number) => antennas.get(id) ?? null,
      compareTo: (two: readonly [number, number]) => ({
        name: 'compare',
        query: encodeQuestion(pairQuestion({ ...openLadder, sectors: [1] }, 160, two)),
      }),
      tokens,
      stale: false,
    },
    global: { stubs: { RouterLink: RouterLinkStub } },
  });
}
/** What is read out: the letters in the marks and the drawing are not. */
function said(element: Element): string {
  const copy = element.cloneNode(true) as Element;
  for (const hidden of copy.querySelectorAll('[aria-hidden="true"]')) hidden.remove();
  return copy.textContent!;
}
const rung = (shown: VueWrapper, id: number) => shown.get(`.rung[data-antenna="${id}"]`);
const card = (shown: VueWrapper) => plain(shown.get('.card').text());

describe('the answer of a ladder', () => {
  it('comes first, with what it rests on and what stands against it', () => {
    const shown = show();
    expect(plain(shown.get('h2').text())).toContain('On 160 m North-east wire hears best');
    expect(plain(shown.get('.facts').text())).toMatch(/904 ?units.*140 ?stations.*14 ?nights/);
    expect(shown.get('.warnings').text()).toContain('Old loop stands on fewer than 8 station-nights');
  });

  it('names each obstacle in plain words with the cheapest cure first', () => {
    const panel = show().get('.obstacles');
    const [unlinked, without] = panel.findAll('.list > li');
    expect(plain(unlinked!.get('h3').text())).toMatch(/West wire.*Low dipole.*Nothing links them/);
    expect(unlinked!.findAll('ol li').map((cure) => cure.text())).toEqual([
      'Put Vertical on EI7QSB-1 and West wire on EI7QSB-2 for about 40 minutes.',
      'Or let one receiver alternate between Vertical and West wire, a few minutes each.',
    ]);
    expect(plain(without!.text())).toContain('Test loop has no units on 160 m.');
  });

  it('draws what nothing links on scales of their own and says why', () => {
    const titles = show()
      .findAll('.scales h3')
      .map((title) => title.text());
    expect(titles).toEqual(['Scale 1 of 2', 'Scale 2 of 2']);
    expect(plain(show().findAll('.apart')[1]!.text())).toContain(
      'A scale of its own: the data do not tell how far apart these antennas and North-east wire',
    );
  });

  it('puts an antenna that is alone on no scale, in words', () => {
    const answer = fixtureLadder();
    const lone = { ...answer.components[1]!.antennas[0]!, valueDb: null, intervalDb: null, rank: null };
    const shown = show({
      answer: {
        ...answer,
        components: [answer.components[0]!, { referenceAntennaId: null, antennas: [lone], pairs: [] }],
      },
    });
    expect(shown.findAll('.scales h3').map((title) => title.text())).toEqual(['The ladder']);
    expect(shown.find('.apart').exists()).toBe(false);
    expect(plain(shown.get('[aria-label="Antennas on no scale"]').text())).toContain(
      'West wire cannot be set beside North-east wire, Vertical, South loop and Old loop: the data do not tell how far apart they are.',
    );
  });

  it('says of nights whose units are being made that the answer follows', () => {
    const { preparation } = fixtureLadder();
    const shown = show({ answer: fixtureLadder({ preparation: { ...preparation, nightsWaiting: 2 } }) });
    expect(plain(shown.get('.waiting').text())).toContain('2 nights are being made anew');
  });
});

describe('a rung', () => {
  it('says in one sentence what the eye sees: value, interval, chance, thin evidence, out of service', () => {
    expect(plain(said(rung(show(), 4).element))).toMatch(
      /^Old loop ?out of service ?thin: 5 station-nights, 2 nights ?rank 4, ?-2\.3 dB ?-5\.9 to \+1\.3 dB ?, chance of being best ?below 1 % ?, 9 units of 5 stations in 2 nights$/,
    );
  });

  it('is dashed when its evidence is thin, and full when it speaks', () => {
    const shown = show();
    expect(rung(shown, 4).find('.interval.thin').exists()).toBe(true);
    expect(rung(shown, 1).find('.interval.thin').exists()).toBe(false);
  });

  it('lights its pairs when it is pointed at or focused: the others tell their difference to it', async () => {
    const shown = show();
    await rung(shown, 1).trigger('focus');
    expect(plain(rung(shown, 2).get('.value').text())).toContain('0.6 dB below N, not told apart');
    expect(rung(shown, 2).find('.from.hatched').exists()).toBe(true);
    expect(plain(rung(shown, 3).get('.value').text())).toContain('2.8 dB below N');
    expect(rung(shown, 3).get('.from').classes()).not.toContain('hatched');
    // Another scale has no difference to it.
    expect(plain(rung(shown, 5).get('.value').text())).toContain('0.3 to 1.3 dB');
  });

  it('moves with the arrow keys', async () => {
    const shown = show();
    (rung(shown, 1).element as HTMLElement).focus();
    await rung(shown, 1).trigger('keydown', { key: 'ArrowDown' });
    expect(document.activeElement?.getAttribute('data-antenna')).toBe('2');
  });

  it('waits for a second one and then opens their pair', async () => {
    const shown = show();
    await rung(shown, 3).trigger('click');
    expect([rung(shown, 3).attributes('aria-pressed'), shown.emitted('pair')]).toEqual(['true', undefined]);
    expect(shown.get('.hint').text()).toContain('South loop is chosen');
    await rung(shown, 1).trigger('click');
    expect(shown.emitted('pair')).toEqual([[[3, 1]]]);
  });

  it('of another scale is no second one: the choice moves to it', async () => {
    const shown = show();
    await rung(shown, 3).trigger('click');
    await rung(shown, 5).trigger('click');
    expect(shown.emitted('pair')).toBeUndefined();
    expect(shown.get('.hint').text()).toContain('West wire is chosen');
  });
});

describe('the reference', () => {
  it('can be the mean or one antenna of the scale', async () => {
    const shown = show();
    const choice = shown.get('.reference select');
    expect(choice.findAll('option').map((option) => option.text())).toEqual([
      'the mean of these antennas',
      'North-east wire',
      'Vertical',
      'South loop',
      'Old loop',
    ]);
    await choice.setValue('2');
    await choice.setValue('');
    expect(shown.emitted('reference')).toEqual([[2], [null]]);
  });

  it('stands at zero without an interval and is named on the axis', () => {
    const answer = fixtureLadder();
    const [main, apart] = answer.components;
    const against = {
      ...main!,
      referenceAntennaId: 2,
      antennas: main!.antennas.map((antenna) =>
        antenna.id === 2 ? { ...antenna, valueDb: 0, intervalDb: null } : antenna,
      ),
    };
    const shown = show({ answer: { ...answer, components: [against, apart!] } });
    expect(plain(rung(shown, 2).get('.value').text())).toMatch(/^rank 2, ?0\.0 dB ?the reference$/);
    expect(rung(shown, 2).find('.interval').exists()).toBe(false);
    expect(plain(shown.get('.ends').text())).toContain('dB against Vertical');
  });
});

describe('the card of a pair', () => {
  it('holds the first against the second until somebody chooses', () => {
    expect(card(show())).toMatch(/The two at the top.*North-east wire hears 0.6 dB better than Vertical/);
  });

  it('tells that direct and indirect evidence disagree, with both numbers and p', () => {
    const text = card(show({ pair: [3, 1] }));
    expect(text).toContain('North-east wire hears 2.8 dB better than South loop');
    expect(text).toMatch(/Direct.*\+3\.6 dB.*2\.9 to 4\.3 dB.*Indirect.*\+1\.1 dB.*0\.2 to 2\.0 dB/);
    expect(text).toContain('disagree: +2.5 dB apart, p below 0.001');
  });

  it('says where there is no direct evidence, and where nothing else links the two', () => {
    expect(card(show({ pair: [1, 4] }))).toMatch(/Direct ?their own units ?none.*never heard together/);
    expect(card(show({ pair: [3, 4] }))).toContain('A lone bridge');
  });

  it('leads to the same question on Compare, from the better one', () => {
    const link = show({ pair: [3, 1] })
      .findAllComponents(RouterLinkStub)
      .find((each) => each.text() === 'Compare these two');
    expect(link?.props('to')).toEqual({
      name: 'compare',
      query: { a: '1', b: '3', bands: '160', sectors: '1' },
    });
  });

  it('closes on request', async () => {
    const shown = show({ pair: [1, 3] });
    await shown.get('.card header button').trigger('click');
    expect(shown.emitted('pair')).toEqual([[null]]);
  });
});

describe('all pairs', () => {
  const matrix = () =>
    mount(PairMatrix, {
      props: { component: fixtureLadder().components[0]!, tokens, lit: [], open: null },
      attachTo: document.body,
    });

  it('stand in a triangle with their number; hatched where not told apart, marked where never together', () => {
    const shown = matrix();
    const rows = shown.findAll('tbody tr').map((row) => row.findAll('.cell .db').map((cell) => cell.text()));
    expect(rows).toEqual([['+0.6', '+2.8', '+4.2'], ['+2.2', '+3.6'], ['+1.4']]);
    const marks = (name: string) => shown.findAll(`.cell.${name} .db`).map((cell) => cell.text());
    expect(marks('hatched')).toEqual(['+0.6', '+4.2', '+3.6', '+1.4']);
    expect(marks('indirect')).toEqual(['+4.2', '+3.6']);
    expect(shown.findAll('.cell')[1]!.attributes('style')).toContain('background');
  });

  it('are one stop of the tab key, and the arrow keys keep to the triangle', async () => {
    const shown = matrix();
    const stops = () => shown.findAll('.cell').filter((cell) => cell.attributes('tabindex') === '0');
    await shown.findAll('.cell')[0]!.trigger('keydown', { key: 'ArrowRight' });
    expect(stops().map((cell) => cell.get('.db').text())).toEqual(['+2.8']);
    await stops()[0]!.trigger('keydown', { key: 'ArrowDown' });
    await stops()[0]!.trigger('keydown', { key: 'ArrowLeft' });
    expect(stops().map((cell) => cell.get('.db').text())).toEqual(['+2.2']);
  });

  it('open from the triangle and from the table', async () => {
    const shown = matrix();
    await shown.findAll('.cell')[1]!.trigger('click');
    expect(shown.emitted('choose')).toEqual([[[1, 3]]]);
    const page = show();
    await page.findAll('.pairs .pair')[0]!.trigger('click');
    expect(page.emitted('pair')).toEqual([[[1, 4]]]);
  });

  it('can be sorted by what they weigh, with bridges and disagreement in words', async () => {
    const shown = show().get('.pairs');
    await shown
      .findAll('.sort')
      .find((button) => button.text().startsWith('Weight'))!
      .trigger('click');
    await shown
      .findAll('.sort')
      .find((button) => button.text().startsWith('Weight'))!
      .trigger('click');
    const rows = shown.findAll('.data-table tbody tr').map((row) => plain(row.text()));
    expect(rows[0]).toMatch(/^North-east wire - South loop.*disagree/);
    expect(rows[1]).toMatch(/^South loop - Old loop.*lone bridge/);
  });
});

describe('the weight of the pairs', () => {
  it('is shown from the heaviest down, and a lone bridge is explained', () => {
    const shown = show();
    const bars = shown.findAll('.bars button').map((bar) => plain(said(bar.element)));
    expect(bars[0]).toMatch(/^North-east wire and South loop: ?31 % ?120 units$/);
    expect(bars[1]).toMatch(/^South loop and Old loop: ?24 % ?9 units, lone bridge$/);
    expect(shown.text()).toContain('nothing else links the two sides');
  });
});

describe('the receivers', () => {
  it('have their own small ladder, and one that nothing links says so', () => {
    const shown = show();
    const groups = shown.findAll('.group').map((group) => plain(group.text()));
    expect(groups[0]).toMatch(/Left ?EI7QSB-1 ?\+0\.7 dB ?0\.3 to 1\.1 dB/);
    expect(groups[1]).toMatch(/On its own.*Fixed/);
  });
});

describe('the sentence of a ladder', () => {
  const station = { sectorCount: 12, latitudeDeg: 53.5, longitudeDeg: -9 } as Station;
  const sentence = (props: object = {}) =>
    mount(LadderSentence, {
      attachTo: document.body,
      props: {
        question: { ...openLadder, fromNight: '2026-11-01', toNight: '2026-11-30' },
        names: { antenna: String, receiver: String, sectorCount: 12 },
        bandMetres: 160,
        bands: fixtureLadder().bands,
        antennas: [],
        station,
        nights: [],
        today: '2026-12-01',
        ...props,
      },
    });

  it('reads as the question', () => {
    const copy = sentence().get('.sentence').element.cloneNode(true) as Element;
    for (const hidden of copy.querySelectorAll('.visually-hidden')) hidden.remove();
    expect(plain(copy.textContent!)).toBe(
      'Rank all antennas on 160 m toward every direction during the whole night between 1 and 30 November 2026 .',
    );
  });

  it('asks about another band by one tap in its blank, also about one that has no units', async () => {
    const shown = sentence();
    await shown.get('[data-blank="band"]').trigger('click');
    const bands = shown.findAll('dialog [aria-label="Band"] button');
    expect(bands.map((band) => plain(band.text()))).toContain('40 m 0 units');
    await bands.find((band) => band.text().startsWith('80'))!.trigger('click');
    expect(shown.emitted('change')).toMatchObject([[{ bandMetres: 80, fromNight: '2026-11-01' }]]);
  });

  it('keeps the band, the reference and the margin when another blank is changed', async () => {
    const shown = sentence({
      question: { ...openLadder, bandMetres: 80, referenceAntennaId: 2, marginDb: 2 },
    });
    await shown.get('[data-blank="sectors"]').trigger('click');
    await shown.get('dialog select').setValue('1');
    const press = (word: string) =>
      shown
        .findAll('dialog button')
        .find((each) => each.text() === word)!
        .trigger('click');
    await press('Take this range');
    await press('Done');
    expect(shown.emitted('change')?.[0]).toMatchObject([
      { bandMetres: 80, referenceAntennaId: 2, marginDb: 2, hours: null },
    ]);
    expect((shown.emitted('change')![0]![0] as { sectors: number[] }).sectors.length).toBeGreaterThan(0);
  });
});
