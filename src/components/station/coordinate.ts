/** "53.500° N": three decimals are about a hundred metres, finer than any locator of six characters. */
export function coordinate(degrees: number, positive: string, negative: string): string {
  return `${Math.abs(degrees).toFixed(3)}° ${degrees < 0 ? negative : positive}`;
}
