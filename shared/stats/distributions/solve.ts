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
