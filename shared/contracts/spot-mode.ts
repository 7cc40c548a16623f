import type { z } from 'zod';
import { spotMode } from './spot.ts';

export type SpotMode = z.infer<typeof spotMode>;

/**
 * The number under which a mode is stored in `spot.mode`. Stored rows carry these numbers for ever: a new
 * mode gets the next free one, and none is given twice.
 */
const codes: Readonly<Record<SpotMode, number>> = {
  other: 0,
  CW: 1,
  RTTY: 2,
  PSK: 3,
  FT8: 4,
  FT4: 5,
  SSB: 6,
};

const names = new Map<number, SpotMode>(spotMode.options.map((name) => [codes[name], name]));

export function modeCode(mode: SpotMode): number {
  return codes[mode];
}

/** `other` for a number that this release does not know: a newer one wrote it. */
export function modeName(code: number): SpotMode {
  return names.get(code) ?? 'other';
}

/** How feeds and files write modes, beside the names themselves. */
const aliases: Readonly<Record<string, SpotMode>> = {
  PSK31: 'PSK',
  PSK63: 'PSK',
  PSK125: 'PSK',
  BPSK: 'PSK',
  BPSK31: 'PSK',
  BPSK63: 'PSK',
  QPSK31: 'PSK',
  FSK: 'RTTY',
  USB: 'SSB',
  LSB: 'SSB',
  PHONE: 'SSB',
};

/** The mode that a written one means, in any letter case; `other` for one that is not told apart here. */
export function modeOf(written: string): SpotMode {
  const upper = written.trim().toUpperCase();
  return spotMode.options.find((name) => name.toUpperCase() === upper) ?? aliases[upper] ?? 'other';
}
