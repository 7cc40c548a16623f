import { afterEach, describe, expect, it, vi } from 'vitest';
import { useDraft } from './useDraft.ts';

const stored = { name: 'Wire', heading: '' };
afterEach(() => {
  vi.restoreAllMocks();
  sessionStorage.clear();
});

describe('useDraft', () => {
  it('brings what was typed back on the next visit, and says so', () => {
    const first = useDraft('1.antenna', stored);
    expect(first.isRestored.value).toBe(false);
    first.values.heading = '45';
    const second = useDraft('1.antenna', stored);
    expect(second.values).toEqual({ name: 'Wire', heading: '45' });
    expect(second.isRestored.value).toBe(true);
  });

  it('keeps the drafts of different things apart', () => {
    useDraft('1.antenna', stored).values.heading = '45';
    expect(useDraft('2.antenna', stored).values.heading).toBe('');
  });

  it('forgets what was saved, and what was typed back to what is stored', () => {
    const draft = useDraft('1.antenna', stored);
    draft.values.heading = '45';
    draft.forget();
    expect(useDraft('1.antenna', stored).values.heading).toBe('');
    const other = useDraft('1.antenna', stored);
    other.values.heading = '90';
    other.values.heading = '';
    expect(sessionStorage).toHaveLength(0);
  });

  it('goes back to what is stored on request', () => {
    useDraft('1.antenna', stored).values.heading = '45';
    const draft = useDraft('1.antenna', stored);
    draft.discard();
    expect(draft.values).toEqual(stored);
    expect(draft.isRestored.value).toBe(false);
    expect(sessionStorage).toHaveLength(0);
  });

  it('works without storage and with garbage in it', () => {
    sessionStorage.setItem('whichwire.draft.1.antenna', '{not json');
    expect(useDraft('1.antenna', stored).values).toEqual(stored);
    vi.spyOn(Storage.prototype, 'setItem').mockImplementation(() => {
      throw new DOMException('full', 'QuotaExceededError');
    });
    const draft = useDraft('2.antenna', stored);
    draft.values.heading = '45';
    expect(draft.values.heading).toBe('45');
  });
});
