import { formatDb, formatDbInterval } from '../format.ts';
import { clusterMean } from '../stats/index.ts';
import type { MethodEntry } from './method-entry.ts';
import { exampleClusters, exampleDb, exampleFit, unitsTable } from './worked-answer.ts';

export const finding: MethodEntry = {
  id: 'finding',
  title: 'Finding',
  asks: 'Can I still trust next year what we decided on today?',
  text: [
    'A finding is an answer that has been frozen: the question with every default spelt out, the nights, the rules, the counts, all numbers and pictures, the switch log behind it, a digest of the units used, and the version of the program.',
    'It can be worked out again at any time. The program asks the same question of today\u2019s data and says either \u201csame data, same numbers\u201d or what has changed: units added or gone, a corrected dwell, a bearing, the program itself.',
    'Decisions (keep, rebuild, take down, look again) are added to a finding with who and why. They are never changed; the last one counts.',
  ],
  example: () => {
    const changed = exampleDb.map((db, i) => (i === 0 ? db + 1.5 : db));
    const again = clusterMean(exampleDb, exampleClusters.ids);
    const corrected = clusterMean(changed, exampleClusters.ids);
    const frozen = exampleFit();
    const row = (name: string, fit: typeof frozen) => [
      name,
      String(fit.n),
      formatDb(fit.estimate, 3),
      formatDbInterval(fit.interval!, 2),
      fit.estimate === frozen.estimate && fit.se === frozen.se ? 'same' : 'changed',
    ];
    return {
      words:
        'The twelve units frozen, worked out again, and worked out after a dwell was corrected, which moved the first unit from 3.0 to 4.5 dB:',
      tables: [
        unitsTable(),
        {
          caption: 'Frozen and again',
          head: ['When', 'Units', 'Difference', '95 % interval', 'Numbers'],
          rows: [row('frozen', frozen), row('same data', again), row('after the correction', corrected)],
        },
      ],
      results: [],
    };
  },
  sources: ['Our own rule.'],
  related: ['digest', 'verdict'],
};

/** Lines of one night as the digest reads them; a tab stands between the parts. */
export const digestLines = (differenceDb: string): readonly string[] => [
  'whichwire finding 1\t1\t2',
  'night\t2026-11-14',
  `u\t2026-11-14T20:00:00.000Z,EA8QSH,160,simultaneous,EI7QSB,EI7QSC\t2,2,${differenceDb}`,
  'h\tUA9QSM,160,a\t1',
];

/** SHA-256 of the lines above, each ended by a line feed; a test computes them anew. */
export const exampleDigests: Readonly<Record<string, string>> = {
  '3.5': '20613bf7fb13510af49556cdb197d3296265396da90757cd82bd9e7572f1982c',
  '3.25': '69a29635c186068c65365c0a51b8650010d382ed75a6798da2092ab9d2a778ab',
};

export const digest: MethodEntry = {
  id: 'digest',
  title: 'Digest of a finding',
  asks: 'How do I know that the data behind it are the very same?',
  text: [
    'All units and heard-only stations of an answer are written as lines of text, night by night in a fixed order, and SHA-256 makes 64 characters of them. The same lines give the same characters; one changed decimal gives quite different ones.',
    'Two prints of a finding with the same digest rest on the same data. Each night has a digest of its own, so that a change can be found.',
    'It shows a change, it does not prove who made it.',
  ],
  example: () => ({
    words:
      'One unit and one heard-only station, as lines. This digest was made beforehand; a test of the program makes it anew.',
    tables: [
      {
        caption: 'The lines',
        head: ['Line', 'Text'],
        rows: digestLines('3.5').map((line, k) => [String(k + 1), line.replaceAll('\t', ' \u2192 ')]),
      },
    ],
    results: Object.entries(exampleDigests).map(([db, sha]) => ({
      label: `Digest with a difference of ${db}`,
      value: `${sha.slice(0, 16)}\u2026`,
    })),
  }),
  sources: [
    'SHA-256: FIPS 180-4, Secure Hash Standard, National Institute of Standards and Technology (2015).',
  ],
  related: ['finding'],
};
