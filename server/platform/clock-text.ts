/** "2026-11-30 18:05:00Z": an instant as sentences give it; milliseconds only where there are any. */
export function clockText(timeMs: number): string {
  return new Date(timeMs).toISOString().replace('T', ' ').replace('.000Z', 'Z');
}
