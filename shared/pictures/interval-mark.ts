/** Ends of an interval as they are drawn: cut at the axis, with a mark where it runs on. */
export function cutInterval(interval: readonly [number, number], limit: number) {
  const cut = (value: number) => Math.max(-limit, Math.min(limit, value));
  return {
    from: cut(interval[0]),
    to: cut(interval[1]),
    runsOnLow: interval[0] < -limit,
    runsOnHigh: interval[1] > limit,
  };
}

export interface MarkLook {
  colour: string;
  /** Outline of a full dot. */
  ink: string;
  /** Inside of a hollow one. */
  surface: string;
  radius: number;
  /** Not enough evidence: hollow dot, dashed line. */
  hollow: boolean;
}

/** The two strokes of an arrowhead whose tip is at (x, y). */
export function arrowHead(
  [x, y]: readonly [number, number],
  way: 'left' | 'right' | 'up' | 'down',
  colour: string,
): object {
  const [dx, dy] = { left: [5, 0], right: [-5, 0], up: [0, 5], down: [0, -5] }[way] as [number, number];
  const across = dx === 0 ? [4, 0] : [0, 4];
  return {
    type: 'polyline',
    shape: {
      points: [
        [x + dx - across[0]!, y + dy - across[1]!],
        [x, y],
        [x + dx + across[0]!, y + dy + across[1]!],
      ],
    },
    style: { stroke: colour, fill: 'none', lineWidth: 2 },
  };
}

/**
 * A dot and its interval on a horizontal axis from -limit to +limit. An end may be infinite; a value that lies
 * beyond the axis has no dot, only the arrow of its interval.
 */
export function intervalMark(
  given: { value: number; interval: readonly [number, number] | null; limit: number },
  at: (value: number) => number,
  y: number,
  look: MarkLook,
): object[] {
  const { value, interval, limit } = given;
  const { colour } = look;
  const children: object[] = [];
  if (interval !== null) {
    const cut = cutInterval(interval, limit);
    const [x1, x2] = [at(cut.from), at(cut.to)];
    children.push({
      type: 'line',
      shape: { x1, y1: y, x2, y2: y },
      style: { stroke: colour, lineWidth: 2, lineDash: look.hollow ? [3, 3] : [] },
    });
    if (cut.runsOnLow) children.push(arrowHead([x1, y], 'left', colour));
    if (cut.runsOnHigh) children.push(arrowHead([x2, y], 'right', colour));
  }
  if (Math.abs(value) <= limit) {
    children.push({
      type: 'circle',
      shape: { cx: at(value), cy: y, r: look.radius },
      style: look.hollow
        ? { fill: look.surface, stroke: colour, lineWidth: 1.5 }
        : { fill: colour, stroke: look.ink, lineWidth: 1 },
    });
  }
  return children;
}
