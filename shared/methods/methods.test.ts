import { createHash } from 'node:crypto';
import { describe, expect, it } from 'vitest';
import { digestLines, exampleDigests } from './finding-entries.ts';
import type { MethodEntry } from './method-entry.ts';
import { methodGroups } from './method-groups.ts';
import { isMethodId, methodIds } from './method-ids.ts';
import type { MethodId } from './method-ids.ts';

const entries = methodGroups.flatMap((group) => group.entries);
const entryOf = (id: MethodId): MethodEntry => entries.find((entry) => entry.id === id)!;
/** As typed on a keyboard, so that a check reads like what one sees. */
const plain = (text: string) =>
  text.replaceAll('\u2009', ' ').replaceAll('\u2212', '-').replaceAll('\u2026', '...');

const resultsOf = (id: MethodId) =>
  Object.fromEntries(
    entryOf(id)
      .example()
      .results.map(({ label, value }) => [plain(label), plain(value)]),
  );
const tableOf = (id: MethodId, caption: string) => {
  const table = entryOf(id)
    .example()
    .tables.find((each) => each.caption === caption)!;
  return table.rows.map((row) => row.map(plain));
};

describe('the entries of the Methods page', () => {
  it('exist for every id that a figure can link to, once each', () => {
    expect(entries.map(({ id }) => id).sort()).toEqual([...methodIds].sort());
  });

  it('point to other entries only, never to themselves', () => {
    for (const { id, related } of entries) {
      expect(related.length, id).toBeGreaterThan(0);
      expect(
        related.filter((other) => other === id || !isMethodId(other)),
        id,
      ).toEqual([]);
    }
  });

  it('each ask a question, answer it in two to nine sentences and name a source', () => {
    for (const { id, asks, text, sources } of entries) {
      expect(asks, id).toMatch(/^[A-Z].*\?$/);
      const sentences = text.join(' ').split(/[.?:]\s+(?=[A-Z\u201c])/);
      expect(sentences.length, id).toBeGreaterThanOrEqual(2);
      expect(sentences.length, id).toBeLessThanOrEqual(9);
      expect(sources.join(' ').length, id).toBeGreaterThan(10);
    }
  });

  it('show an example with data and a result in it, and no number that could not be computed', () => {
    for (const { id, example } of entries) {
      const { tables, results, words } = example();
      expect(words.length, id).toBeGreaterThan(10);
      expect(tables.length, id).toBeGreaterThan(0);
      for (const { head, rows } of tables) {
        expect(rows.length, id).toBeGreaterThan(0);
        for (const row of rows) expect(row.length, id).toBe(head.length);
      }
      const said = JSON.stringify({ tables, results });
      expect(said, id).not.toMatch(/NaN|Infinity|undefined|null/);
    }
  });

  it('name no call sign that could belong to a person', () => {
    const text = JSON.stringify(entries.map((entry) => ({ ...entry, example: entry.example() })));
    const calls = text.match(/\b[A-Z]{1,2}\d[A-Z]{1,3}\b/g) ?? [];
    expect(calls.length).toBeGreaterThan(10);
    // ITU Radio Regulations 19.68: call signs keep off the Q code.
    expect(calls.filter((call) => !/\d?Q[R-U][A-Z]$/.test(call) && !/^EI7QS[A-Z]$/.test(call))).toEqual([]);
  });
});

