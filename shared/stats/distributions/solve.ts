/**
 * The root of an increasing function by Newton steps that may never leave a shrinking bracket: where
 * Newton would run away (flat tails) the bracket is halved instead.
 *
 * @param f value and derivative at u
 * @param low f(low) <= 0
 * @param high f(high) >= 0
 */
export function solveIncreasing(
  f: (u: number) => readonly [value: number, slope: number],
  low: number,
  high: number,
  start: number,
): number {
  let u = start;
  for (let i = 0; i < 300; i++) {
    const [value, slope] = f(u);
    if (value === 0) return u;
    if (value > 0) high = u;
    else low = u;
    const newton = u - value / slope;
    const next = newton > low && newton < high ? newton : (low + high) / 2;
    if (Math.abs(next - u) <= 4e-16 * Math.max(1, Math.abs(u))) return next;
    u = next;
  }
  return u;
}

/**
 * The root of an increasing function known only by its values: secant steps kept inside a shrinking
 * bracket (the Illinois variant of false position; Dowell and Jarratt 1971).
 *
 * @param f increasing, f(low) <= 0 <= f(high)
 */
export function solveBracketed(f: (u: number) => number, low: number, high: number): number {
  let [below, above] = [f(low), f(high)];
  if (below >= 0) return low;
  if (above <= 0) return high;
  let last = 0;
  for (let i = 0; i < 200 && high - low > 4e-15 * Math.max(Math.abs(low), Math.abs(high)); i++) {
    const secant = high - (above * (high - low)) / (above - below);
    const u = secant > low && secant < high ? secant : low + (high - low) / 2;
    const value = f(u);
    if (value === 0) return u;
    if (value > 0) {
      [high, above] = [u, value];
      // The end that stayed twice is lowered, so that the next step cannot stick to the other one.
      if (last > 0) below /= 2;
    } else {
      [low, below] = [u, value];
      if (last < 0) above /= 2;
    }
    last = value;
  }
  return low + (high - low) / 2;
}
