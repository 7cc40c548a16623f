/** What a spot line says. The same fields as the simulator's spots. */
export interface SpotLineFields {
  timeMs: number;
  receiver: string;
  call: string;
  freqKhz: number;
  mode: string;
  snrDb: number;
  speedWpm: number;
  kind: string;
}

/**
 * One spot as the trade's telnet feeds send it, without the line end (common practice, no standard):
 * `DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z`. The time is the UTC minute
 * only. Columns widen where a value does not fit; readers go by white space.
 */
export function formatSpotLine(spot: SpotLineFields): string {
  const clock = new Date(spot.timeMs).toISOString().slice(11, 16).replace(':', '');
  return [
    `DX de ${spot.receiver}-#:`,
    ` ${spot.freqKhz.toFixed(1).padStart(7)}`,
    '  ',
    spot.call.padEnd(12),
    ` ${spot.mode.padEnd(4)}`,
    ` ${String(spot.snrDb).padStart(3)} dB`,
    ` ${String(spot.speedWpm).padStart(3)} WPM`,
    `  ${spot.kind.padEnd(8)}`,
    `${clock}Z`,
  ].join('');
}
