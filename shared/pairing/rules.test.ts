import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { BLOCK_MINUTES, STANDING_RULES, parseRulesKey, rulesKey, type PairingRules } from './rules.ts';

const rulesArbitrary: fc.Arbitrary<PairingRules> = fc.record({
  blockMinutes: fc.constantFrom(...BLOCK_MINUTES),
  windowSeconds: fc.integer({ min: 1, max: 600 }),
  freqToleranceKhz: fc.integer({ min: 0, max: 100 }).map((steps) => steps / 10),
  guardSeconds: fc.integer({ min: 0, max: 600 }),
});

describe('rulesKey', () => {
  it('writes the standing rules as readable text', () => {
    expect(rulesKey(STANDING_RULES)).toBe('b15.w30.f3.g20');
  });

  it('reads back every set of rules it writes', () => {
    fc.assert(
      fc.property(rulesArbitrary, (rules) => {
        expect(parseRulesKey(rulesKey(rules))).toEqual(rules);
      }),
    );
  });

  it.each([
    [{ blockMinutes: 7 }, 'blockMinutes is 7; accepted are 5, 10, 15, 20, 30, 60.'],
    [{ windowSeconds: 0 }, 'windowSeconds is 0; accepted are whole numbers from 1 to 600.'],
    [{ windowSeconds: 2.5 }, 'windowSeconds is 2.5; accepted are whole numbers from 1 to 600.'],
    [{ guardSeconds: -1 }, 'guardSeconds is -1; accepted are whole numbers from 0 to 600.'],
    [{ guardSeconds: Number.NaN }, 'guardSeconds is NaN; accepted are whole numbers from 0 to 600.'],
    [{ freqToleranceKhz: 0.25 }, 'freqToleranceKhz is 0.25; accepted are 0 to 10 in steps of 0.1.'],
    [{ freqToleranceKhz: Infinity }, 'freqToleranceKhz is Infinity; accepted are 0 to 10 in steps of 0.1.'],
  ])('refuses %o by name', (change, message) => {
    expect(() => rulesKey({ ...STANDING_RULES, ...change })).toThrow(new RangeError(message));
  });
});

describe('parseRulesKey', () => {
  it.each(['', 'b15.w30.f3', 'b15.w30.f3.g20 ', 'B15.w30.f3.g20', 'b15.w30.f0.3.g20', 'b15,w30,f3,g20'])(
    'refuses "%s", which is no rules key',
    (key) => {
      expect(() => parseRulesKey(key)).toThrow('is not a rules key; one looks like b15.w30.f3.g20.');
    },
  );

  it('refuses a second spelling of the same rules', () => {
    expect(() => parseRulesKey('b15.w030.f3.g20')).toThrow(
      '"b15.w030.f3.g20" is not written as b15.w30.f3.g20.',
    );
  });

  it('refuses rules that no station may set', () => {
    expect(() => parseRulesKey('b15.w700.f3.g20')).toThrow('windowSeconds is 700');
  });
});
