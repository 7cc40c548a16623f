import { toValue } from 'vue';
import type { MaybeRefOrGetter } from 'vue';
import type { LaneItem } from './lane.ts';
import { moveRange, spanOf, zoomRange } from './time-scale.ts';
import type { TimeRange } from './time-scale.ts';
import type { ActivePart } from './useActivePart.ts';

interface LineKeys extends Pick<ActivePart, 'point' | 'step' | 'changeLane'> {
  range: () => TimeRange;
  activeItem: MaybeRefOrGetter<LaneItem | null>;
  setRange: (range: TimeRange, settled: boolean) => void;
  /** Opens what is pointed at, if anything is. */
  openActive: () => void;
}

/** Keys of the time line: arrows go from part to part, plus and minus zoom, Page Up and Page Down move. */
export function useLineKeys({ range, activeItem, setRange, point, step, changeLane, openActive }: LineKeys): {
  press: (event: KeyboardEvent) => void;
} {
  const middleOf = ({ fromMs, toMs }: TimeRange) => (fromMs + toMs) / 2;

  /** Around what is pointed at, as far as it is in view; else around the middle. */
  function zoom(factor: number): void {
    const { fromMs, toMs } = range();
    const aroundMs = Math.min(toMs, Math.max(fromMs, middleOf(toValue(activeItem) ?? range())));
    setRange(zoomRange(range(), factor, aroundMs), true);
  }

  function move(share: number): void {
    setRange(moveRange(range(), share * spanOf(range())), true);
  }

  const acts: Record<string, () => void> = {
    ArrowRight: () => step(1),
    ArrowLeft: () => step(-1),
    ArrowDown: () => changeLane(1),
    ArrowUp: () => changeLane(-1),
    Home: () => step(-Infinity),
    End: () => step(Infinity),
    PageUp: () => move(-0.5),
    PageDown: () => move(0.5),
    '+': () => zoom(0.5),
    '=': () => zoom(0.5),
    '-': () => zoom(2),
    Enter: openActive,
    ' ': openActive,
    Escape: () => point(null, null),
  };

  function press(event: KeyboardEvent): void {
    if (event.ctrlKey || event.metaKey || event.altKey) return;
    const act = acts[event.key];
    if (!act) return;
    event.preventDefault();
    act();
  }

  return { press };
}
