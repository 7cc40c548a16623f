import { mount } from '@vue/test-utils';
import { afterEach, beforeEach, describe, expect, it } from 'vitest';
import { printedFinding } from '../../../server/features/findings/pdf/printed-finding.fixture.ts';
import { finding as contract } from '../../../shared/contracts/finding.ts';
import type { Decision, Finding, Share } from '../../../shared/contracts/finding.ts';
import DecisionForm from './DecisionForm.vue';
import DecisionMark from './DecisionMark.vue';
import DecisionPanel from './DecisionPanel.vue';
import FreezeDialog from './FreezeDialog.vue';
import FrozenRecord from './FrozenRecord.vue';
import LinkOnce from './LinkOnce.vue';
import { changedRecomputation, fixtureRecomputation } from './recomputation.fixture.ts';
import RecomputePanel from './RecomputePanel.vue';
import ShareTable from './ShareTable.vue';

const finding: Finding = contract.parse(printedFinding());
const decision = (id: number, overrides: Partial<Decision> = {}): Decision => ({
  ...finding.decisions[0]!,
  id,
  ...overrides,
});
/** Words as they are read: the template's line ends are blanks, thin spaces stay. */
const read = (shown: { text: () => string }) => shown.text().replace(/[ \n]+/g, ' ');

beforeEach(() => sessionStorage.clear());
afterEach(() => (document.body.innerHTML = ''));

describe('the mark of a decision', () => {
  const mark = (today?: string) =>
    mount(DecisionMark, { props: { decision: decision(1, { antennaName: null }), today } });

  it('says by word and by shape that a date to look again has passed', () => {
    const before = mark('2027-01-31');
    const after = mark('2027-02-02');
    expect(before.text()).toBe('Look again on 2027-02-01');
    expect(after.text()).toBe('Look again on 2027-02-01overdue');
    expect(after.findAll('path').map((path) => path.attributes('d'))).not.toEqual(
      before.findAll('path').map((path) => path.attributes('d')),
    );
  });

  it('holds no date against today where it is history', () => {
    expect(mark().text()).toBe('Look again on 2027-02-01');
  });
});

describe('the decisions on a finding', () => {
  const panel = (mayDecide: boolean) =>
    mount(DecisionPanel, {
      props: {
        decisions: [decision(1), decision(2, { decision: 'rebuild', reason: 'Two radials are cut.' })],
        today: '2026-12-01',
        mayDecide,
      },
    });

  it('show the last one, and the earlier ones behind it', () => {
    const shown = panel(true);
    expect(read(shown.get('.latest'))).toContain('Rebuild Vertical');
    expect(read(shown.get('details'))).toContain('Earlier decisions (1)');
    expect(read(shown.get('details'))).toContain('Its radials lie in water.');
  });

  it('cannot be added to by a reader', () => {
    expect(panel(false).find('button').exists()).toBe(false);
  });
});

describe('the form of a decision', () => {
  const form = () =>
    mount(DecisionForm, {
      props: {
        ...{ draftKey: 'test', antennas: finding.antennas, verdict: finding.verdict.sentence },
        ...{ firstDay: '2026-12-02', errors: {}, problem: null, busy: false },
      },
      attachTo: document.body,
    });

  it('chooses nothing beforehand and asks for a day only where one is needed', async () => {
    const shown = form();
    expect(
      shown.findAll<HTMLInputElement>('input[name=decision]').filter(({ element }) => element.checked),
    ).toEqual([]);
    expect(shown.find('input[type=date]').exists()).toBe(false);
    await shown.get('input[value="look again"]').setValue();
    expect(shown.get('input[type=date]').attributes('min')).toBe('2026-12-02');
    shown.unmount();
  });

  it('keeps what was typed when it is closed, until it has been written down', async () => {
    const first = form();
    await first.get('textarea').setValue('The frost did it no harm.');
    first.unmount();
    const second = form();
    expect(second.get('textarea').element.value).toBe('The frost did it no harm.');
    await second.get('input[value="keep"]').setValue();
    await second.get('form').trigger('submit');
    const [sent, saved] = second.emitted('save')![0] as [object, () => void];
    expect(sent).toEqual({
      decision: 'keep',
      about: 'whole',
      lookAgainOn: '',
      reason: 'The frost did it no harm.',
    });
    saved();
    second.unmount();
    const third = form();
    expect(third.get('textarea').element.value).toBe('');
    third.unmount();
  });
});