describe('what is counted in the examples, by hand from the rules', () => {
  it('is two kinds of unit from thirteen spots', () => {
    // (24 - 19 + 22 - 20) / 2 = 3.5; (24 + 22) / 2 - 18 = 5; 14 - 12 = 2; (14 + 16) / 2 - 13 = 2.
    expect(tableOf('unit', 'Units')).toEqual([
      ['EA8QSH', 'simultaneous, receiver 1 and 2', '2', '2', '+3.5 dB'],
      ['EA8QSH', 'alternating, receiver 1', '2', '1', '+5.0 dB'],
      ['K1QRB', 'simultaneous, receiver 1 and 2', '1', '1', '+2.0 dB'],
      ['K1QRB', 'alternating, receiver 1', '2', '1', '+2.0 dB'],
    ]);
    expect(resultsOf('unit')).toEqual({ 'Matches of two receivers': '3', Units: '4' });
  });

  it('leaves out one spot in the guard and one without a dwell', () => {
    expect(resultsOf('spot')).toEqual({ counts: '11 spots', guard: '1 spot', 'no dwell': '1 spot' });
    expect(resultsOf('guard')).toEqual({
      'Left out by a guard of 20 s': '1 spot',
      'Left out by a guard of 120 s': '2 spots',
    });
    expect(resultsOf('dwell')).toEqual({ 'Spot of 20:16:00 on receiver 2': 'no dwell' });
  });

  it('is fewer units in shorter blocks', () => {
    // In blocks of five minutes no receiver hears a station on both antennas: only the matches are left.
    expect(tableOf('block', 'Units by block length')).toEqual([
      ['5 min', '2', '0'],
      ['15 min', '4', '2'],
      ['30 min', '4', '2'],
    ]);
  });

  it('counts a station heard on one antenna only where both were listened to alike', () => {
    expect(tableOf('heard-only', 'Heard on one antenna only')).toEqual([['UA9QSM', 'North-east wire', '1']]);
    expect(Object.values(resultsOf('heard-only'))).toEqual(['1', '0']);
  });

  it('puts the small hours into the night before, from solar noon to solar noon', () => {
    // IO53 has its middle at 9 degrees west: solar noon is 12:36 UTC.
    expect(tableOf('night', 'Moments and their nights').map(([, night]) => night)).toEqual([
      '2026-11-13',
      '2026-11-14',
      '2026-11-14',
      '2026-11-15',
    ]);
    expect(resultsOf('night')).toEqual({ 'Solar noon at the station': '12:36Z' });
    expect(resultsOf('station-night')).toEqual({ Units: '6', 'Station-nights': '3' });
  });

  it('holds a bearing for unsure only where its circle is wider than a sector', () => {
    // Spherical trigonometry by hand: 2 asin(sin(radius / 6371) / sin(distance / 6371)) in degrees.
    const rows = tableOf('bearing', 'Bearings and how wide they are');
    for (const [, , distance, radius, angle] of rows) {
      const [arc, reach] = [distance!, radius!].map((text) => Number(text.replace(/[^\d]/g, '')) / 6371);
      const byHand = (2 * Math.asin(Math.sin(reach!) / Math.sin(arc!)) * 180) / Math.PI;
      expect(Math.abs(byHand - Number.parseFloat(angle!))).toBeLessThan(1);
    }
    expect(rows.map((row) => row.at(-1))).toEqual([
      '270 to 300°',
      '90 to 120°',
      '90 to 120°',
      'bearing unsure',
    ]);
  });

  it('calls the path dark by the sun at both ends', () => {
    // Sunset at 53.5 N 9 W on 14 November 2026: 16:40 UTC (astronomy-engine 2, SearchRiseSet).
    expect(resultsOf('hours')).toEqual({ 'Sunset here': '16:40Z' });
    expect(tableOf('hours', 'The sun on the path').map((row) => row[3])).toEqual([
      'one dark',
      'one dark',
      'both dark',
      'both dark',
    ]);
  });

  it('holds half of the units by two stations and puts the units into bars about whole decibels', () => {
    expect(Object.values(resultsOf('half-weight'))).toEqual(['2 of 8 stations']);
    expect(tableOf('histogram', 'Units by difference').map((row) => row[2])).toEqual([
      '1',
      '2',
      '4',
      '3',
      '2',
    ]);
  });
});

// Values below: R 4.2 with sandwich, survival, metafor and coin, run once over the data that the page shows; the
// functions are named beside each. They are compared as the page writes them.
describe('the answer of the examples, against R', () => {
  it('has the interval of sandwich::vcovCL(type = "HC1", cadjust = TRUE)', () => {
    expect(resultsOf('estimate')).toMatchObject({ Difference: '+2.125 dB', 'Sum of the units': '+25.5 dB' });
    expect(resultsOf('interval')).toEqual({
      Difference: '+2.13 dB',
      'Standard error': '0.450 dB',
      'Degrees of freedom': '7',
      '95 % interval': '1.06 to 3.19 dB',
    });
    expect(resultsOf('p')).toEqual({ t: '4.73', 'Degrees of freedom': '7', p: '0.002' });
    expect(resultsOf('design-effect')).toEqual({
      'Plain standard error': '0.332 dB',
      'Cluster standard error': '0.450 dB',
      'Design effect': '1.83',
      'Units worth': '6.5',
    });
  });

  it('has the two-way interval of vcovCL with two clusterings', () => {
    expect(tableOf('two-way', 'One way and two ways')).toEqual([
      ['station-nights', '0.450 dB', '7', '1.06 to 3.19 dB'],
      ['call signs and nights', '0.289 dB', '2', '0.88 to 3.37 dB'],
    ]);
  });

  it('takes the receivers out as lm does, and says when it cannot', () => {
    expect(resultsOf('receiver-offsets')).toEqual({
      'Difference A - B': '+2.0 dB',
      '95 % interval': '1.66 to 2.34 dB',
      'Receiver 2 against receiver 1': '-1.5 dB',
    });
    expect(tableOf('separability', 'What the fit can tell')).toEqual([
      ['before the swap', '1', '2', 'cannot be separated'],
      ['with the swap', '2', '2', 'A clearly better'],
    ]);
    expect(Object.values(resultsOf('separability'))).toEqual(['not known', '+2.0 dB']);
  });

  it('gives each verdict of the table to one trial', () => {
    expect(tableOf('verdict', 'Trials and their verdicts')).toEqual([
      ['first', '+1.8 dB', '1.1 to 2.5 dB', '1.2 to 2.4 dB', '14', 'A clearly better'],
      ['second', '+1.1 dB', '0.4 to 1.8 dB', '0.5 to 1.7 dB', '14', 'A better'],
      ['third', '+0.2 dB', '-0.4 to +0.8 dB', '-0.3 to +0.7 dB', '14', 'no practical difference'],
      ['fourth', '+0.9 dB', '-0.5 to +2.3 dB', '-0.3 to +2.1 dB', '14', 'not settled'],
      ['fifth', '+2.4 dB', '1.4 to 3.4 dB', '1.6 to 3.2 dB', '2', 'not enough yet'],
    ]);
  });

  it('proves equivalence as two one-sided t.test do', () => {
    expect(resultsOf('equivalence')).toEqual({
      Difference: '+0.12 dB',
      '90 % interval': '-0.08 to +0.32 dB',
      p: 'below 0.001',
      'Smaller than the margin': 'proven',
    });
  });
});

