import { gzipSync } from 'node:zlib';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { answerComparison } from '../../../shared/comparison/index.ts';
import type { ComparisonInput } from '../../../shared/comparison/index.ts';
import { comparisonQuestion } from '../../../shared/contracts/comparison.ts';
import { pairSpots, STANDING_RULES } from '../../../shared/pairing/index.ts';
import type { HeardOnlyColumns, UnitColumns } from '../../../shared/pairing/index.ts';
import { loadSampleStation } from '../../../tests/reference/sample-station/load.ts';
import { digestOf } from './digest.ts';
import { canonical } from './evidence.ts';
import type { Evidence } from './evidence.ts';
import { packEvidence, unpackEvidence } from './evidence-codec.ts';

type Columns = Record<string, Int32Array>;

/** ALPHA against BRAVO of the invented sample station, as a database would give it. */
function sampleInput(): ComparisonInput {
  const sample = loadSampleStation('swap');
  const startMs = sample.dwells.startMs.reduce((x, y) => Math.min(x, y)) - 86_400_000;
  const endMs = sample.dwells.endMs.reduce((x, y) => Math.max(x, y)) + 86_400_000;
  const paired = pairSpots(sample.spots, sample.dwells, STANDING_RULES, { startMs, endMs });
  const a = sample.antennaIds.get('ALPHA')!;
  const b = sample.antennaIds.get('BRAVO')!;
  const ofPair = <T extends UnitColumns | HeardOnlyColumns>(columns: T): T =>
    rows(columns, (i) => columns.antennaA[i] === a && columns.antennaB[i] === b);
  return {
    question: comparisonQuestion.parse({ antennaA: a, antennaB: b }),
    antennas: {
      a: { id: a, name: 'ALPHA', marker: 'A', headingDeg: null },
      b: { id: b, name: 'BRAVO', marker: 'B', headingDeg: null },
    },
    receivers: [...sample.receiverIds].map(([callSign, id]) => ({ id, callSign })),
    rules: { ...STANDING_RULES, blockMinutes: 15 },
    marginDb: 1,
    sectorCount: 12,
    station: { latitude: 53.5, longitude: -9 },
    units: ofPair(paired.units),
    heardOnly: ofPair(paired.heardOnly),
    calls: new Map(
      sample.calls.map((call, index) => [
        index + 1,
        { call, country: null, azimuthDeg: (index * 37) % 360, spreadDeg: 2, distanceKm: 900 + index },
      ]),
    ),
    nights: [],
  };
}

function rows<T extends UnitColumns | HeardOnlyColumns>(columns: T, keep: (i: number) => boolean): T {
  return Object.fromEntries(
    Object.entries(columns as unknown as Columns).map(([name, values]) => [
      name,
      values.filter((_value, i) => keep(i)),
    ]),
  ) as unknown as T;
}

/** The same data as another database might hold it: other call numbers, rows in another order. */
function elsewhere(input: ComparisonInput, seed: number): ComparisonInput {
  const shuffled = (length: number, salt: number) =>
    Array.from({ length }, (_, i) => i).sort(
      (a, b) => Math.sin((a + 1) * (seed + salt)) - Math.sin((b + 1) * (seed + salt)),
    );
  const ids = [...input.calls.keys()];
  const numbers = shuffled(ids.length, 3);
  const renumbered = new Map(ids.map((id, i) => [id, 5000 + numbers[i]!]));
  const reorder = <T extends UnitColumns | HeardOnlyColumns>(columns: T, salt: number): T => {
    const order = shuffled(columns.call.length, salt);
    return Object.fromEntries(
      Object.entries(columns as unknown as Columns).map(([name, values]) => [
        name,
        values.map((_value, i) =>
          name === 'call' ? renumbered.get(values[order[i]!]!)! : values[order[i]!]!,
        ),
      ]),
    ) as unknown as T;
  };
  return {
    ...input,
    units: reorder(input.units, 1),
    heardOnly: reorder(input.heardOnly, 2),
    calls: new Map([...input.calls].reverse().map(([id, facts]) => [renumbered.get(id)!, facts])),
  };
}

