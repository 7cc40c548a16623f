/**
 * A small seeded generator: the same seed gives the same numbers on every machine and in every
 * browser, so that a simulated night or a ranking by draws can be shown again exactly.
 *
 * Source of the bits: sfc32 ("small fast chaotic", Chris Doty-Humphrey, PractRand), 128 bits of state,
 * period at least 2^32 and on average 2^127; seeded through the murmur3 finaliser. Not for secrets.
 */
export interface Random {
  /** A number in [0, 1) with 53 random bits. */
  uniform(): number;
  /** A standard normal number (mean 0, standard deviation 1), Marsaglia's polar method. */
  normal(): number;
  /** An exponential number with mean 1. */
  exponential(): number;
  /** A whole number in [0, maxExclusive); maxExclusive is a whole number from 1 to 2^53. */
  integer(maxExclusive: number): number;
  /** One element, each equally likely. */
  pick<T>(items: readonly T[]): T;
  /**
   * An independent generator for a part of the job. It depends on this generator's seed and on the key
   * only, never on how many numbers were drawn: adding a draw in one part leaves all other parts alone.
   */
  fork(key: number | string): Random;
}

/** Murmur3 finaliser: every input bit reaches every output bit. */
function mix(value: number): number {
  let h = value | 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return (h ^ (h >>> 16)) >>> 0;
}

/** The two 32-bit words that name a generator. */
type Seed = readonly [number, number];

function absorb([high, low]: Seed, word: number): Seed {
  const nextHigh = mix(high ^ mix(word + 0x9e3779b9));
  return [nextHigh, mix(Math.imul(low, 0x01000193) ^ nextHigh ^ word)];
}

function seedFromNumber(seed: number, start: Seed): Seed {
  const words = new Uint32Array(new Float64Array([seed === 0 ? 0 : seed]).buffer);
  return absorb(absorb(start, words[0]!), words[1]!);
}

function seedFromText(text: string, start: Seed): Seed {
  let seed = absorb(start, text.length ^ 0x74657874);
  for (let i = 0; i < text.length; i++) seed = absorb(seed, text.charCodeAt(i));
  return seed;
}

function fromSeed(seed: Seed): Random {
  let a = mix(seed[0] ^ 0x243f6a88);
  let b = mix(seed[1] ^ 0x85a308d3);
  let c = mix(seed[0] + seed[1]);
  let counter = 1;
  const nextWord = (): number => {
    const sum = (a + b + counter) | 0;
    counter = (counter + 1) | 0;
    a = b ^ (b >>> 9);
    b = (c + (c << 3)) | 0;
    c = ((c << 21) | (c >>> 11)) + sum;
    return sum >>> 0;
  };
  for (let i = 0; i < 16; i++) nextWord();

  const uniform = (): number => ((nextWord() >>> 5) * 67108864 + (nextWord() >>> 6)) / 9007199254740992;
  let spare: number | undefined;
  const integer = (maxExclusive: number): number => {
    if (!Number.isSafeInteger(maxExclusive) || maxExclusive < 1) {
      throw new RangeError(`maxExclusive must be a whole number from 1 up, got ${maxExclusive}`);
    }
    return Math.floor(uniform() * maxExclusive);
  };
  return {
    uniform,
    integer,
    normal() {
      if (spare !== undefined) {
        const kept = spare;
        spare = undefined;
        return kept;
      }
      for (;;) {
        const x = 2 * uniform() - 1;
        const y = 2 * uniform() - 1;
        const square = x * x + y * y;
        if (square > 0 && square < 1) {
          const factor = Math.sqrt((-2 * Math.log(square)) / square);
          spare = y * factor;
          return x * factor;
        }
      }
    },
    // log1p(-u) with u in [0, 1) is never log(0).
    exponential: () => -Math.log1p(-uniform()),
    pick(items) {
      if (items.length === 0) throw new RangeError('items must hold at least one element');
      return items[integer(items.length)]!;
    },
    fork(key) {
      if (typeof key === 'number' && Number.isNaN(key))
        throw new RangeError('key must be a number or text, got NaN');
      return fromSeed(
        typeof key === 'number'
          ? seedFromNumber(key, absorb(seed, 0x6e756d))
          : seedFromText(key, absorb(seed, 0x737472)),
      );
    },
  };
}

/**
 * A seeded generator.
 *
 * @param seed any finite number
 * @throws RangeError when the seed is not a finite number
 * @example
 * const random = createRandom(7);
 * const night = random.fork('2026-01-14'); // the same night whatever else was drawn
 * night.normal();
 */
export function createRandom(seed: number): Random {
  if (!Number.isFinite(seed)) throw new RangeError(`seed must be a finite number, got ${seed}`);
  return fromSeed(seedFromNumber(seed, [0x5bd1e995, 0x27d4eb2f]));
}