describe('the other views of the examples, against R', () => {
  it('have the p of coin::wilcoxsign_test(distribution = "exact") under both rules about zeros', () => {
    expect(tableOf('signed-rank', 'With the zero left out before ranking, or after')).toEqual([
      ['left out before', '7', '28.0', '0.0', '0.016'],
      ['left out after', '8', '35.0', '0.0', '0.016'],
    ]);
  });

  it('have the median of the pairwise means, and the interval at qsignrank(0.025, 8)', () => {
    expect(resultsOf('hodges-lehmann')).toEqual({
      'Typical difference of the four': '+1.750 dB',
      'Plain mean of the four': '+2.375 dB',
      'Typical difference of the eight': '+1.75 dB',
      '95 % interval of the eight': '0.75 to 2.75 dB',
    });
  });

  it('have the t.test of the means, its effect size, and binom.test of the signs', () => {
    expect(resultsOf('paired-t')).toMatchObject({ 'Standard deviation': '1.067 dB', t: '4.80', p: '0.002' });
    expect(resultsOf('effect-size')).toMatchObject({ dz: '1.70' });
    expect(resultsOf('chance-better')).toMatchObject({ Ahead: '7', Ties: '1', Chance: '93.8 %' });
    expect(resultsOf('sign-test')).toEqual({ 'Wins of decided': '7 of 7', p: '0.016' });
  });

  it('have the odds ratio of binom.test(9, 12) and its mid-p', () => {
    expect(resultsOf('odds-ratio')).toEqual({
      'Station-nights of the first table': 'A 3, B 1',
      'Odds ratio of the season': '3.00',
      '95 % interval': '0.75 to 17.23',
      'Exact p': '0.146',
      'Mid-p': '0.092',
    });
    expect(tableOf('odds-ratio', 'Heard-only blocks by station-night').map((row) => row[2])).toEqual([
      'A',
      'A',
      'A',
      'B',
      'neither',
    ]);
  });

  it('have the censored mean of survival::survreg, over the limit of quantile(type = 7)', () => {
    expect(resultsOf('censored')).toEqual({
      'Hearing limit': '4.98 dB',
      'Main answer': '+2.5 dB',
      'Censored view': '+4.22 dB',
      '95 % interval': '2.25 to 6.19 dB',
    });
  });
});

