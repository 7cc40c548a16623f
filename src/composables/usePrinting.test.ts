import { effectScope } from 'vue';
import { afterEach, beforeEach, describe, expect, it, vi } from 'vitest';
import { usePrinting } from './usePrinting.ts';
import { useTheme } from './useTheme.ts';

describe('printing a page', () => {
  let printed: string[];
  const { choice, choose } = useTheme();

  beforeEach(() => {
    printed = [];
    window.print = vi.fn(() => void printed.push(choice.value));
    choose('dark');
  });
  afterEach(() => choose('system'));

  it('is done in the light looks, and the screen gets its own back', async () => {
    const scope = effectScope();
    const print = scope.run(usePrinting)!;
    await print();
    expect([printed, choice.value]).toEqual([['light'], 'light']);
    window.dispatchEvent(new Event('afterprint'));
    expect(choice.value).toBe('dark');
    scope.stop();
  });

  it('leaves the looks alone when somebody prints by the browser’s own menu', () => {
    const scope = effectScope();
    scope.run(usePrinting);
    window.dispatchEvent(new Event('afterprint'));
    expect(choice.value).toBe('dark');
    scope.stop();
  });

  it('gives the looks back when the page is left before the printing ended', async () => {
    const scope = effectScope();
    const print = scope.run(usePrinting)!;
    await print();
    scope.stop();
    expect(choice.value).toBe('dark');
  });
});
