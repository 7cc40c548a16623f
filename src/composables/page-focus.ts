/**
 * A change of page is silent in a single-page site: the heading of the new page takes the focus, so that keyboard and
 * screen reader start there. The heading may come later than the change, while its station is still loading.
 */
let isWanted = false;

/** Called at each change of page but the first, where the browser itself starts at the top. */
export function wantPageFocus(): void {
  isWanted = true;
}

/** Called by a page's heading once it stands. */
export function takePageFocus(heading: HTMLElement | null): void {
  if (!isWanted) return;
  isWanted = false;
  heading?.focus({ preventScroll: true });
}
