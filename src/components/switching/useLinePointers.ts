import { toValue } from 'vue';
import type { MaybeRefOrGetter } from 'vue';
import { moveRange, pinchRange, spanOf, timeAt, zoomRange } from './time-scale.ts';
import type { TimeRange } from './time-scale.ts';

interface LinePointing {
  /** The box that the rows lie in; each row names itself by `data-lane`. */
  field: MaybeRefOrGetter<HTMLElement | null>;
  range: () => TimeRange;
  widthPx: MaybeRefOrGetter<number>;
  /** `settled` false while a finger is still moving. */
  setRange: (range: TimeRange, settled: boolean) => void;
  /** Points at what lies within `reachPx` of a place of a row; null: off the rows. */
  pointAt: (lane: number | null, placePx: number, reachPx: number) => void;
  /** Opens what is pointed at, if anything is. */
  openActive: () => void;
}

export interface LinePointers {
  grab: (event: PointerEvent) => void;
  drag: (event: PointerEvent) => void;
  release: (event: PointerEvent) => void;
  /** The pointer is over the box no longer. */
  stray: () => void;
  wheel: (event: WheelEvent) => void;
}

/** Moves, zooms and points on the time line by mouse, fingers and wheel. */
export function useLinePointers({
  field,
  range,
  widthPx,
  setRange,
  pointAt,
  openActive,
}: LinePointing): LinePointers {
  const pointers = new Map<number, number>();
  let held: { instants: number[]; startX: number; startY: number; moved: boolean } | null = null;
  let underPinch: TimeRange | null = null;
  let wheelEnd: ReturnType<typeof setTimeout> | undefined;

  const placeIn = (event: { clientX: number }) =>
    event.clientX - toValue(field)!.getBoundingClientRect().left;
  const timeOf = (placePx: number) => timeAt(placePx, range(), toValue(widthPx));
  const laneOf = (event: PointerEvent) => {
    const element = (event.target as Element).closest('[data-lane]');
    return element instanceof HTMLElement ? Number(element.dataset.lane) : null;
  };

  function grab(event: PointerEvent): void {
    if (event.pointerType === 'mouse' && event.button !== 0) return;
    pointers.set(event.pointerId, placeIn(event));
    hold(event);
  }

  function hold(event: PointerEvent): void {
    held = {
      instants: [...pointers.values()].map(timeOf),
      ...{ startX: event.clientX, startY: event.clientY, moved: held?.moved === true || pointers.size > 1 },
    };
  }

  function drag(event: PointerEvent): void {
    if (!pointers.has(event.pointerId) || held === null) {
      if (event.pointerType === 'mouse') pointAt(laneOf(event), placeIn(event), 4);
      return;
    }
    pointers.set(event.pointerId, placeIn(event));
    const places = [...pointers.values()];
    if (!held.moved && Math.abs(event.clientX - held.startX) < 5) return;
    if (!held.moved) {
      held.moved = true;
      // Captured only now: a captured pointer's click would no longer name the lane that it is on.
      toValue(field)?.setPointerCapture(event.pointerId);
    }
    const next =
      places.length >= 2
        ? pinchRange([held.instants[0]!, held.instants[1]!], [places[0]!, places[1]!], toValue(widthPx))
        : moveRange(range(), held.instants[0]! - timeOf(places[0]!));
    if (next === null) return;
    underPinch = next;
    setRange(next, false);
  }

  function release(event: PointerEvent): void {
    if (!pointers.delete(event.pointerId)) return;
    if (pointers.size > 0) {
      hold(event);
      return;
    }
    const wasMoved = held?.moved === true;
    held = null;
    if (underPinch !== null) setRange(underPinch, true);
    underPinch = null;
    if (wasMoved || event.type === 'pointercancel') return;
    const lane = laneOf(event);
    if (lane === null) return;
    pointAt(lane, placeIn(event), event.pointerType === 'mouse' ? 4 : 16);
    openActive();
  }

  function stray(): void {
    if (pointers.size === 0) pointAt(null, 0, 0);
  }

  /** A plain wheel scrolls the page, as everywhere; sideways it moves the line, with Ctrl it zooms. */
  function wheel(event: WheelEvent): void {
    const isZoom = event.ctrlKey || event.metaKey;
    if (!isZoom && Math.abs(event.deltaX) <= Math.abs(event.deltaY)) return;
    event.preventDefault();
    const next = isZoom
      ? zoomRange(range(), Math.exp(event.deltaY * 0.004), timeOf(placeIn(event)))
      : moveRange(range(), (event.deltaX / toValue(widthPx)) * spanOf(range()));
    setRange(next, false);
    clearTimeout(wheelEnd);
    wheelEnd = setTimeout(() => setRange(range(), true), 250);
  }

  return { grab, drag, release, stray, wheel };
}
