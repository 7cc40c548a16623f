/** Who holds the series of a call sign: ITU Radio Regulations, Appendix 42. */
import { CALL_SIGN_SERIES } from './data/call-sign-series.ts';

interface ThirdRange {
  from: string;
  to: string;
  holder: string;
}

const characters = [...'ABCDEFGHIJKLMNOPQRSTUVWXYZ', ...'23456789'];

/** The two-character blocks from "AA" to "99" that a series covers, in the order of the ITU's table (letters before digits). */
function blocksOf(first: string, last: string): string[] {
  const order = (text: string): number =>
    characters.indexOf(text.charAt(0)) * characters.length + characters.indexOf(text.charAt(1));
  const blocks: string[] = [];
  for (let place = order(first); place <= order(last); place += 1) {
    const block = characters[Math.floor(place / characters.length)]! + characters[place % characters.length]!;
    blocks.push(block);
  }
  return blocks;
}

/** Every block with the ranges of third letters in it; most have one range, A to Z. */
export function seriesByBlock(): ReadonlyMap<string, readonly ThirdRange[]> {
  const blocks = new Map<string, ThirdRange[]>();
  for (const [first, last, holder] of CALL_SIGN_SERIES) {
    for (const block of blocksOf(first, last)) {
      const range = {
        from: first.startsWith(block) ? first.slice(2) : 'A',
        to: last.startsWith(block) ? last.slice(2) : 'Z',
        holder,
      };
      blocks.set(block, [...(blocks.get(block) ?? []), range]);
    }
  }
  return blocks;
}

const blocks = seriesByBlock();
/** Letters (and the digit 2) whose whole alphabet one country holds, so that they name it alone. */
const wholeLetters = new Map<string, string>(
  [...'BFGIKMNRW2'].map((letter) => [letter, blocks.get(`${letter}A`)![0]!.holder]),
);

/**
 * The holder of the series that a call or a bare prefix belongs to: an ISO country code, "UN", "WMO"
 * or "ICAO"; null for prefixes allocated to nobody. Where the third letter divides a block (3D, SS)
 * and the text has none there, the first holder answers, and `call-territories.ts` puts it right.
 */
export function holderOf(callOrPrefix: string): string | null {
  const whole = wholeLetters.get(callOrPrefix.charAt(0));
  if (whole !== undefined) return whole;
  const ranges = blocks.get(callOrPrefix.slice(0, 2));
  if (ranges === undefined) return null;
  const third = callOrPrefix.charAt(2);
  const range = ranges.find(({ from, to }) => third >= from && third <= to);
  return (range ?? ranges[0])?.holder ?? null;
}
