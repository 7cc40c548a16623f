/**
 * The trade's one-line telnet spot (common practice, no standard):
 * `DX de EI7QSA-#:  1824.5  EA8QSH       CW    21 dB  22 WPM  CQ      1812Z`. Columns are told apart by
 * white space only; the speed and what the station was doing may be missing.
 */
export interface SpotLine {
  receiver: string;
  freqKhz: string;
  call: string;
  mode: string;
  snrDb: string;
  /** Empty where there is none, or bits a second. */
  speedWpm: string;
  /** Minute of the UTC day. */
  minute: number;
}

export interface SpotLineRefusal {
  field: string | null;
  reason: string;
}

/** Up to the clock, which is the last thing that every such line has. */
const frame = /^\s*DX\s+de\s+([^\s:]+)\s*:\s*(\S+)\s+(\S+)\s+(.*?)\s*\b(\d\d)(\d\d)Z(?:\W.*)?$/i;
const report = /^(\S+)\s+([+\-−]?\d+)\s*dB\b(?:\s+(\d+)\s*WPM\b)?/i;
const example = 'DX de EI7QSA-#: 1824.5 EA8QSH CW 21 dB 22 WPM CQ 1812Z';

export function parseSpotLine(line: string): SpotLine | SpotLineRefusal {
  const match = frame.exec(line);
  if (match === null) {
    return { field: null, reason: `The line is not a spot such as "${example}".` };
  }
  const [, receiver, freqKhz, call, rest, hour, minute] = match as unknown as string[];
  const found = report.exec(rest!);
  if (found === null) {
    return { field: 'snr', reason: `The line has no mode and SNR after the call sign, such as "CW 21 dB".` };
  }
  if (Number(hour) > 23 || Number(minute) > 59) {
    return {
      field: 'time',
      reason: `The clock "${hour}${minute}Z" does not exist; it goes from 0000Z to 2359Z.`,
    };
  }
  return {
    receiver: receiver!,
    freqKhz: freqKhz!,
    call: call!,
    mode: found[1]!,
    snrDb: found[2]!,
    speedWpm: found[3] ?? '',
    minute: Number(hour) * 60 + Number(minute),
  };
}
