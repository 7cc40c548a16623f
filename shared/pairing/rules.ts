/** The rules that decide which spots are comparable. Standing rules: `STANDING_RULES`. */
export interface PairingRules {
  /** Length of a block, aligned to UTC: 5, 10, 15, 20, 30 or 60. */
  blockMinutes: number;
  /** Furthest apart in time that two matched spots may be, whole seconds, 1 to 600. */
  windowSeconds: number;
  /** Furthest apart in frequency that two matched spots may be, 0 to 10 kHz in steps of 0.1. */
  freqToleranceKhz: number;
  /** Time after the start of a dwell whose spots are left out, whole seconds, 0 to 600. */
  guardSeconds: number;
}

export const BLOCK_MINUTES: readonly number[] = [5, 10, 15, 20, 30, 60];

export const STANDING_RULES: Readonly<PairingRules> = Object.freeze({
  blockMinutes: 15,
  windowSeconds: 30,
  freqToleranceKhz: 0.3,
  guardSeconds: 20,
});

/** The frequency tolerance in the 100 Hz steps in which frequencies are stored. */
export function freqTolerance100Hz(rules: PairingRules): number {
  return Math.round(rules.freqToleranceKhz * 10);
}

/** Throws a RangeError that names the rule, what was given and what is accepted. */
export function checkRules(rules: PairingRules): void {
  const { blockMinutes, windowSeconds, freqToleranceKhz, guardSeconds } = rules;
  if (!BLOCK_MINUTES.includes(blockMinutes)) {
    throw new RangeError(`blockMinutes is ${blockMinutes}; accepted are ${BLOCK_MINUTES.join(', ')}.`);
  }
  checkWhole('windowSeconds', windowSeconds, 1, 600);
  checkWhole('guardSeconds', guardSeconds, 0, 600);
  const steps = freqToleranceKhz * 10;
  // 0.3 * 10 is not exactly 3 in binary: compare with a slack far below one step.
  if (!(steps >= 0 && steps <= 100 && Math.abs(steps - Math.round(steps)) < 1e-6)) {
    throw new RangeError(`freqToleranceKhz is ${freqToleranceKhz}; accepted are 0 to 10 in steps of 0.1.`);
  }
}

function checkWhole(name: string, value: number, lowest: number, highest: number): void {
  if (!Number.isInteger(value) || value < lowest || value > highest) {
    throw new RangeError(`${name} is ${value}; accepted are whole numbers from ${lowest} to ${highest}.`);
  }
}

/**
 * The rules as readable text, the key under which their units are cached: `b15.w30.f3.g20` is blocks
 * of 15 min, window 30 s, tolerance 0.3 kHz, guard 20 s. Text and not a hash: two sets of rules can
 * then never share a key, and a person can read a row. Throws RangeError for unusable rules.
 */
export function rulesKey(rules: PairingRules): string {
  checkRules(rules);
  return `b${rules.blockMinutes}.w${rules.windowSeconds}.f${freqTolerance100Hz(rules)}.g${rules.guardSeconds}`;
}

const KEY_PATTERN = /^b(\d{1,2})\.w(\d{1,3})\.f(\d{1,3})\.g(\d{1,3})$/;

/** The inverse of `rulesKey`. Throws RangeError for text that `rulesKey` would not have written. */
export function parseRulesKey(key: string): PairingRules {
  const parts = KEY_PATTERN.exec(key);
  if (!parts) throw new RangeError(`"${key}" is not a rules key; one looks like b15.w30.f3.g20.`);
  const rules: PairingRules = {
    blockMinutes: Number(parts[1]),
    windowSeconds: Number(parts[2]),
    freqToleranceKhz: Number(parts[3]) / 10,
    guardSeconds: Number(parts[4]),
  };
  // Leading zeros would give one set of rules two keys, and with them two caches.
  if (rulesKey(rules) !== key) throw new RangeError(`"${key}" is not written as ${rulesKey(rules)}.`);
  return rules;
}
