/**
 * For each time in `times[from..fromEnd)`, the index of the nearest time in `times[to..toEnd)`; among
 * equally near ones the earlier, and among equal times the first. Both stretches ascend; the second
 * holds at least one time. One merge, O(length of both); indices are written to `nearest[from..fromEnd)`.
 */
export function nearestInTime(
  times: Float64Array,
  from: number,
  fromEnd: number,
  to: number,
  toEnd: number,
  nearest: Int32Array,
): void {
  // `next` is the first candidate after the present time, `runStart` the first of those equal to the
  // candidate before it.
  let next = to;
  let runStart = to;
  for (let i = from; i < fromEnd; i++) {
    const time = times[i]!;
    while (next < toEnd && times[next]! <= time) {
      if (next === to || times[next] !== times[next - 1]) runStart = next;
      next++;
    }
    const earlierWins = next > to && (next === toEnd || time - times[runStart]! <= times[next]! - time);
    nearest[i] = earlierWins ? runStart : next;
  }
}
