import { flushPromises, mount } from '@vue/test-utils';
import { describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import type { ComparisonAnswer } from '../../../shared/contracts/comparison.ts';
import { fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';
import { differenceScale } from '../../../shared/pictures/difference-scale.ts';
import CellViewChoice from './CellViewChoice.vue';
import CensoredNote from './CensoredNote.vue';
import EvidenceContents from './EvidenceContents.vue';
import { evidenceParts } from './evidence-contents.ts';
import HeardOnlyPanel from './HeardOnlyPanel.vue';
import OtherViews from './OtherViews.vue';
import PeekProofPicture from './PeekProofPicture.vue';
import PlanningPanel from './PlanningPanel.vue';
import PoolingNote from './PoolingNote.vue';
import StationTable from './StationTable.vue';
import VerdictScale from './VerdictScale.vue';

const names = {
  antenna: (id: number) => `antenna ${id}`,
  receiver: (id: number) => `Receiver ${id}`,
  sectorCount: 12,
};
/** Canvas pictures are tested where their options are built; here stands what surrounds them. */
const stubs = {
  CellPicture: {
    props: ['title', 'columns', 'picture'],
    template: '<div><slot name="above" /><slot /></div>',
  },
  ElTooltip: { props: ['content'], template: '<span :title="content"><slot /></span>' },
};
const text = (wrapper: { text: () => string }) => wrapper.text().replace(/[^\S\u2009]+/g, ' ');
const drawing = (answer: ComparisonAnswer) => ({
  ...{ answer, scale: differenceScale(answer), stale: false, lit: null, fileStem: 'x' },
});

describe('the censored estimate beside the plain one', () => {
  const scaleProps = (answer: ComparisonAnswer) => ({ answer, scale: differenceScale(answer), litDb: null });

  it('stands on the same scale, each with its number', () => {
    const wrapper = mount(VerdictScale, { props: scaleProps(fixtureAnswer()) });
    const left = (row: string) =>
      Number.parseFloat(wrapper.find<HTMLElement>(`.${row} .dot`).element.style.left);
    expect(left('plain')).toBeCloseTo(50 + (1.8 / 24) * 100, 6);
    expect(left('censored')).toBeCloseTo(50 + (2.9 / 24) * 100, 6);
    expect(wrapper.findAll('.name').map((name) => text(name))).toEqual([
      'Stations heard on both+1.8\u2009dB (1.1 to 2.5\u2009dB)',
      'With stations that one antenna alone heard+2.9\u2009dB (2.1 to 3.7\u2009dB)',
    ]);
  });

  it('ends in an arrowhead where its interval runs on beyond the axis', () => {
    const censored = { ...fixtureAnswer().censored!, intervalDb: [-50, 60] as [number, number] };
    const wrapper = mount(VerdictScale, { props: scaleProps(fixtureAnswer({ censored })) });
    expect(wrapper.find('.censored .interval').classes()).toEqual(
      expect.arrayContaining(['runs-on-low', 'runs-on-high']),
    );
    expect(wrapper.find('.plain .interval').classes()).not.toContain('runs-on-low');
  });

  it('is said aloud only where it changes the answer', () => {
    const loud = mount(CensoredNote, { props: { answer: fixtureAnswer(), names } });
    expect(text(loud)).toContain('The two disagree. Counting those 160');
    expect(text(loud)).toContain('3.0\u2009dB on Receiver 1 at 160\u2009m');
    const censored = { ...fixtureAnswer().censored!, disagrees: false };
    const quiet = mount(CensoredNote, { props: { answer: fixtureAnswer({ censored }), names } });
    expect(text(quiet)).not.toContain('disagree.');
    expect(quiet.find('.disagrees').exists()).toBe(false);
  });

  it('says why it is missing', () => {
    const views = { censored: 'Every station was heard on both.', peekProof: null, planning: null };
    const wrapper = mount(CensoredNote, {
      props: { answer: fixtureAnswer({ censored: null, views }), names },
    });
    expect(text(wrapper)).toContain('Every station was heard on both.');
  });
});

describe('the contents of the evidence', () => {
  const says = (overrides: Partial<ComparisonAnswer>, id: string) =>
    evidenceParts(fixtureAnswer(overrides)).find((part) => part.id === id)!.says;
  const withInterval = (intervalDb: [number, number] | null) => {
    const peekProof = fixtureAnswer().peekProof!;
    return { peekProof: { ...peekProof, points: [{ ...peekProof.points[5]!, intervalDb }] } };
  };

  it('answers whether one may stop in a word', () => {
    expect(says(withInterval([0.4, 2.2]), 'stop')).toBe('yes: 0.4 to 2.2\u2009dB');
    expect(says(withInterval([-0.4, 2.2]), 'stop')).toBe('not yet: zero is still in');
    expect(says(withInterval([-0.4, 0.6]), 'stop')).toBe('yes: no practical difference');
    expect(says(withInterval(null), 'stop')).toBe('too early to say');
    expect(says({ peekProof: null }, 'stop')).toBe('too early to say');
  });

  it('counts what there is to note', () => {
    expect(says({}, 'fair')).toBe('1 note');
    expect(says({ fairness: { ...fixtureAnswer().fairness, warnings: [] } }, 'fair')).toBe('nothing to note');
  });

  it('leads to each part without losing the question in the address', async () => {
    const router = createRouter({
      history: createMemoryHistory(),
      routes: [{ path: '/compare', component: { template: '<div />' } }],
    });
    await router.push('/compare?a=1&b=2');
    const wrapper = mount(EvidenceContents, {
      props: { parts: evidenceParts(fixtureAnswer()) },
      global: { plugins: [router] },
    });
    await wrapper.findAll('a')[2]!.trigger('click');
    await flushPromises();
    expect(wrapper.emitted('chosen')).toEqual([['stop']]);
    expect(router.currentRoute.value.fullPath).toBe('/compare?a=1&b=2#stop');
  });
});

describe('raw and pooled cells', () => {
  it('are chosen between two buttons, and hatched cells stay hatched', async () => {
    const wrapper = mount(CellViewChoice, { props: { view: 'raw' } });
    await wrapper.findAll('button')[1]!.trigger('click');
    expect(wrapper.emitted('change')).toEqual([['pooled']]);
    await wrapper.setProps({ view: 'pooled' });
    expect(wrapper.find('[aria-pressed="true"]').text()).toBe('Pooled');
    expect(text(wrapper)).toContain('Hatched cells stay hatched');
  });

  it('come with the sentence, the exact numbers behind it, or the news that there is nothing to pool', () => {
    const pooling = fixtureAnswer().pooling.sectors;
    const wrapper = mount(PoolingNote, { props: { pooling, view: 'raw' }, global: { stubs } });
    expect(text(wrapper)).toContain('The directions truly differ');
    expect(wrapper.find('[title]').attributes('title')).toContain('tau 2.60\u2009dB');
    const none = mount(PoolingNote, { props: { pooling: null, view: 'pooled' }, global: { stubs } });
    expect(text(none)).toContain('Nothing to pool here');
    expect(text(mount(PoolingNote, { props: { pooling: null, view: 'raw' }, global: { stubs } }))).toBe('');
  });
});

describe('stations heard on one antenna only', () => {
  it('are counted in words, with both p values', () => {
    const wrapper = mount(HeardOnlyPanel, { props: drawing(fixtureAnswer()), global: { stubs } });
    expect(text(wrapper)).toContain('41North-east wire alone22Vertical alone');
    expect(text(wrapper)).toContain('1.9 times as often the only one');
    expect(text(wrapper)).toContain('Exact p 0.022, mid-p 0.018.');
  });

  it('leave their picture out when no direction has any', () => {
    const fairness = { ...fixtureAnswer().fairness, heardOnly: null };
    const answer = fixtureAnswer({ fairness, heardOnlySectors: [] });
    const wrapper = mount(HeardOnlyPanel, { props: drawing(answer), global: { stubs } });
    expect(text(wrapper)).toContain('No block in which both antennas were listened to alike.');
    expect(wrapper.findAll('h3')).toHaveLength(1);
  });

  it('can be put in order by how often one antenna alone heard them', async () => {
    const [first, ...others] = fixtureAnswer().stations;
    const stations = [first!, { ...others[0]!, onlyA: 9, onlyB: 3 }];
    const wrapper = mount(StationTable, {
      props: { answer: fixtureAnswer({ stations }), lit: null, fileStem: 'x' },
    });
    const calls = () => wrapper.findAll('tbody th').map((each) => each.text());
    expect(calls()).toEqual(['EA8QSH', 'W1QTB']);
    const button = wrapper.findAll('button').find((each) => each.text() === 'Most heard on one only')!;
    await button.trigger('click');
    expect(calls()).toEqual(['W1QTB', 'EA8QSH']);
    expect(button.attributes('aria-pressed')).toBe('true');
    expect(wrapper.findAll('tbody tr')[0]!.text()).toMatch(/12\s*75\u2009%$/);
  });
});

describe('whether one may stop', () => {
  it('begins with the sentence and says how the two intervals relate', () => {
    const wrapper = mount(PeekProofPicture, { props: drawing(fixtureAnswer()), global: { stubs } });
    expect(text(wrapper.find('.says'))).toContain('however often you look');
    expect(text(wrapper)).toContain('It holds if you look once, at the end.');
  });

  it('says why there is no line yet', () => {
    const views = { censored: null, peekProof: 'Too early.', planning: null };
    const wrapper = mount(PeekProofPicture, {
      props: drawing(fixtureAnswer({ peekProof: null, views })),
      global: { stubs },
    });
    expect(text(wrapper)).toContain('Too early.');
  });

  it('advises how many more nights the next precision wants', () => {
    const wrapper = mount(PlanningPanel, { props: { answer: fixtureAnswer() }, global: { stubs } });
    expect(text(wrapper.find('.says'))).toBe(
      'To know the difference to within \u00b10.5\u2009dB, go on for about 13 more nights like those so far.',
    );
    const rows = wrapper.findAll('tbody tr').map((row) => text(row));
    expect(rows.slice(0, 5)).toEqual([
      '\u00b12.0\u2009dB28reached',
      '\u00b11.0\u2009dB103reached',
      '\u00b10.7\u2009dB212now',
      '\u00b10.5\u2009dB402about 13 more nights',
      '\u00b10.25\u2009dB1\u2009601about 92 more nights',
    ]);
  });

  it('says so when every precision is reached, and when nothing can be planned', () => {
    const planning = fixtureAnswer().planning!;
    const precision = planning.precision.map((row) => ({ ...row, moreNights: 0 }));
    const reached = mount(PlanningPanel, {
      props: { answer: fixtureAnswer({ planning: { ...planning, precision } }) },
      global: { stubs },
    });
    expect(text(reached.find('.says'))).toContain('Every precision below is reached');
    const views = { censored: null, peekProof: null, planning: 'No standard error.' };
    const none = mount(PlanningPanel, {
      props: { answer: fixtureAnswer({ planning: null, views }) },
      global: { stubs },
    });
    expect(text(none)).toContain('No standard error.');
  });
});

describe('the same by other tests', () => {
  it('gives each plain word its exact term, and says so when there is nothing to estimate', () => {
    const wrapper = mount(OtherViews, { props: { answer: fixtureAnswer() }, global: { stubs } });
    expect(text(wrapper)).toContain('Cost of repeats');
    expect(wrapper.findAll('[title]').map((each) => each.attributes('title'))).toContain(
      'Wilcoxon signed-rank test, two-sided p',
    );
    const none = { estimate: null, rank: null, equivalence: null };
    const empty = mount(OtherViews, { props: { answer: fixtureAnswer(none) }, global: { stubs } });
    expect(text(empty)).toContain('Nothing to estimate.');
  });
});
