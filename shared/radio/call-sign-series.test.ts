import { describe, expect, it } from 'vitest';
import { holderOf, seriesByBlock } from './call-sign-series.ts';
import { CALL_SIGN_SERIES, UNALLOCATED_BLOCKS } from './data/call-sign-series.ts';

const letters = [...'ABCDEFGHIJKLMNOPQRSTUVWXYZ'];
const digits = [...'23456789'];
/** Letters of which the table divides only the alphabetic half (KAA to KZZ): letter-digit blocks are not in it. */
const alphabetOnly = [...'BFGIKMNRW'];

describe('the table of international call sign series', () => {
  it('writes every series as two three-character ends in order', () => {
    for (const [first, last] of CALL_SIGN_SERIES) {
      expect(first).toMatch(/^[A-Z2-9][A-Z2-9][A-Z]$/);
      expect(last).toMatch(/^[A-Z2-9][A-Z2-9][A-Z]$/);
      expect(first.charAt(0)).toBe(last.charAt(0));
      expect(first < last).toBe(true);
    }
  });

  it('has no two series that overlap, and divides a block only by its third letter', () => {
    for (const [block, ranges] of seriesByBlock()) {
      const sorted = [...ranges].sort((one, other) => (one.from < other.from ? -1 : 1));
      expect(`${block} ${sorted[0]?.from}`).toBe(`${block} A`);
      expect(`${block} ${sorted.at(-1)?.to}`).toBe(`${block} Z`);
      for (const [index, range] of sorted.slice(1).entries()) {
        expect(range.from.charCodeAt(0)).toBe((sorted[index]?.to.charCodeAt(0) ?? 0) + 1);
      }
    }
  });

  it('covers every two-character block, or names it as unallocated', () => {
    const blocks = seriesByBlock();
    const all = [
      ...letters.flatMap((first) => letters.map((second) => first + second)),
      ...letters
        .filter((first) => !alphabetOnly.includes(first))
        .flatMap((first) => digits.map((second) => first + second)),
      ...digits.flatMap((first) => letters.map((second) => first + second)),
    ];
    const missing = all.filter((block) => !blocks.has(block)).sort();
    expect(missing).toEqual([...UNALLOCATED_BLOCKS].sort());
  });

  // ITU Radio Regulations, Appendix 42 (well-known rows, from memory).
  it.each([
    ['AL7', 'US'],
    ['AM5', 'ES'],
    ['BY1', 'CN'],
    ['C31', 'AD'],
    ['CY0', 'CA'],
    ['DS5', 'KR'],
    ['E73', 'BA'],
    ['EI7', 'IE'],
    ['HF1', 'PL'],
    ['J79', 'DM'],
    ['JY4', 'JO'],
    ['L20', 'AR'],
    ['OL1', 'CZ'],
    ['OM3', 'SK'],
    ['P33', 'CY'],
    ['PZ5', 'SR'],
    ['SSM', 'EG'],
    ['SSN', 'SD'],
    ['UA9', 'RU'],
    ['UK8', 'UZ'],
    ['UP2', 'KZ'],
    ['UR5', 'UA'],
    ['VY2', 'CA'],
    ['VK0', 'AU'],
    ['XR6', 'CL'],
    ['Y24', 'DE'],
    ['Z81', 'SS'],
    ['2E0', 'GB'],
    ['3DM', 'SZ'],
    ['3DN', 'FJ'],
    ['4O3', 'ME'],
    ['4U1', 'UN'],
    ['5B4', 'CY'],
    ['7Z1', 'SA'],
    ['9A3', 'HR'],
    ['9Z4', 'TT'],
  ])('gives %s to %s', (prefix, holder) => {
    expect(holderOf(prefix)).toBe(holder);
  });

  it.each(['F', 'F5', 'K', 'W100', 'R1', 'N', 'G', 'M0', 'I2', 'B9', '2'])(
    'knows %s by its first letter',
    (prefix) => {
      const first = prefix.charAt(0);
      expect(holderOf(prefix)).toBe(holderOf(`${first}AA`));
    },
  );

  it.each(['Z6', 'S0', '1A', 'QRA', 'T9', '0X', '', 'X5'])('gives "%s" to nobody', (prefix) => {
    expect(holderOf(prefix)).toBeNull();
  });
});
