import { effectScope, ref } from 'vue';
import { describe, expect, it } from 'vitest';
import { z } from 'zod';
import { ApiProblem } from '../api/problem.ts';
import { useForm } from './useForm.ts';
import { useLoad } from './useLoad.ts';
import { startTheme, useTheme } from './useTheme.ts';

/** Questions that the test answers by hand, in any order. */
function questions() {
  const asked: { signal: AbortSignal; answer: (text: string) => void; fail: (error: Error) => void }[] = [];
  const scope = effectScope();
  const load = scope.run(() =>
    useLoad<string>((signal) => new Promise((answer, fail) => asked.push({ signal, answer, fail }))),
  )!;
  return { asked, scope, load };
}

describe('useLoad', () => {
  it('goes from idle through loading to ready', async () => {
    const { asked, load } = questions();
    expect(load.state.value).toBe('idle');
    const run = load.run();
    expect(load.state.value).toBe('loading');
    asked[0]?.answer('one');
    await run;
    expect([load.state.value, load.data.value]).toEqual(['ready', 'one']);
  });

  it('keeps the newest answer when an older one comes later, and takes the older question back', async () => {
    const { asked, load } = questions();
    const runs = [load.run(), load.run()];
    expect(asked.map((each) => each.signal.aborted)).toEqual([true, false]);
    asked[1]?.answer('newer');
    asked[0]?.answer('older');
    await Promise.all(runs);
    expect(load.data.value).toBe('newer');
  });

  it('keeps the last answer when the next question fails, and says why', async () => {
    const { asked, load } = questions();
    const first = load.run();
    asked[0]?.answer('one');
    await first;
    const second = load.run();
    asked[1]?.fail(new ApiProblem('Try later.', { status: 503, code: 'x' }));
    await second;
    expect([load.state.value, load.data.value, load.problem.value?.message]).toEqual([
      'failed',
      'one',
      'Try later.',
    ]);
  });

  it('takes its question back when its page is left', () => {
    const { asked, scope, load } = questions();
    void load.run();
    scope.stop();
    expect(asked[0]?.signal.aborted).toBe(true);
  });
});

describe('useForm', () => {
  const schema = z.object({
    name: z.string().min(1, 'Give a name.'),
    place: z.object({ locator: z.string().min(4, 'Too short.') }),
  });
  const empty = { name: '', place: { locator: '' } };

  it('names every wrong field by its path and sends nothing', async () => {
    const form = useForm(schema, empty);
    let sent = 0;
    const worked = await form.submit(async () => void (sent += 1));
    expect([worked, sent, form.errors.value]).toEqual([
      false,
      0,
      { name: 'Give a name.', 'place.locator': 'Too short.' },
    ]);
  });

  it('shows the field errors of the server and loses nothing that was typed', async () => {
    const form = useForm(schema, empty);
    form.values.name = 'Ann';
    form.values.place.locator = 'IO53';
    const worked = await form.submit(() =>
      Promise.reject(
        new ApiProblem('Not accepted.', {
          status: 422,
          code: 'v',
          errors: [{ path: 'name', message: 'Taken.' }],
        }),
      ),
    );
    expect([worked, form.errors.value.name, form.problem.value?.message, form.values.name]).toEqual([
      false,
      'Taken.',
      'Not accepted.',
      'Ann',
    ]);
    expect(form.isSending.value).toBe(false);
  });

  it('sends once however often it is pressed, and follows a schema that changes', async () => {
    const strict = ref(true);
    const form = useForm(() => (strict.value ? schema : z.object({})), empty);
    expect(await form.submit(async () => undefined)).toBe(false);
    strict.value = false;
    let sent = 0;
    let finish: () => void = () => undefined;
    const send = () => new Promise<void>((resolve) => ((sent += 1), (finish = resolve)));
    const first = form.submit(send);
    expect(await form.submit(send)).toBe(false);
    finish();
    expect([await first, sent]).toEqual([true, 1]);
  });
});

it('the theme is set on the page before anything is drawn, remembered, and night vision lies over it', () => {
  localStorage.setItem('whichwire.theme', 'light');
  startTheme();
  const { choose, nightVision } = useTheme();
  const onPage = () => document.documentElement.dataset.theme;
  expect(onPage()).toBe('light');
  nightVision.value = true;
  expect(onPage()).toBe('night');
  nightVision.value = false;
  choose('dark');
  expect([onPage(), localStorage.getItem('whichwire.theme')]).toEqual(['dark', 'dark']);
});
