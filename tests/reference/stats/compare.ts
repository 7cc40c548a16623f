import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';

/** Reads one of the files make-reference.R wrote. */
export function readReference<Case>(name: string): Case[] {
  return JSON.parse(readFileSync(fileURLToPath(new URL(`${name}.json`, import.meta.url)), 'utf8')) as Case[];
}

/**
 * Collects every number that is off, so that one failing case does not hide the others. A number agrees
 * when it is within `relative` of the expected one, or within `absolute` where the expected one is
 * near zero by cancellation.
 */
export class Mismatches {
  readonly found: string[] = [];
  compared = 0;

  check(label: string, actual: number | null, expected: number | null, relative = 1e-8, absolute = 0): void {
    this.compared += 1;
    if (actual === expected) return;
    const close =
      actual !== null &&
      expected !== null &&
      Math.abs(actual - expected) <= Math.max(relative * Math.abs(expected), absolute);
    if (!close) this.found.push(`${label}: ${actual}, R has ${expected}`);
  }
}