describe('asking a finding again', () => {
  const panel = (result = fixtureRecomputation()) =>
    mount(RecomputePanel, {
      props: {
        ...{ state: 'ready' as const, problem: null, result, antennas: finding.antennas },
        ...{ waits: false, job: null, mayCancel: true },
      },
    });

  it('says in large that nothing changed, with both columns of numbers to see it by', () => {
    const shown = panel();
    expect(read(shown.get('.head'))).toBe('Same data, same numbers.');
    const [estimate] = shown.findAll('tbody tr').filter((row) => row.text().startsWith('Estimate'));
    expect(estimate!.findAll('td').map((cell) => cell.text())).toEqual(['+1.80\u2009dB', '+1.80\u2009dB']);
    expect(shown.find('.moved').exists()).toBe(false);
    expect(shown.find('details').exists()).toBe(false);
  });

  it('lists what changed, marks the lines that moved, and tells the program from the data', () => {
    const shown = panel(changedRecomputation());
    expect(read(shown.get('.changes'))).toBe('Ann cut the dwell of Shed on Vertical short.');
    expect(shown.findAll('tr.moved th').map((cell) => cell.text())).toEqual(['Estimate', 'Units']);
    expect(
      shown
        .get('[aria-label="Numbers then and now"]')
        .findAll('thead th')
        .map((cell) => cell.text()),
    ).toEqual(['When it was frozen', 'Today', "The frozen units, today's program"]);
    expect(read(shown.findAll('details')[1]!)).toContain(
      'Shed on Vertical, 2026-11-03 18:00:00Z to 2026-11-03 18:10:00Z',
    );
  });

  it('shows how far the units are that must be made first', () => {
    const shown = mount(RecomputePanel, {
      props: {
        ...{ state: 'loading' as const, problem: null, result: null, antennas: finding.antennas },
        ...{ waits: true, mayCancel: true },
        job: {
          ...{ id: 5, kind: 'units', state: 'running' as const, attempts: 1, error: null },
          ...{ createdAt: '2026-12-01T12:00:00Z', finishedAt: null },
          progress: { done: 3, total: 12, secondsLeft: 9 },
        },
      },
    });
    expect(read(shown)).toContain('3 of 12 nights');
    expect(shown.get('header button').attributes('disabled')).toBe('');
  });
});

it('the record says what was left out, and shows the digest in eights', () => {
  const shown = mount(FrozenRecord, { props: { finding } });
  expect(read(shown)).toContain('the night of 2026-11-15 was still going on and is not part of it');
  expect(read(shown)).toContain(
    'blocks of 15\u2009min, window 30\u2009s, tolerance 0.3\u2009kHz, guard 20\u2009s',
  );
  expect(shown.findAll('.digest span').map((group) => group.text())).toEqual(
    Array.from({ length: 8 }, (_, index) => (index % 2 ? '7b5e4d18' : '3f2a91c0')),
  );
});

it('freezing begins with a title that fits, and sends what stands in the fields', async () => {
  const shown = mount(FreezeDialog, {
    props: {
      ...{ draftKey: 'freeze', sentence: finding.sentence, verdict: null, trialName: 'Top band' },
      ...{ title: 'x'.repeat(200), errors: { title: 'This cannot be empty.' }, problem: null },
      ...{ busy: false, waits: false, job: null, mayCancel: true },
    },
    attachTo: document.body,
  });
  const title = shown.get<HTMLInputElement>('input');
  expect(title.element.value).toHaveLength(120);
  expect(read(shown)).toContain('It stands under the trial Top band.');
  expect(read(shown)).toContain('This cannot be empty.');
  await title.setValue('Worth its mast');
  await shown.get('form').trigger('submit');
  expect(shown.emitted('freeze')![0]![0]).toEqual({ title: 'Worth its mast', note: '' });
  shown.unmount();
});

describe('links for guests', () => {
  const share: Share = {
    id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a13',
    ...{ label: 'The farmer', createdBy: null, createdAt: '2026-12-01T12:00:00Z' },
    ...{ expiresAt: '2026-12-31T12:00:00Z', withdrawnAt: null, lastReadAt: null, timesRead: 0 },
  };

  it('can be withdrawn while they are good', async () => {
    const withdrawn = {
      ...share,
      id: '6f0c1f0e-7a55-4c1e-9b5e-2f0f6f3f2a14',
      withdrawnAt: '2026-12-02T12:00:00Z',
    };
    const shown = mount(ShareTable, {
      props: { shares: [share, withdrawn], nowMs: Date.parse('2026-12-02T13:00:00Z') },
    });
    const [good, ended] = shown.findAll('tbody tr');
    expect(read(ended!)).toContain('withdrawn 1\u2009h ago');
    expect(ended!.find('button').exists()).toBe(false);
    await good!.get('button').trigger('click');
    expect(shown.emitted('withdraw')).toEqual([[share]]);
  });

  it('are selected for copying by hand where the browser gives no clipboard', async () => {
    const url = 'https://corrib.example/f#token';
    const shown = mount(LinkOnce, { props: { label: 'The farmer', url }, attachTo: document.body });
    const { clipboard } = navigator;
    Object.defineProperty(navigator, 'clipboard', { value: undefined, configurable: true });
    try {
      await shown.get('button.primary').trigger('click');
      await expect
        .poll(() => shown.get('[role=status]').text())
        .toBe('Selected: copy it with your keyboard.');
      expect(shown.get<HTMLInputElement>('input').element.selectionEnd).toBe(url.length);
    } finally {
      Object.defineProperty(navigator, 'clipboard', { value: clipboard, configurable: true });
    }
    shown.unmount();
  });
});
