import { nextTick, onScopeDispose } from 'vue';
import { useTheme } from './useTheme.ts';

/**
 * Prints the page in its light looks, whatever is on the screen: pictures are painted in the colours of the theme,
 * and light words on white paper cannot be read. The screen gets its own looks back afterwards.
 */
export function usePrinting(): () => Promise<void> {
  const { choice, choose } = useTheme();
  let before: typeof choice.value | null = null;

  function giveBack(): void {
    if (before !== null) choose(before);
    before = null;
  }
  window.addEventListener('afterprint', giveBack);
  onScopeDispose(() => {
    window.removeEventListener('afterprint', giveBack);
    giveBack();
  });

  return async () => {
    before ??= choice.value;
    choose('light');
    await nextTick();
    // The pictures are painted with the second frame after their colours changed.
    for (let frame = 0; frame < 2; frame += 1) await new Promise((painted) => requestAnimationFrame(painted));
    window.print();
  };
}