describe('cells, watching and planning in the examples, against R', () => {
  it('fit all cells at once as lm(d ~ 0 + cell) does, and hatch the thin one', () => {
    expect(tableOf('map-cells', 'Cells')).toEqual([
      ['north-east', '+2.50 dB', '2.06 to 2.94 dB', '9', '3', 'yes'],
      ['south', '0.00 dB', '-0.49 to +0.49 dB', '8', '3', 'yes'],
      ['west', '+3.67 dB', '2.03 to 5.30 dB', '3', '1', 'no, hatched'],
    ]);
  });

  it('adjust p as p.adjust(method = "BH") does', () => {
    const adjusted = tableOf('adjusted-p', 'p before and after').map((row) => row[3]);
    expect(adjusted).toEqual(['0.006', '0.036', '0.044', '0.044', '0.054', '0.600']);
    expect(resultsOf('adjusted-p')).toEqual({ 'Below 0.05 before': '5', 'Below 0.05 adjusted': '4' });
  });

  it('pool as metafor::rma(method = "PM") and blup do', () => {
    const pooled = tableOf('pooling', 'Raw and pooled').map((row) => row[4]);
    expect(pooled).toEqual(['+2.96 dB', '+2.19 dB', '+0.66 dB', '+1.88 dB', '+3.06 dB']);
    expect(resultsOf('pooling')).toEqual({
      'Mean of the sectors': '+2.15 dB',
      Tau: '1.19 dB',
      Q: '18.05, 4 degrees of freedom, p 0.001',
      'I²': '78 %',
    });
  });

  it('widen the interval for many looks by the published formula, with r from uniroot', () => {
    expect(tableOf('peek-proof', 'What each look shows')).toEqual([
      ['16 Nov', '18', '+1.64 dB', '1.09 to 2.19 dB', '0.61 to 2.66 dB'],
      ['17 Nov', '24', '+1.65 dB', '1.19 to 2.10 dB', '0.84 to 2.45 dB'],
      ['18 Nov', '30', '+1.67 dB', '1.28 to 2.05 dB', '1.00 to 2.33 dB'],
    ]);
    expect(resultsOf('peek-proof')).toEqual({ r: '0.2026' });
  });

  it('plan as power.t.test(type = "paired") does', () => {
    expect(tableOf('planning', 'What it still needs').map((row) => row.slice(1))).toEqual([
      ['17', '0'],
      ['58', '3'],
      ['224', '23'],
      ['888', '106'],
      ['115', '10'],
    ]);
    expect(tableOf('detectable', 'True difference and chance to find it')).toEqual([
      ['+1.00 dB', '37 %'],
      ['+1.72 dB', '80 %'],
      ['+2.50 dB', '98 %'],
    ]);
  });

  it('try other choices, weighted as lm(weights) and without a station as on a subset', () => {
    expect(tableOf('sensitivity', 'Choices and answers')).toEqual([
      ['As asked', '+2.13 dB', '1.06 to 3.19 dB', '12'],
      ['Ranks', '+1.75 dB', '0.75 to 2.75 dB', '12'],
      ['Stations and nights', '+2.13 dB', '0.88 to 3.37 dB', '12'],
      ['Without the heaviest', '+1.71 dB', '0.61 to 2.82 dB', '7'],
      ['Every station the same', '+2.08 dB', '1.14 to 3.02 dB', '12'],
    ]);
  });
});

describe('ladder and findings in the examples', () => {
  it('rank as lm with sum-to-zero antennas and vcovCL do', () => {
    expect(tableOf('ladder', 'The ladder')).toEqual([
      ['North-east wire', '+2.14 dB', '1.86 to 2.41 dB', '12'],
      ['Vertical', '+0.24 dB', '-0.04 to +0.51 dB', '12'],
      ['South loop', '-1.06 dB', '-1.30 to -0.83 dB', '12'],
      ['West wire', '-1.31 dB', '-1.83 to -0.79 dB', '4'],
    ]);
    expect(Object.values(resultsOf('ladder'))).toEqual(['-0.50 dB', '+0.50 dB']);
  });

  it('draw the chance of being best close to the normal integral', () => {
    // pnorm of the fitted difference over its error: 0.772; 20,000 draws know it to about 0.003.
    expect(tableOf('chance-best', 'Values and chances').map((row) => row[3])).toEqual([
      '77 %',
      '23 %',
      '0 %',
    ]);
  });

  it('split direct from indirect as a dummy column in lm does, with hat() as weight', () => {
    expect(tableOf('direct-indirect', 'Pairs')[0]).toEqual([
      'North-east wire - Vertical',
      '+2.00 dB',
      '+1.50 dB',
      '+1.90 dB',
      '80 %',
      '45 %',
    ]);
    expect(Object.values(resultsOf('direct-indirect'))).toEqual(['+0.50 dB, p 0.138']);
  });

  it('stand apart until one evening joins them', () => {
    expect(tableOf('components', 'Ladders')).toEqual([
      ['1', 'North-east wire, Vertical, South loop'],
      ['2', 'West wire, Old loop'],
    ]);
    expect(tableOf('components', 'After one evening of South loop against West wire')).toEqual([
      ['1', 'North-east wire, Vertical, South loop, West wire, Old loop'],
    ]);
  });

  it('stay the same on the same data and change with one corrected unit', () => {
    expect(tableOf('finding', 'Frozen and again')).toEqual([
      ['frozen', '12', '+2.125 dB', '1.06 to 3.19 dB', 'same'],
      ['same data', '12', '+2.125 dB', '1.06 to 3.19 dB', 'same'],
      ['after the correction', '12', '+2.250 dB', '0.96 to 3.54 dB', 'changed'],
    ]);
  });

  it('show the SHA-256 that Node makes of the lines', () => {
    for (const [db, shown] of Object.entries(exampleDigests)) {
      const text = digestLines(db)
        .map((line) => `${line}\n`)
        .join('');
      expect(shown).toBe(createHash('sha256').update(text).digest('hex'));
    }
    expect(Object.keys(exampleDigests)).toEqual(['3.5', '3.25']);
  });
});