describe('evidence in its own order', () => {
  const input = sampleInput();
  const { digest } = digestOf(canonical(input));
  const answer = JSON.stringify(answerComparison(canonical(input)));

  it('gives the same digest and the same answer, bit for bit, from whichever database it came', () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 1_000_000 }), (seed) => {
        const other = canonical(elsewhere(input, seed));
        expect(digestOf(other).digest).toBe(digest);
        expect(JSON.stringify(answerComparison(other))).toBe(answer);
      }),
      { numRuns: 8 },
    );
  });

  it('is what makes the digest independent of the order, which the digest itself already is', () => {
    expect(digestOf(input).digest).toBe(digest);
    expect(digestOf(elsewhere(input, 7)).digest).toBe(digest);
  });

  it('has another digest as soon as one unit has one spot more, or one station was heard on one only', () => {
    const changed = canonical(input);
    const countA = Uint16Array.from(changed.units.countA);
    countA[17]! += 1;
    expect(digestOf({ ...changed, units: { ...changed.units, countA } }).digest).not.toBe(digest);
    const side = Uint8Array.from(changed.heardOnly.side);
    side[3] = 1 - side[3]!;
    expect(digestOf({ ...changed, heardOnly: { ...changed.heardOnly, side } }).digest).not.toBe(digest);
    const swapped = { a: changed.antennas.b, b: changed.antennas.a };
    expect(digestOf({ ...changed, antennas: swapped }).digest).not.toBe(digest);
  });

  it('changes the digest of the night it is about, and of no other', () => {
    const before = digestOf(canonical(input));
    const without = canonical({ ...input, units: rows(input.units, (i) => i !== 40) });
    const after = digestOf(without);
    const moved = before.nights.filter((night, i) => night.digest !== after.nights[i]!.digest);
    expect(moved).toHaveLength(1);
    expect(after.nights).toHaveLength(before.nights.length);
  });
});

describe('evidence in bytes', () => {
  it('comes back as it was, whatever columns it has', () => {
    fc.assert(
      fc.property(
        fc.array(fc.double({ noNaN: true }), { maxLength: 40 }),
        fc.array(fc.integer({ min: -128, max: 127 }), { maxLength: 9 }),
        fc.array(fc.tuple(fc.integer(), fc.string({ unit: 'grapheme' })), { maxLength: 5 }),
        (doubles, bytes, entries) => {
          const given = {
            input: {
              columns: { doubles: Float64Array.from(doubles), bytes: Int8Array.from(bytes) },
              calls: new Map(entries),
              nested: [{ more: Uint16Array.of(1, 2, 65_535) }],
            },
            dwells: [],
          } as unknown as Evidence;
          expect(unpackEvidence(packEvidence(given))).toEqual(given);
        },
      ),
    );
  });

  it('gives the same answer after it was stored', () => {
    const input = canonical(sampleInput());
    const back = unpackEvidence(packEvidence({ input, dwells: [] })).input;
    expect(JSON.stringify(answerComparison(back))).toBe(JSON.stringify(answerComparison(input)));
    expect(digestOf(back).digest).toBe(digestOf(input).digest);
  });

  it('is refused when it is something else', () => {
    const packed = packEvidence({ input: canonical(sampleInput()), dwells: [] });
    expect(() => unpackEvidence(packed.subarray(0, 20))).toThrow(/unexpected end of file/);
    const other = gzipSync(Buffer.from('a text of more than sixteen bytes'));
    expect(() => unpackEvidence(other)).toThrow('The bytes are not the evidence of a finding.');
    expect(() => unpackEvidence(Buffer.from('not gzip'))).toThrow(/incorrect header check/);
  });
});
