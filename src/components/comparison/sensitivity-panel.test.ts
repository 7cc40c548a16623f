import { flushPromises, mount } from '@vue/test-utils';
import { describe, expect, it } from 'vitest';
import { fixtureAnswer } from '../../../shared/pictures/answer.fixture.ts';
import { differenceScale } from '../../../shared/pictures/difference-scale.ts';
import { fixtureSensitivity } from '../../../shared/pictures/sensitivity.fixture.ts';
import SensitivityPanel from './SensitivityPanel.vue';

const answer = fixtureAnswer();
const text = (wrapper: { text: () => string }) => wrapper.text().replace(/[^\S\u2009]+/g, ' ');

describe('the answer under other choices, on request', () => {
  const idle = { state: 'idle' as const, problem: null, reply: null, jobs: new Map(), isWaiting: false };
  function mountPanel(more: Record<string, unknown>) {
    return mount(SensitivityPanel, {
      props: {
        answer,
        scale: differenceScale(answer),
        stale: false,
        fileStem: 'x',
        ...idle,
        stopped: false,
        mayPrepare: true,
        ...more,
      },
      // The canvas is tested where its option is built; here stands what surrounds it.
      global: { stubs: { SensitivityPicture: { template: '<div class="picture"><slot /></div>' } } },
    });
  }
  const button = (wrapper: ReturnType<typeof mountPanel>, word: string) =>
    wrapper.findAll('button').find((each) => each.text() === word);

  it('asks nothing until somebody wants it; then whoever may has units made', async () => {
    const wrapper = mountPanel({});
    expect(wrapper.emitted('ask')).toBeUndefined();
    await button(wrapper, 'Work out the other choices')!.trigger('click');
    expect(wrapper.emitted('ask')).toEqual([[true]]);
  });

  it('offers what is at hand to whoever may not have units made', async () => {
    const wrapper = mountPanel({ mayPrepare: false });
    await button(wrapper, 'Show the choices at hand')!.trigger('click');
    expect(wrapper.emitted('ask')).toEqual([[false]]);
    const shown = mountPanel({ mayPrepare: false, state: 'ready', reply: fixtureSensitivity() });
    await flushPromises();
    expect(button(shown, 'Make the missing ones')).toBeUndefined();
    expect(text(shown)).toContain('An analyst or a manager can have them made.');
  });

  it('can be cancelled while it is being worked out', async () => {
    const wrapper = mountPanel({ state: 'loading' });
    await button(wrapper, 'Cancel')!.trigger('click');
    expect(wrapper.emitted('stop')).toEqual([[]]);
  });

  it('says how far the nights are over all jobs, and lets one stop waiting', async () => {
    const job = (id: number, done: number) => ({
      ...{ id, kind: 'units', state: 'running', attempts: 1, error: null },
      ...{ createdAt: '2026-11-20T10:00:00Z', finishedAt: null },
      progress: { done, total: 14, secondsLeft: 60 },
    });
    const jobs = new Map([41, 42].map((id) => [id, job(id, id - 38)]));
    const wrapper = mountPanel({ state: 'ready', reply: fixtureSensitivity(), jobs, isWaiting: true });
    await flushPromises();
    expect(text(wrapper)).toContain('2 choices wait for units that are being made: 7 of 28 nights.');
    expect(wrapper.find('progress').attributes('value')).toBe('7');
    await button(wrapper, 'Stop waiting')!.trigger('click');
    expect(wrapper.emitted('stop')).toEqual([[]]);
  });

  it('offers to look again after somebody stopped waiting, and to make what is missing', async () => {
    const wrapper = mountPanel({ state: 'ready', reply: fixtureSensitivity(), stopped: true });
    await flushPromises();
    await button(wrapper, 'Look again')!.trigger('click');
    await button(wrapper, 'Make the missing ones')!.trigger('click');
    expect(wrapper.emitted('ask')).toEqual([[false], [true]]);
  });

  it('notices that data came in since', async () => {
    const reply = fixtureSensitivity();
    const variants = reply.variants.map((each) => ({ ...each, units: 400 }));
    const wrapper = mountPanel({ state: 'ready', reply: { ...reply, variants } });
    await flushPromises();
    expect(text(wrapper)).toContain('Data came in since this was worked out.');
    const fresh = mountPanel({ state: 'ready', reply });
    await flushPromises();
    expect(text(fresh)).not.toContain('Data came in');
  });

  it('keeps what it has beside the reason why asking again failed', async () => {
    const problem = { message: 'The server could not be reached.' };
    const wrapper = mountPanel({ state: 'failed', problem, reply: fixtureSensitivity() });
    await flushPromises();
    expect(text(wrapper)).toContain('The server could not be reached.');
    expect(wrapper.find('.picture').exists()).toBe(true);
  });
});
